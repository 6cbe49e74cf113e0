"""Which numbers to bring onto a screen next, so that what the readouts left open is told apart.

Numbers are tried from a small stock that people can bring a screen to and that keeps away from
gimbal lock; the best tell the most pairs of maps apart. Left out: how the arm gets there.
"""

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from itertools import permutations, product

import numpy as np

from kinematics.number_checks import FloatArray
from kinematics.screen_readings import AXIS_ANGLE, UNITS_OF_SCREENS, BoolArray, Map
from kinematics.tolerances import PAIRS_TRIED, RIGID_SILENT, SETTLED_DECIMALS, TOLD_APART

# Right angles show at a glance; odd angles tell more.
_RIGHT = (0.0, 90.0, -90.0)
_ODD = (20.0, 45.0, 70.0)
_DECIMALS = {"deg": 0, "rad": 2, "half-turns": 3}
_ODD_LENGTH_ONE = (0.183, 0.365, 0.548, 0.73)
_ODD_AXIS = (0.48, 0.6, 0.64)
# Every order of the odd angles once: numbers that only one order tells are not passed over.
_FEWEST_TRIED = 6


@dataclass(frozen=True, slots=True)
class NextReadout:
    """Numbers to bring onto the screen, and what each map then says.

    Attributes
    ----------
    shown : the numbers.
    unit : of the angles among them; None where there are none, or maps in several units could
        show the numbers.
    told_apart, pairs : of so many pairs of maps so many then differ by TOLD_APART, or by three
        times the tolerance; a pair also where one of the two could not show the numbers at all.
    difference : rad, the smallest between the predictions of two maps that are told apart; None
        where all of these are told by numbers that only one of two could show.
    left : how many maps can still fit once the screen shows the numbers, at most.
    left_otherwise : how many are left where the screen turns out not to show such numbers.
    """

    shown: tuple[float, ...]
    unit: str | None
    told_apart: int
    pairs: int
    difference: float | None
    left: int
    left_otherwise: int

    def prediction(self, of: Map) -> FloatArray | None:
        """Return the tool's orientation in the base (4,), w x y z, None where it cannot be."""
        shown = np.array([self.shown])
        if not of.family.possible(shown)[of.place, 0]:
            return None
        quaternion: FloatArray = of.quaternions(shown)[0]
        return quaternion


