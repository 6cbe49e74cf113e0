"""A reading of a screen in words, and which of readings that are the same is the plainest.

Left out: the readings themselves (screen_readings) and whether they fit (orientation_guesses).
"""

import math
from dataclasses import dataclass
from functools import cache

import numpy as np

from kinematics.number_checks import FloatArray
from kinematics.screen_readings import AXIS_ANGLE, UNITS_OF_SCREENS, Family, Reading
from kinematics.screen_rotations import IntArray
from kinematics.tolerances import NAMED_AXIS, SETTLED_DECIMALS

_UNIT_WORDS = {"deg": "degrees", "rad": "radians", "half-turns": "half turns"}
_COUNTS = {0: "first", 1: "second", 2: "third"}
# What most screens show; only for ranking what is alike otherwise.
_USUAL = ("xyz-fixed", "zyx-current", "zyz-current", "quaternion-wxyz", "quaternion-xyzw")


def plainness(reading: Reading) -> tuple[int, int, int, int]:
    """Return a key by which the plainer of two readings sorts first.

    Degrees before radians before half turns; then as few oddities as can be (an inverse, numbers
    that count the other way); then the order of the screen; then what screens usually show.

    Examples
    --------
    >>> plain = Reading("xyz-fixed", (1, 2, 3), (1, 1, 1), "deg")
    >>> odd = Reading("xyz-fixed", (1, 2, 3), (1, -1, 1), "deg")
    >>> plainness(plain) < plainness(odd)
    True
    """
    units = list(UNITS_OF_SCREENS)
    unit = units.index(reading.unit) if reading.unit else 0
    signs = _signs_that_count(reading)
    reversed_signs = 0 if min(signs) > 0 else 1 if max(signs) < 0 else 2
    order = reading.order
    swaps = sum(
        before > after for place, before in enumerate(order) for after in order[place + 1 :]
    )
    form = _USUAL.index(reading.form) if reading.form in _USUAL else len(_USUAL)
    two_axes = reading.form[0] == reading.form[2] if _is_triple(reading) else False
    return unit, reversed_signs + reading.inverse, swaps, form + two_axes


@cache
def plainest_first(family: Family) -> tuple[tuple[tuple[Reading, ...], ...], IntArray]:
    """Return the readings of each map with the plainest first, and its key: (maps, 4)."""
    found = tuple(tuple(sorted(same, key=plainness)) for same in family.readings())
    return found, np.array([plainness(same[0]) for same in found])


def handedness(reading: Reading) -> str:
    """Return right, left, mirrored-x, -y or -z, or mixed, where no handedness explains the signs.

    All turns count the other way where they are left-handed. Where one axis of the frames points
    the other way, the turn about it stays and those about the other two are reversed.

    Source
    ------
    A mirror carries turns as it carries axial vectors; Goldstein, Classical Mechanics, 4.9.

    Examples
    --------
    >>> handedness(Reading("xyz-fixed", (1, 2, 3), (-1, -1, 1), "deg"))
    'mirrored-z'
    """
    if min(reading.signs) > 0:
        return "right"
    if reading.form == "matrix":
        corners = [reading.signs[place] for place in (5, 2, 1)]  # yz, xz, xy
        return f"mirrored-{'xyz'[corners.index(1)]}"
    signs = _signs_that_count(reading)
    if max(signs) < 0:
        return "left"
    pairs = set(zip(_axes_of(reading), signs, strict=True))
    kept = {axis for axis, sign in pairs if sign > 0}
    undone = {axis for axis, sign in pairs if sign < 0}
    return f"mirrored-{min(kept)}" if len(kept) == 1 and not kept & undone else "mixed"


def words_of(reading: Reading) -> str:
    """Return a reading in words.

    Examples
    --------
    >>> words_of(Reading("zyx-current", (3, 2, 1), (1, 1, 1), "deg"))
    'angles in degrees, about the current axes z, y, x in turn; the screen lists x, y, z'
    """
    said = [_kind_in_words(reading), _order_in_words(reading)]
    seen = "read as the base seen from the tool" if reading.inverse else ""
    if reading.inverse and handedness(reading) == "left":
        seen += ", with all signs reversed"
    else:
        said.append(_signs_in_words(reading))
    return "; ".join(part for part in (*said, seen) if part)


