"""What a solver of joint motions hands back, whatever its method, and the stages a no can name.

Idea: all solutions of all targets stand in one table, each row with the target it belongs to, so
that many targets cost no Python step each. Beside it stands one row per target: whether a no would
be proved, at which stage the target fell short, and by how much.

Source: none; a layout. Not covered: travel, whole turns, verdicts (kinematics/inverse/drive.py and
kinematics/reach), families (kinematics/inverse/families.py).
"""

from dataclasses import dataclass
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from kinematics.number_checks import FloatArray

STAGES = (
    "",
    "wrist centre",
    "wrist orientation",
    "meeting point of the axes",
    "turn about the meeting axes",
    "plane across the parallel axes",
    "reach across the parallel axes",
    "position",
    "height",
    "tilt",
    "search",
    "travel",
)
"""What a target can fail at, by its code: the index in this list. Code 0: nothing fell short.

A triple of axes that meet asks first that the outer joints bring the meeting point where it must
be (wrist centre, where they are the last three), then that the three can turn the rest. A triple
of parallel axes asks first that the outer joints bring planes across them into place, then that
the two links between them reach. A search names no place where it gave up; travel is its stage
where it met the target beyond travel alone."""

STAGE_UNITS = ("", "m", "rad", "m", "rad", "m", "m", "m", "m", "rad", "", "")
"""Unit of the shortfall at each stage."""

(
    NO_STAGE,
    WRIST_CENTRE,
    WRIST_ORIENTATION,
    MEETING_POINT,
    MEETING_TURN,
    PLANE,
    REACH_ACROSS,
    POSITION,
    HEIGHT,
    TILT,
    SEARCH,
    TRAVEL,
) = range(len(STAGES))


@dataclass(frozen=True, eq=False)
class Found:
    """What a solver found for m targets; k solutions in all, those of one target together.

    Attributes
    ----------
    motions : (k, rows), row motions, rad and metres; one of each class modulo whole turns, turns
        wrapped into (-pi, pi].
    target : (k,), ascending, which target.
    position_error, angle_error : (k,), metres and rad, measured through the chain.
    open : (m,), a free or nearly free joint was met, or something may have been lost to rounding:
        a no is not proved.
    stage : (m,), 0, or the code (in ``STAGES``) of the stage that failed.
    shortfall : (m,), by how much at that stage, in its unit; 0 where something was found, and where
        ``nearest`` has to be asked.
    nearest : (m, rows), row motions of the best effort where none was found; zeros elsewhere, and
        where nobody asked.

    Examples
    --------
    >>> found = none_found(2, 6)
    >>> len(found.motions), found.open.tolist(), found.count_per_target().tolist()
    (0, [False, False], [0, 0])
    """

    motions: FloatArray
    target: NDArray[np.intp]
    position_error: FloatArray
    angle_error: FloatArray
    open: NDArray[np.bool_]
    stage: NDArray[np.int64]
    shortfall: FloatArray
    nearest: FloatArray

    def count_per_target(self) -> NDArray[np.intp]:
        """Return how many solutions each target has, (m,)."""
        return np.bincount(self.target, minlength=len(self.open))


class Geometry(Protocol):
    """What a solver rests on: at least a sentence for people."""

    @property
    def say(self) -> str:
        """Which structure of the arm is used, and how exactly the table has it."""


class Solver(Protocol):
    """Whatever finds joint motions for targets.

    Attributes
    ----------
    proof : "closed-form", "elimination" or "search", what a no of it rests on.
    geometry : the structure of the arm it uses.
    """

    @property
    def proof(self) -> str: ...

    @property
    def geometry(self) -> Geometry: ...

    def solve(self, targets: FloatArray) -> Found:
        """Return what is found for targets (m, 4, 4), the tool in base, metres.

        Tasks without an orientation read the last column alone.
        """

    def nearest(self, targets: FloatArray) -> FloatArray:
        """Return row motions (m, rows), rad and metres, that bring the tool as near as they can.

        Best effort: by least squares over lengths as shares of the arm's and radians, from some
        starts. Slow beside ``solve``: only for targets that it found nothing for.
        """


def none_found(targets: int, rows: int) -> Found:
    """Return a result without solutions, every no of it proved and without a stage.

    Examples
    --------
    >>> found = none_found(2, 6)
    >>> found.motions.shape, found.open
    ((0, 6), array([False, False]))
    """
    return Found(
        motions=np.empty((0, rows)),
        target=np.empty(0, np.intp),
        position_error=np.empty(0),
        angle_error=np.empty(0),
        open=np.zeros(targets, np.bool_),
        stage=np.zeros(targets, np.int64),
        shortfall=np.zeros(targets),
        nearest=np.zeros((targets, rows)),
    )
