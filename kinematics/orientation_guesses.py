"""What the numbers on a screen mean, from readouts whose orientation or direction is known.

Every map of every family is held against every readout; what fits is ranked by its residual, and
each is told with all readings that are the same. Left out: the maps themselves (screen_readings),
their words (reading_words), how far they are off (readouts), which readout to take next
(next_readout); angles that count from another zero are not looked for.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from kinematics.constant_offsets import FEWEST_READOUTS, SIDES, Offset, offsets
from kinematics.next_readout import NextReadout, next_readout
from kinematics.number_checks import FloatArray
from kinematics.reading_words import plainest_first
from kinematics.readouts import Held, KnownOrientation, Meaning, held_against, rms_of
from kinematics.rotations import quaternion_wxyz_of
from kinematics.screen_readings import Map, Reading
from kinematics.tolerances import GUESS_FITS

MISSES_TOLD = 3
"""Guesses that are told where none fits: what is far off is of no use."""


@dataclass(frozen=True, slots=True)
class Guess:
    """One map with all readings that are the same, the plainest first.

    Attributes
    ----------
    map : what it makes of numbers.
    readings : at least one.
    residuals : (readouts,), rad, between what the map makes of each readout and what it means.
    rms : root of the mean square of the residuals, rad: what guesses are ranked by.
    fits : whether none of them is above the tolerance.
    """

    map: Map
    readings: tuple[Reading, ...]
    residuals: tuple[float, ...]
    rms: float
    fits: bool

    @property
    def worst(self) -> int:
        """Index of the readout with the largest residual."""
        return int(np.argmax(self.residuals))


@dataclass(frozen=True, slots=True)
class Guesses:
    """What can be said of a screen.

    Attributes
    ----------
    fitting : how many maps fit; 0 where the readouts contradict each other or all we know.
    ranked : the best of those that fit, or the nearest where none does.
    plainest : place in ``ranked`` of the plainest map that fits; None if it is not among them.
    nearest_miss : the best map that does not fit, None where all do.
    next : the readout that tells those that fit apart; None where there is nothing to tell.
    odd_one_out : where nothing fits, the index of the readout without which a map would, and that
        map; None where there is none, or fewer than three readouts.
    offset : where nothing fits, one turn of the tool or of the base with which a map would fit all
        readouts, and that map with what is then left; None where there is none, where there are
        fewer than three readouts or not all are of whole orientations.
    """

    fitting: int
    ranked: tuple[Guess, ...]
    plainest: int | None
    nearest_miss: Guess | None
    next: NextReadout | None
    odd_one_out: tuple[int, Guess] | None
    offset: tuple[Offset, Guess] | None


def guesses(
    shown: FloatArray,
    meanings: Sequence[Meaning],
    *,
    tolerance: float = GUESS_FITS,
    unit: str | None = None,
    most: int = 12,
) -> Guesses:
    """Return what fits the readouts of one screen, ranked, and what to read next.

    Parameters
    ----------
    shown : (readouts, 3), (readouts, 4) or (readouts, 9), at least one, as on the screen, finite.
    meanings : one for each readout.
    tolerance : rad, up to which a readout is explained.
    unit : key of UNITS_OF_SCREENS where it is known. Otherwise all are tried in which no shown
        angle is above two turns.
    most : of ``ranked``.

    Returns
    -------
    guesses : ranked by the root mean square of the residuals; of equal ones (to GUESS_DECIMALS) the
        plainer comes first.

    Raises
    ------
    InvalidOrientation : no readout, another count of numbers, or numbers that are an orientation in
        no form; ``where`` is the index of the readout.

    Source
    ------
    All maps are tried. The residual of an orientation is the angle of the turn that is left: Huynh,
    J. Mathematical Imaging and Vision 35(2), 2009, metric 6.

    Examples
    --------
    >>> from kinematics.readouts import KnownDirection
    >>> down = KnownDirection(np.array([0.0, 0.0, 1.0]), np.array([0.0, 0.0, -1.0]))
    >>> found = guesses(np.array([[180.0, 0.0, 30.0]]), [down])
    >>> found.ranked[0].readings[0].form, found.fitting > 20
    ('xyz-fixed', True)
    """
    held = held_against(shown, meanings, unit)
    order = held.ranked()
    fits = held.residuals[order].max(axis=1) <= tolerance
    fitting, missing = order[fits], order[~fits]

    def guess(place: int) -> Guess:
        return _guess(held.maps[place], held.residuals[place], tolerance)

    if not len(fitting):
        ranked = tuple(map(guess, missing[: min(most, MISSES_TOLD)]))
        odd = _odd_one_out(held, tolerance)
        return Guesses(0, ranked, None, None, None, odd, _offset(held, shown, meanings, tolerance))
    plainest = held.by_plainness(fitting)
    told = fitting[:most].tolist()
    return Guesses(
        len(fitting),
        tuple(map(guess, told)),
        told.index(plainest[0]) if plainest[0] in told else None,
        guess(missing[0]) if len(missing) else None,
        next_readout([held.maps[place] for place in plainest], tolerance),
        None,
        None,
    )


def _guess(of: Map, residuals: FloatArray, tolerance: float) -> Guess:
    readings = plainest_first(of.family)[0][of.place]
    fits = bool(residuals.max() <= tolerance)
    return Guess(of, readings, tuple(residuals.tolist()), float(rms_of(residuals)), fits)


def _odd_one_out(held: Held, tolerance: float) -> tuple[int, Guess] | None:
    """The readout without which something fits: of several, with the map that then fits best."""
    all_but_one = np.flatnonzero((held.residuals > tolerance).sum(axis=1) == 1)
    if held.residuals.shape[1] < FEWEST_READOUTS or not len(all_but_one):
        return None
    rest = np.sort(held.residuals[all_but_one], axis=1)[:, :-1]
    some = Held([held.maps[place] for place in all_but_one.tolist()], held.keys[all_but_one], rest)
    best = int(all_but_one[some.ranked()[0]])
    residuals = held.residuals[best]
    return int(np.argmax(residuals)), _guess(held.maps[best], residuals, tolerance)


def _offset(
    held: Held, shown: FloatArray, meanings: Sequence[Meaning], tolerance: float
) -> tuple[Offset, Guess] | None:
    """One constant turn with which a map fits: of several, the one that leaves the least."""
    whole = [known.tool_in_base for known in meanings if isinstance(known, KnownOrientation)]
    if len(whole) < len(meanings) or len(whole) < FEWEST_READOUTS:
        return None
    known = quaternion_wxyz_of(np.stack(whole))
    made = {family: family.quaternions(shown) for family in {each.family for each in held.maps}}
    said = np.stack([made[each.family][each.place] for each in held.maps])
    found: list[tuple[float, Offset, Guess]] = []
    for side in SIDES:
        turns, residuals = offsets(side, said, known)
        best = int(Held(held.maps, held.keys, residuals).ranked()[0])
        guess = _guess(held.maps[best], residuals[best], tolerance)
        if guess.fits:
            found.append((guess.rms, Offset(side, turns[best]), guess))
    return min(found, key=lambda each: each[0])[1:] if found else None
