"""What is asked of an arm and what it answers: targets, verdicts, reasons, solutions.

A yes carries joint values that lead there, a no carries the reason and what it rests on. Many
targets are arrays, solutions of all of them lie one behind the other; words are made only for
whoever reads them. Left out: how any of it is found (checks.py).
"""

from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import NamedTuple, Protocol

import numpy as np
from numpy.typing import NDArray

from kinematics.findings import Finding
from kinematics.table import FloatArray
from kinematics.tolerances import TARGET_ANGLE, TARGET_POSITION

NONE, SPIN, ORIENTATION, CONE = range(4)
FREEDOMS = ("none", "spin", "orientation", "cone")
"""What a target leaves open: nothing; the turn about tool z; all of the orientation; the direction
of tool z within a cone, and the turn about it."""

REACHABLE, OUTSIDE_TRAVEL, UNREACHABLE, NOT_FOUND = range(4)
VERDICTS = ("reachable", "outside-travel", "unreachable", "not-found")
CODES = (0, 201, 200, 202)
"""Of the wire's code table, by verdict."""

WITNESS, BOUND, CLOSED_FORM, ELIMINATION, BRANCH_AND_BOUND, SEARCH = range(6)
PROOFS = ("witness", "bound", "closed-form", "elimination", "branch-and-bound", "search")
"""What a verdict rests on: joint values; links too short for anybody; all solutions in closed
form, or all roots of an elimination, in floating point; boxes that all miss; nothing found."""


class Target(NamedTuple):
    """One place the tool is to be brought to; metres and radians.

    Attributes
    ----------
    tool_in_base : (4, 4); of a mere position the last column alone is read.
    freedom : one of NONE, SPIN, ORIENTATION, CONE; cone : half-angle, 0 to pi, of a CONE.
    position_tolerance, angle_tolerance : how far off an arm with fewer than six joints may be.
    """

    tool_in_base: FloatArray
    freedom: int = NONE
    cone: float = 0.0
    position_tolerance: float = TARGET_POSITION
    angle_tolerance: float = TARGET_ANGLE


@dataclass(frozen=True)
class Targets:
    """Many targets; each attribute as in ``Target``, with a batch axis (count, ...) before it.

    Examples
    --------
    >>> Targets.of([Target(np.eye(4)), Target(np.eye(4), SPIN)]).freedom
    array([0, 1])
    """

    tool_in_base: FloatArray
    freedom: NDArray[np.int64]
    cone: FloatArray
    position_tolerance: FloatArray
    angle_tolerance: FloatArray

    @classmethod
    def of(cls, targets: Sequence[Target]) -> "Targets":
        """Return so many single targets as one batch."""
        rows = [target[1:] for target in targets]
        columns = np.array(rows, dtype=np.float64).reshape(len(targets), 4).T
        poses = np.array([target.tool_in_base for target in targets], dtype=np.float64)
        return cls(
            poses.reshape(len(targets), 4, 4),
            columns[0].astype(np.int64),
            *(np.ascontiguousarray(column) for column in columns[1:]),
        )

    def __len__(self) -> int:
        return len(self.tool_in_base)

    def only(self, which: NDArray[np.intp] | NDArray[np.bool_]) -> "Targets":
        """Return those of the targets that ``which`` picks, in its order."""
        return Targets(
            self.tool_in_base[which],
            self.freedom[which],
            self.cone[which],
            self.position_tolerance[which],
            self.angle_tolerance[which],
        )


class TakesLonger(Exception):
    """What was asked at once needs families followed, or a search: milliseconds, not a tenth."""


@dataclass(frozen=True)
class Reason:
    """Why not, for one target.

    Attributes
    ----------
    code : kebab-case name of the case; texts may change, these never do.
    say : a sentence in which ``{shortfall}``, ``{measure}`` and ``{threshold}`` stand for the
        values, so that the edge can print them in the user's units.
    stage : what could not be met, in plain words ("wrist centre"); empty where nothing is known.
    shortfall : by how much, in ``unit`` (rad or m); measure, threshold : what was held against
        what, in the same unit.
    nearest : (4, 4), tool in base of the best that can be done; None where it is not known.
    """

    code: str
    say: str
    stage: str
    shortfall: float
    unit: str
    measure: float = 0.0
    threshold: float = 0.0
    nearest: FloatArray | None = None

    def text(self) -> str:
        """Return the sentence with its values in SI units.

        Examples
        --------
        >>> Reason("beyond-links", "{shortfall} too far", "links", 0.25, "m").text()
        '0.25 m too far'
        """
        return self.say.format(
            shortfall=f"{self.shortfall:.6g} {self.unit}",
            measure=f"{self.measure:.6g} {self.unit}",
            threshold=f"{self.threshold:.6g} {self.unit}",
        )