def next_readout(maps: Sequence[Map], tolerance: float) -> NextReadout | None:
    """Return the readout that tells the most pairs of maps apart; None where there is none.

    Only numbers that a screen of the plainest map can show are asked for. Of those that tell as
    many, right angles come first, since they show at a glance; then the one with the largest
    smallest difference.

    Parameters
    ----------
    maps : those that fit so far, the plainest first. With many of them fewer numbers are tried.
    tolerance : rad, as of the guesses.

    Returns
    -------
    next : of the numbers tried, those that tell the most.

    Source
    ------
    The choice of an experiment by what it tells apart whatever its outcome, as in Box and Hill,
    Technometrics 9(1), 1967, with a count of pairs in place of their expected entropy.

    Examples
    --------
    >>> from kinematics.screen_readings import Family
    >>> zyx_and_yzx = [Map(Family("turns", "deg", 3), 48 * place) for place in (10, 6)]
    >>> found = next_readout(zyx_and_yzx, 0.01)
    >>> found.shown, float(np.degrees(found.difference).round(6)), found.left
    ((90.0, 0.0, 0.0), 120.0, 1)
    """
    if len(maps) < 2:
        return None
    stock = list(_stock(maps))
    stock = stock[: max(_FEWEST_TRIED, PAIRS_TRIED // len(maps) ** 2)]
    shown = np.array([numbers for numbers, _ in stock])
    quaternions, possible, safe = _predictions(maps, shown)
    apart = min(max(TOLD_APART, 3.0 * tolerance), 0.5 * np.pi)
    best: tuple[tuple[float, ...], NextReadout] | None = None
    for place, (numbers, is_right) in enumerate(stock):
        found = _judged(quaternions[:, place], possible[:, place], safe[:, place], apart)
        told, difference, left = found
        # Rounded, so that rounding does not choose between readouts that are as good.
        rank = (told, float(is_right), round(difference or 0.0, SETTLED_DECIMALS))
        if told and possible[0, place] and (best is None or rank > best[0]):
            pairs = len(maps) * (len(maps) - 1) // 2
            showing = possible[:, place]
            units = {each.family.unit for each, shows in zip(maps, showing, strict=True) if shows}
            unit = units.pop() if len(units) == 1 else None
            others = int((~showing).sum())
            best = rank, NextReadout(numbers, unit, told, pairs, difference, left, others)
    return best[1] if best else None


def _judged(
    quaternions: FloatArray, possible: BoolArray, safe: BoolArray, apart: float
) -> tuple[int, float | None, int]:
    """Pairs told apart, the smallest difference among them, and the most that stay together."""
    seen = possible & safe
    alike = np.abs(quaternions[seen] @ quaternions[seen].T)
    # Right angles lie exactly as far apart as they must; rounding is not to tell.
    apart_seen = alike <= np.cos(0.5 * apart) + RIGID_SILENT
    showing, others = int(possible.sum()), int((~possible).sum())
    told = int(apart_seen.sum()) // 2 + showing * others
    closest = float(np.max(alike, where=apart_seen, initial=-1.0))
    difference = 2.0 * float(np.arccos(min(closest, 1.0))) if closest >= 0.0 else None
    # Near gimbal lock a map is told from no other that could show the numbers.
    from_fewest = 0 if showing > seen.sum() else int(apart_seen.sum(axis=1).min(initial=showing))
    together = showing - from_fewest
    return told, difference, together


def _predictions(maps: Sequence[Map], shown: FloatArray) -> tuple[FloatArray, BoolArray, BoolArray]:
    """Quaternions (maps, numbers, 4), whether they can be shown, and are away from gimbal lock."""
    quaternions = np.empty((len(maps), len(shown), 4))
    possible = np.empty((len(maps), len(shown)), dtype=np.bool_)
    safe = np.ones_like(possible)
    for family in dict.fromkeys(each.family for each in maps):
        mine = [number for number, each in enumerate(maps) if each.family == family]
        places = [maps[number].place for number in mine]
        quaternions[mine] = family.quaternions(shown)[places]
        possible[mine] = family.possible(shown)[places]
        safe[mine] = family.far_from_lock(shown)[places]
    return quaternions, possible, safe


def _stock(maps: Sequence[Map]) -> Iterator[tuple[tuple[float, ...], bool]]:
    """Numbers and whether they are right angles, what tells most first."""
    families = list(dict.fromkeys(each.family for each in maps))
    units = [unit for unit in UNITS_OF_SCREENS if any(f.unit == unit for f in families)]
    kinds = {family.kind for family in families}
    if families[0].count == 9:
        return (yield from ((numbers, False) for numbers in _matrices()))
    if families[0].count == 3:
        for is_right, choices in ((False, _odd_triples()), (True, product(_RIGHT, repeat=3))):
            triples = list(choices)
            for unit in units:
                yield from ((_in_unit(each, unit), is_right) for each in triples if any(each))
        return None
    if "quaternion" in kinds:
        yield from ((each, False) for each in permutations(_ODD_LENGTH_ONE))
    if AXIS_ANGLE in kinds:
        for unit in units:
            (angle,) = _in_unit((110.0,), unit)
            for axis in permutations(_ODD_AXIS):
                yield from ((each, False) for each in _with_angle(axis, angle))
    return None


def _odd_triples() -> Iterable[tuple[float, ...]]:
    signs = sorted(product((1.0, -1.0), repeat=3), key=lambda each: -sum(each))
    for sign in signs:
        for values in permutations(_ODD):
            yield tuple(s * value for s, value in zip(sign, values, strict=True))


def _with_angle(axis: tuple[float, ...], angle: float) -> list[tuple[float, ...]]:
    return [(*axis, angle), (angle, *axis)]


def _matrices() -> Iterator[tuple[float, ...]]:
    # Pythagorean quadruples 2 3 6 7 make a rotation of sevenths.
    rows = np.array([[6.0, 2.0, 3.0], [-3.0, 6.0, 2.0], [-2.0, -3.0, 6.0]]) / 7.0
    for shift in range(3):
        yield tuple(np.roll(rows, shift, axis=(0, 1)).ravel().round(4).tolist())


def _in_unit(degrees: Sequence[float], unit: str) -> tuple[float, ...]:
    scale = UNITS_OF_SCREENS["deg"] / UNITS_OF_SCREENS[unit]
    return tuple(round(value * scale, _DECIMALS[unit]) + 0.0 for value in degrees)
