"""Readouts of a screen and what they mean, and how far every map is from each of them.

Left out: the maps themselves (screen_readings), what fits and how well (orientation_guesses).
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from kinematics.errors import InvalidOrientation
from kinematics.number_checks import FloatArray, checked_numbers
from kinematics.reading_words import plainest_first
from kinematics.rotations import quaternion_wxyz_of
from kinematics.screen_readings import Family, Map, families_of
from kinematics.screen_rotations import IntArray, product_of
from kinematics.tolerances import GUESS_DECIMALS

COUNTS = (3, 4, 9)
"""How many numbers an orientation is shown by."""


@dataclass(frozen=True, slots=True)
class KnownOrientation:
    """A readout whose whole orientation is known: the tool in the base, (3, 3)."""

    tool_in_base: FloatArray


@dataclass(frozen=True, slots=True)
class KnownDirection:
    """A readout of which is known where one direction points, (3,) of length 1, seen from both."""

    in_tool: FloatArray
    in_base: FloatArray


Meaning = KnownOrientation | KnownDirection


def checked_direction(values: object) -> FloatArray:
    """Return a direction from outside as a vector of length 1.

    Parameters
    ----------
    values : 3 numbers, not all 0.

    Raises
    ------
    InvalidOrientation : another count, no number, a length of zero.
    NotFinite, OutOfRange : as checked_numbers.

    Examples
    --------
    >>> checked_direction([0, 0, -5]).tolist()
    [0.0, 0.0, -1.0]
    """
    vector = checked_numbers(values, (3,), "a direction")
    longest = np.abs(vector).max()
    if longest == 0.0:
        raise InvalidOrientation(
            "the direction has length zero",
            value=values,
            way_out="give a direction with at least one component that is not 0",
        )
    scaled = vector / longest  # squares of 1e-200 would leave the range of doubles
    return np.asarray(scaled / np.linalg.norm(scaled) + 0.0)


@dataclass(frozen=True, slots=True)
class Held:
    """Every map that could be, held against every readout.

    Attributes
    ----------
    maps : those of which a screen could show every readout.
    keys : (maps, 4), of their plainness; the plainer sorts first.
    residuals : (maps, readouts), rad, to GUESS_DECIMALS.
    """

    maps: Sequence[Map]
    keys: IntArray
    residuals: FloatArray

    def ranked(self) -> IntArray:
        """Return the places of all maps by their residuals, of equal ones the plainer first."""
        return np.asarray(np.lexsort((*self.keys.T[::-1], rms_of(self.residuals))))

    def by_plainness(self, places: IntArray) -> IntArray:
        """Return places of maps with the plainest first."""
        return np.asarray(places[np.lexsort(self.keys[places].T[::-1])])


def rms_of(residuals: FloatArray) -> FloatArray:
    """Return the root of the mean square over the readouts, the last axis, to GUESS_DECIMALS.

    Examples
    --------
    >>> float(rms_of(np.array([0.3, 0.4, 0.0, 0.0])))
    0.25
    """
    return np.asarray(np.round(np.sqrt(np.mean(residuals**2, axis=-1)), GUESS_DECIMALS))


def held_against(shown: FloatArray, meanings: Sequence[Meaning], unit: str | None) -> Held:
    """Return how far all maps that could be are from what the readouts mean.

    Parameters
    ----------
    shown, meanings, unit : as orientation_guesses.guesses takes them.

    Returns
    -------
    held : of at least one map.

    Raises
    ------
    InvalidOrientation : no readout, a count that is not one of COUNTS, or no map that could show
        all readouts; ``where`` is then the index of the readout to look at.

    Examples
    --------
    >>> level = KnownOrientation(np.eye(3))
    >>> held_against(np.eye(3).reshape(1, 9), [level], None).residuals.ravel().tolist()
    [0.0, 0.0, 0.0, 0.0, 0.0, 0.0, 0.0, 0.0]
    """
    families = families_of(shown.shape[-1], unit) if len(shown) else ()
    maps: list[Map] = []
    residuals, keys = [], []
    for family in families:
        kept = np.flatnonzero(family.possible(shown).all(axis=1))
        if len(kept):
            angles = _angles_off(family.quaternions(shown), meanings)[kept]
            residuals.append(np.round(angles, GUESS_DECIMALS))
            keys.append(plainest_first(family)[1][kept])
            maps += [Map(family, place) for place in kept.tolist()]
    if not maps:
        raise _meaningless(shown, families)
    return Held(maps, np.concatenate(keys), np.concatenate(residuals))


def _meaningless(shown: FloatArray, families: Sequence[Family]) -> InvalidOrientation:
    if not families:
        return InvalidOrientation(
            f"{len(shown)} readouts of {shown.shape[-1]} numbers",
            value=shown.shape[-1],
            way_out="give at least one readout of 3, 4 or 9 numbers, all of as many",
        )
    could = np.concatenate([family.possible(shown) for family in families])
    # The readout that the fewest maps could show is the one to look at.
    at_fault = int(np.argmin(could.sum(axis=0)))
    what, way_out = {
        3: (
            "are more than two turns in every unit",
            "take whole turns off, or say the unit they are shown in",
        ),
        4: (
            "are neither a quaternion, whose squares add up to 1, nor an axis of length 1 and an "
            "angle, at least not the same one in all readouts",
            "give the numbers as the screen shows them, with all their decimals",
        ),
        9: (
            "are no rotation matrix",
            "give its numbers row by row or column by column, with four decimals or more",
        ),
    }[shown.shape[-1]]
    return InvalidOrientation(
        f"the numbers shown {what}",
        where=(at_fault,),
        value=shown[at_fault].tolist(),
        way_out=way_out,
    )


def _angles_off(tool_in_base: FloatArray, meanings: Sequence[Meaning]) -> FloatArray:
    """Angles (maps, readouts) between unit quaternions (maps, readouts, 4) and what is known."""
    angles = np.empty(tool_in_base.shape[:2])
    whole = [place for place, known in enumerate(meanings) if isinstance(known, KnownOrientation)]
    rotations = [known.tool_in_base for known in meanings if isinstance(known, KnownOrientation)]
    if whole:
        base_in_tool = quaternion_wxyz_of(np.stack(rotations)) * [1.0, -1.0, -1.0, -1.0]
        off = product_of(base_in_tool, tool_in_base[:, whole])
        across = np.linalg.norm(off[..., 1:], axis=-1)
        angles[:, whole] = 2.0 * np.arctan2(across, np.abs(off[..., 0]))
    part = [place for place, known in enumerate(meanings) if isinstance(known, KnownDirection)]
    directions = [known for known in meanings if isinstance(known, KnownDirection)]
    if part:
        in_base = np.stack([known.in_base for known in directions])
        turned = _turned(tool_in_base[:, part], np.stack([known.in_tool for known in directions]))
        across = np.linalg.norm(np.cross(turned, in_base), axis=-1)
        angles[:, part] = np.arctan2(across, np.sum(turned * in_base, axis=-1))
    return angles


def _turned(quaternion: FloatArray, vector: FloatArray) -> FloatArray:
    scalar, axis = quaternion[..., :1], quaternion[..., 1:]
    twice = 2.0 * np.cross(axis, vector)
    return np.asarray(vector + scalar * twice + np.cross(axis, twice))