@dataclass(frozen=True)
class Family:
    """Postures that can be passed through without the tool leaving the target.

    Attributes
    ----------
    free_joints : 1-based numbers of the joints that move.
    unit : of the first of them, rad or m.
    interval : of the first of them, each (from, to) within travel.
    witness : (joints,), one posture of the family, rad or m.
    relation : a sentence that ties the free joints, ``{measure}`` standing for its constant in
        ``unit``, e.g. "joint 4 + joint 6 = {measure}"; None where it is not as simple as that.
    measure : that constant.
    """

    free_joints: tuple[int, ...]
    unit: str
    interval: tuple[tuple[float, float], ...]
    witness: FloatArray
    relation: str | None = None
    measure: float = 0.0


class Words(Protocol):
    """Makes what is said of one target, when it is asked for."""

    def reason(self, index: int) -> Reason | None: ...
    def families(self, index: int) -> tuple[Family, ...]: ...
    def findings(self, index: int) -> tuple[Finding, ...]: ...


@dataclass(frozen=True)
class Checks:
    """What is answered for m targets, with k solutions in all.

    The solutions of target i are ``offsets[i]`` up to ``offsets[i + 1]``, the best first. Where the
    verdict is OUTSIDE_TRAVEL they are all that geometry allows, and each exceeds a travel limit.

    Attributes
    ----------
    verdict, proof : (m,), indices into VERDICTS and PROOFS.
    offsets : (m + 1,). found : (m,), how many postures get there, told or not; where the verdict is
        OUTSIDE_TRAVEL, beyond travel.
    joint_values : (k, joints), rad or m.
    margin : (k,), smallest share of travel left, infinite where nothing bounds the arm.
    outside_working : (k,), within travel but beyond a working travel limit.
    position_error, angle_error : (k,), metres and radians, measured through the chain.
    branch : (k,), index into ``branches``, sentences; -1 where the arm is of no class with names.
    words : what is said of one target beyond that.
    """

    verdict: NDArray[np.int64]
    proof: NDArray[np.int64]
    offsets: NDArray[np.intp]
    found: NDArray[np.int64]
    joint_values: FloatArray
    margin: FloatArray
    outside_working: NDArray[np.bool_]
    position_error: FloatArray
    angle_error: FloatArray
    branch: NDArray[np.int64]
    branches: tuple[str, ...]
    words: Words = field(repr=False)

    def __len__(self) -> int:
        return len(self.verdict)

    def with_verdicts(
        self, verdict: NDArray[np.int64], proof: NDArray[np.int64], words: Words
    ) -> "Checks":
        """Return the same with other verdicts, and without postures of targets that have none."""
        told = verdict <= OUTSIDE_TRAVEL
        counts = np.diff(self.offsets)
        kept = np.repeat(told, counts)
        counts = np.where(told, counts, 0)
        return Checks(
            verdict,
            proof,
            np.concatenate([[0], np.cumsum(counts)]).astype(np.intp),
            np.where(told, self.found, 0),
            self.joint_values[kept],
            self.margin[kept],
            self.outside_working[kept],
            self.position_error[kept],
            self.angle_error[kept],
            self.branch[kept],
            self.branches,
            words,
        )

    def solutions_of(self, index: int) -> slice:
        """Return where the solutions of one target stand."""
        return slice(int(self.offsets[index]), int(self.offsets[index + 1]))

    def reason_of(self, index: int) -> Reason | None:
        """Return why one target cannot be reached as asked; None where it can."""
        return self.words.reason(index)

    def families_of(self, index: int) -> tuple[Family, ...]:
        """Return the families of one target's solutions; what each keeps of them is its witness."""
        return self.words.families(index)

    def findings_of(self, index: int) -> tuple[Finding, ...]:
        """Return what else should be known of the answer to one target."""
        return self.words.findings(index)
