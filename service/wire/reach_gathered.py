"""Targets put together as they are read: a place for each, and what is wrong with the others.

Left out: reading them (reach_targets.py, reach_csv.py).
"""

from collections import Counter
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import NamedTuple, TypeVar

import numpy as np
from numpy.typing import NDArray

from kinematics.findings import Finding
from kinematics.reach.targets import CONE, FREEDOMS
from kinematics.table import FloatArray
from kinematics.tolerances import TARGET_ANGLE, TARGET_POSITION
from kinematics.travel.moves import Approach
from service.convert import Units
from service.details import Detail
from service.errors import ServiceError, TooLarge, UnusableValue
from service.wire.poses import Where
from service.wire.reach_request import MOST_TARGETS

Noted = TypeVar("Noted")
FIELD = "targets"
_DECIMALS = 9
"""Of positions that are told, in any unit: a nanometre at most."""

USUAL_FORM = "quaternion-wxyz"
FREEDOM_WORDS: Mapping[str, int] = {
    word: number for number, word in enumerate(FREEDOMS) if number != CONE
}
"""Freedoms that are said in one word."""


class Left(NamedTuple):
    """What a target leaves open, and how far off an arm may be; SI."""

    freedom: int
    cone: float = 0.0
    position_tolerance: float = TARGET_POSITION
    angle_tolerance: float = TARGET_ANGLE


class OneTarget(NamedTuple):
    """One target: tool in frame (4, 4), the form it came in, what is open, what was repaired."""

    tool_in_frame: FloatArray
    form: str
    left: Left
    repaired: tuple[Finding, ...] = ()
    approach: Approach | None = None


@dataclass(frozen=True, eq=False)
class ReadTargets:
    """The targets of a request; SI, in the frame asked for.

    Attributes
    ----------
    names : of all of them, None where one has none.
    places : (usable,), index of each usable one in the request.
    tool_in_frame : (usable, 4, 4); of a mere position the last column counts.
    freedom, cone, position_tolerance, angle_tolerance : (usable,), as in ``Targets``.
    forms : of the orientations as they came, (usable,).
    repaired : what was mended, by index among the usable.
    approaches : their directions in the frame, by index among the usable.
    refused : what is wrong with each of the others, by index in the request.
    """

    names: Sequence[str | None]
    places: NDArray[np.intp]
    tool_in_frame: FloatArray
    freedom: NDArray[np.int64]
    cone: FloatArray
    position_tolerance: FloatArray
    angle_tolerance: FloatArray
    forms: Sequence[str]
    repaired: Mapping[int, tuple[Finding, ...]]
    approaches: Mapping[int, Approach]
    refused: Mapping[int, Detail]

    @property
    def count(self) -> int:
        """Targets in all."""
        return len(self.names)

    def positions_out(self, units: Units) -> FloatArray:
        """Return where targets are, (count, 3), in the user's units; NaN of one that is unusable.

        What was typed reads the same: SI and back costs the last digit, which is rounded away.
        """
        found = np.full((self.count, 3), np.nan)
        metres = self.tool_in_frame[:, :3, 3]
        found[self.places] = np.round(units.length_out(metres), _DECIMALS)
        return found


class Gathered:
    """So many targets, none of them read yet.

    Attributes
    ----------
    refused : what is wrong with those that cannot be used, by index.
    """

    def __init__(self, count: int) -> None:
        self.refused: dict[int, Detail] = {}
        self._tool_in_frame = np.empty((count, 4, 4))
        self._freedom = np.zeros(count, dtype=np.int64)
        self._numbers = np.tile([0.0, TARGET_POSITION, TARGET_ANGLE], (count, 1))
        self._forms = [USUAL_FORM] * count
        self._repaired: dict[int, tuple[Finding, ...]] = {}
        self._approaches: dict[int, Approach] = {}

    def leave(self, place: int, freedom: int, cone: float, position: float, angle: float) -> None:
        """Note what one target leaves open, and its tolerances."""
        self._freedom[place] = freedom
        self._numbers[place] = cone, position, angle

    def place(self, places: Sequence[int], poses: FloatArray, form: str) -> None:
        """Note the poses of some targets, all of one form."""
        self._tool_in_frame[places] = poses
        for place in places:
            self._forms[place] = form

    def take(self, place: int, target: OneTarget) -> None:
        """Note all of one target."""
        self.leave(place, *target.left)
        self.place([place], target.tool_in_frame[None], target.form)
        if target.repaired:
            self._repaired[place] = target.repaired
        if target.approach is not None:
            self._approaches[place] = target.approach

    def read(self, names: Sequence[str | None]) -> ReadTargets:
        """Return what has been gathered.

        Raises
        ------
        ServiceError : none of them can be used.
        """
        count = len(self._forms)
        if len(self.refused) == count:
            details = list(self.refused.values())
            raise ServiceError(details[0].say, errors=details, status=422)
        usable = [place for place in range(count) if place not in self.refused]
        places = np.array(usable, dtype=np.intp)
        cone, position, angle = np.ascontiguousarray(self._numbers[places].T)
        return ReadTargets(
            names=names,
            places=places,
            tool_in_frame=self._tool_in_frame[places],
            freedom=self._freedom[places],
            cone=cone,
            position_tolerance=position,
            angle_tolerance=angle,
            forms=[self._forms[place] for place in usable],
            repaired=_by_index(self._repaired, usable),
            approaches=_by_index(self._approaches, usable),
            refused=self.refused,
        )


def _by_index(noted: Mapping[int, Noted], usable: Sequence[int]) -> dict[int, Noted]:
    return {index: noted[place] for index, place in enumerate(usable) if place in noted}


def refuse_too_many(count: int) -> None:
    """Refuse none, or more than one answer holds.

    Raises
    ------
    UnusableValue, TooLarge
    """
    if count == 0:
        raise UnusableValue(
            "there are no targets", where=(FIELD,), value=0, way_out="give at least one target"
        )
    if count > MOST_TARGETS:
        raise TooLarge(
            f"more than {MOST_TARGETS} targets in one request",
            where=(FIELD,),
            value=count,
            way_out=f"send at most {MOST_TARGETS} at a time",
            status=422,
        )


def refuse_same_names(names: Sequence[str | None], where: Callable[[int], Where]) -> None:
    """Refuse two targets of one name: whoever reads the answer could not tell them apart.

    Raises
    ------
    UnusableValue
    """
    counts = Counter(names)
    counts.pop(None, None)
    if len(counts) == counts.total():
        return
    seen: set[str | None] = set()
    for place, name in enumerate(names):
        if name in seen:
            raise UnusableValue(
                f"the name {name!r:.80} stands twice",
                where=where(place),
                value=name,
                way_out="give each target a name of its own, or none",
            )
        if name is not None:
            seen.add(name)
