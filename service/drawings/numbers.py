"""Lengths, angles, areas and volumes as a drawing writes them.

Idea: a length has as many decimals as show a ten-thousandth of the drawing, none of them an idle
zero (ISO 129-1); areas and volumes have as many as their bound leaves. Left out: where they stand.
"""

from collections.abc import Callable, Sequence

from kinematics.envelope.measures import Measure
from kinematics.envelope.shapes import Envelope
from service.convert import Units

_SHARE = 1e-4
_MOST_DECIMALS = 6


def length_words(envelopes: Sequence[Envelope], units: Units) -> Callable[[float], str]:
    """Return what writes lengths, m, of envelopes."""
    lengths = [abs(units.value_out(e.value, "m")) for one in envelopes for e in one.extremes]
    decimals = _decimals(_SHARE * max(lengths, default=0.0))

    def words(metres: float) -> str:
        return _plain(units.value_out(metres, "m"), decimals)

    return words


def angle_words(radians: float, units: Units) -> str:
    """Return an angle.

    Examples
    --------
    >>> from service.convert import UNITS
    >>> angle_words(0.5, UNITS["mm-deg"]), angle_words(0.5, UNITS["m-rad"])
    ('28.6\u00b0', '0.5 rad')
    """
    if units.angle == "deg":
        return f"{_plain(units.value_out(radians, 'rad'), 1)}\u00b0"
    return f"{_plain(radians, 3)} rad"


def measure_words(measure: Measure, power: int, units: Units) -> str:
    """Return an area (``power`` 2) or a volume (3) with its bound.

    Millimetres are told in metres where they would be too many.

    Examples
    --------
    >>> from service.convert import UNITS
    >>> measure_words(Measure(2.74912, 0.0004), 3, UNITS["mm-deg"])
    '2.7491 m\u00b3 \u00b1 0.0004'
    """
    length, value, bound = units.length, measure.value, measure.error_bound
    if length == "mm" and value >= _IN_METRES:
        length = "m"
    else:
        for _ in range(power):
            value, bound = units.value_out(value, "m"), units.value_out(bound, "m")
    mark = {2: "\u00b2", 3: "\u00b3"}[power]
    bound = max(bound, 1e-4 * value)
    if value == 0.0:
        return "0"
    if value >= _MOST_WRITTEN_OUT or value < _LEAST_WRITTEN_OUT:
        return f"{value:.4g} {length}{mark} \u00b1 {bound:.1g}"
    decimals = _decimals(bound)
    step = 10.0**-decimals
    upward = step * -(-bound // step)
    return f"{_plain(value, decimals)} {length}{mark} \u00b1 {_plain(upward, decimals)}"


_IN_METRES = 1e-3
"""Square or cubic metres: less is told in millimetres."""

_MOST_WRITTEN_OUT, _LEAST_WRITTEN_OUT = 1e9, 1e-4


def _decimals(step: float) -> int:
    """Return how many decimals a step needs.

    Examples
    --------
    >>> _decimals(0.02), _decimals(0.1), _decimals(40.0)
    (2, 1, 0)
    """
    decimals = 0
    while decimals < _MOST_DECIMALS and step < 0.999 * 10.0**-decimals:
        decimals += 1
    return decimals


def _plain(value: float, decimals: int) -> str:
    """Return a number without idle zeros, nor a sign of zero."""
    words = f"{value:.{decimals}f}"
    words = words.rstrip("0").rstrip(".") if "." in words else words
    return "0" if words == "-0" else words
