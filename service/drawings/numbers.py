"""Lengths, angles, areas and volumes as a drawing writes them.

Idea: a length has as many decimals as show a ten-thousandth of the drawing, none of them an idle
zero (ISO 129-1); areas and volumes have as many as their bound leaves. Left out: where they stand.
"""

from collections.abc import Callable, Sequence

import numpy as np

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
    """Return an area (``power`` 2) or a volume (3) with its bound, both to the same digit.

    Millimetres are told in metres where they would be too many. What rounding takes off the value
    is in the bound, which is rounded upward.

    Examples
    --------
    >>> from service.convert import UNITS
    >>> measure_words(Measure(2.74912, 0.0004), 3, UNITS["mm-deg"])
    '2.7491 m\u00b3 \u00b1 0.0005'
    >>> measure_words(Measure(6.299, 0.02), 2, UNITS["m-rad"])
    '6.30 m\u00b2 \u00b1 0.03'
    """
    length, value, bound = units.length, measure.value, measure.error_bound
    if length == "mm" and value >= _IN_METRES:
        length = "m"
    else:
        for _ in range(power):
            value, bound = units.value_out(value, "m"), units.value_out(bound, "m")
    mark = {2: "\u00b2", 3: "\u00b3"}[power]
    if value == 0.0:
        return "0"
    written_out = _LEAST_WRITTEN_OUT <= value < _MOST_WRITTEN_OUT
    digit = int(np.floor(np.log10(max(bound, _FINEST * value)) + _JUST))
    digit = max(min(digit, 0), -_MOST_DECIMALS) if written_out else digit
    told, off = _in_steps(value, bound, digit)
    if off == 10 and (digit < 0 or not written_out):
        digit += 1
        told, off = _in_steps(value, bound, digit)
    if written_out:
        numbers = [f"{count * 10.0**digit:.{-digit}f}" for count in (told, off)]
    else:
        numbers = [f"{count * 10.0**digit:.{len(str(count)) - 1}e}" for count in (told, off)]
    return f"{numbers[0]} {length}{mark} \u00b1 {numbers[1]}"


def _in_steps(value: float, bound: float, digit: int) -> tuple[int, int]:
    """Return a value, and by how much it may be off as it is told, in whole steps of a digit."""
    step = 10.0**digit
    told = round(value / step)
    off = max(bound + abs(told * step - value), _FINEST * value)
    return told, int(np.ceil(off / step - _JUST))


_FINEST = 1e-4
"""Share of an area or a volume that is told, however well it is known."""

_JUST = 1e-9
"""Of a digit: what rounding may add to a bound that is just so much."""

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