@dataclass(frozen=True, slots=True)
class Lean:
    """Where a direction points, as people say it: so far off an axis, towards another.

    Attributes
    ----------
    axis : x, y, z, -x, -y or -z, the nearest.
    angle : rad, from it.
    towards : the next nearest; empty where the direction is the axis, as people see it.
    """

    axis: str
    angle: float
    towards: str


def lean_of(direction: FloatArray) -> Lean:
    """Return how a direction leans from the axes of its frame.

    Parameters
    ----------
    direction : (3,), of length 1.

    Examples
    --------
    >>> lean_of(np.array([0.0, 0.5, -np.sqrt(0.75)])).axis
    '-z'
    >>> lean_of(np.array([0.0, 1.0, 0.0]))
    Lean(axis='y', angle=0.0, towards='')
    """
    by_size = np.argsort(-np.abs(direction).round(SETTLED_DECIMALS), kind="stable")
    names = [f"{'-' if direction[axis] < 0 else ''}{'xyz'[axis]}" for axis in by_size]
    along, *across = (float(abs(direction[axis])) for axis in by_size)
    angle = math.atan2(math.hypot(*across), along)
    return Lean(names[0], angle, "" if along >= NAMED_AXIS else names[1])


def _kind_in_words(reading: Reading) -> str:
    unit = _UNIT_WORDS[reading.unit] if reading.unit else ""
    if _is_triple(reading):
        sequence, axes = reading.form.split("-")
        return f"angles in {unit}, about the {axes} axes {', '.join(sequence)} in turn"
    if reading.form == "rotation-vector":
        return f"a rotation vector, the axis times the angle in {unit}"
    if reading.form == AXIS_ANGLE:
        return f"an axis and the angle about it in {unit}"
    if reading.form == "matrix":
        return "a rotation matrix, its columns the axes of the tool"
    return "a quaternion"


def _order_in_words(reading: Reading) -> str:
    if reading.form == "matrix":
        by_rows = reading.order[1] == 2
        return f"the screen lists it {'row by row' if by_rows else 'column by column'}"
    names = _names_of(reading)
    listed = sorted(range(len(names)), key=lambda value: reading.order[value])
    if _is_triple(reading) and reading.form[0] == reading.form[2]:
        turns = [_COUNTS[value] for value in listed]
        return f"the screen lists the {', the '.join(turns)} turn"
    return f"the screen lists {', '.join(names[value] for value in listed)}"


def _signs_in_words(reading: Reading) -> str:
    handed = handedness(reading)
    if handed == "right":
        return ""
    mirrored = f"as in a frame whose {handed[-1]} axis points the other way"
    if reading.form == "matrix":
        return mirrored
    is_triple = _is_triple(reading)
    if handed == "left":
        return f"all {'turns' if is_triple else 'components'} count the other way (left-handed)"
    names = list(_axes_of(reading))
    if is_triple and reading.form[0] == reading.form[2]:
        names = list(_COUNTS.values())
    signs = _signs_that_count(reading)
    odd = [name for name, sign in zip(names, signs, strict=True) if sign < 0]
    said = " and ".join(odd) + (" count the other way" if odd[1:] else " counts the other way")
    if is_triple and names == list(_COUNTS.values()):
        said = f"of the turns the {said}"
    elif is_triple:
        said = f"the turn{'s' if odd[1:] else ''} about {said}"
    return said if handed == "mixed" else f"{said} ({mirrored})"


def _signs_that_count(reading: Reading) -> tuple[int, ...]:
    """Signs of the vector part of a quaternion or an axis; all of any other form."""
    if reading.form == "quaternion-wxyz":
        return reading.signs[1:]
    if reading.form in ("quaternion-xyzw", AXIS_ANGLE):
        return reading.signs[:3]
    return reading.signs


def _axes_of(reading: Reading) -> str:
    """The axis that each of the signs that count belongs to."""
    return reading.form[:3] if _is_triple(reading) else "xyz"


def _names_of(reading: Reading) -> list[str]:
    """What each value of the form is called."""
    if reading.form == AXIS_ANGLE:
        return [*"xyz", "the angle"]
    return list(reading.form.split("-")[1] if reading.form[0] == "q" else _axes_of(reading))


def _is_triple(reading: Reading) -> bool:
    return reading.form.endswith(("-current", "-fixed"))
