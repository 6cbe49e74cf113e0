"""Arms that turn about one direction only: four joints, all poses, in closed form.

Idea: where all turning axes are parallel, or a linkage makes them act so, the tool can be shifted
anyhow but turned about one direction only. What a target asks beyond that is its *tilt*: no posture
mends it, so it is told, and the target's point is met with the nearest turn. Along the axes one
slide reaches; across them three joints make a plane mechanism (planar.py), or with a level wrist
the waist and two links do (level_wrist.py). At most two postures, or four.

Source: closed forms of R R P R and of coupled wrists as in Craig, chapter 4, put as one plane
problem. The part of a turn about a line is that of its quaternion (swing and twist).

Not covered: tool points asked for without a turn, unless they are on the last axis; three slides;
axes that coincide. Axes typed a little out of parallel are taken as parallel, and each posture then
settled on the table as it stands.
"""

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.inverse.descent_arms import lines_of, no_bounds
from kinematics.inverse.descent_arrays import desk_for
from kinematics.inverse.found import NO_STAGE, POSITION, REACH_ACROSS, TILT, Found
from kinematics.inverse.four_axes_arms import (
    FourAxesGeometry,
    level_palletiser,
    plane_mechanism,
    stays,
)
from kinematics.inverse.four_axes_postures import (
    Across,
    Asked,
    Level,
    Written,
    palletiser,
    parallel,
)
from kinematics.inverse.level_wrist import MOST_LEVEL
from kinematics.inverse.planar import ROUNDING
from kinematics.inverse.screws import Screws, screws_of
from kinematics.inverse.settling import SETTLED, WORTH_TELLING, Settled, settle, settled_on_table
from kinematics.inverse.tolerances import EDGE_OF_ROUNDED, FOLD_OF_ROUNDED, TILT_TOLD
from kinematics.kernels.compiler import for_kernel
from kinematics.table import FloatArray, JointKind

_SAMPLES = 12
"""Turns that stand for a free joint: a twelfth apart, around the whole turn and again over the
first row's travel, which may be less than a twelfth."""
_PIECE = 4096
"""Postures there is room for at a time."""
_MOST_OF_ONE = MOST_LEVEL
"""Postures one target may have."""


class FourAxes:
    """A solver for arms that turn about one direction only; made by ``four_axes_of``.

    Solutions meet the target's point within reach; what they leave of its turn is the tilt, their
    ``angle_error``. The stage of a target that asks for a tilt is ``tilt``, solutions or none, and
    the shortfall that tilt in rad: whether it is too much is for the target's tolerance to say.
    Beyond reach by up to a thousandth of the length the nearest postures stand among the solutions,
    with stage and shortfall in metres; further out they are ``nearest``.

    Attributes
    ----------
    screws : lines of the arm; structure : what the postures are worked out from.
    """

    proof = "closed-form"

    def __init__(
        self,
        arm: Arm,
        screws: Screws,
        structure: Across | Level,
        geometry: FourAxesGeometry,
        turn: bool,
    ) -> None:
        self.screws, self.structure, self.geometry = screws, structure, geometry
        self._lines = lines_of(screws, arm, structure.frame[2])
        self._undrive = np.zeros((arm.joint_count, screws.rows))
        driven = list(arm.drive_map.driven)
        self._undrive[:, driven] = np.linalg.inv(self._lines.drive[driven])
        self._uneven, self._room = geometry.regime != "exact", no_bounds(arm)
        slack = FOLD_OF_ROUNDED * geometry.residual if self._uneven else 0.0
        self._asked, self._turn = Asked(slack, _samples(arm)), turn

    def solve(self, targets: FloatArray) -> Found:
        """Return all postures for targets (m, 4, 4), the tool in base, metres."""
        goals = for_kernel(self.screws.scaled(targets))
        if not self._turn:
            goals[:, :3, :3] = self.screws.tool_at_zero[:3, :3]
        count, rows = len(goals), self.screws.rows
        shortfall, free = np.zeros((count, 2)), np.zeros(count, np.bool_)
        nearest, begin = np.zeros((count, rows)), 0
        desk = desk_for(rows, self._undrive.shape[0], 0)
        pieces: list[tuple[FloatArray, NDArray[np.int64], FloatArray]] = []
        while begin < count or not pieces:
            room_for = min(_PIECE, _MOST_OF_ONE * (count - begin + 1))
            raw = np.zeros((room_for, rows))
            of = np.empty(room_for, np.int64)
            begin, told = self._write(goals, begin, Written(raw, of, shortfall, free))
            piece = Settled(np.empty_like(raw), of.copy(), np.empty((room_for, 2)), nearest)
            self._settle(goals, raw[:told], of[:told], shortfall)
            arguments = (self._uneven, goals, raw[:told], of[:told], shortfall)
            kept = settle(self._lines, desk, *arguments, piece)
            pieces.append((piece.motions[:kept], piece.target[:kept], piece.errors[:kept]))
        motions = np.concatenate([piece[0] for piece in pieces])
        target = np.concatenate([piece[1] for piece in pieces])
        errors = np.concatenate([piece[2] for piece in pieces])
        return self._found(motions, target, errors, shortfall, free, nearest)

    def _settle(
        self,
        goals: FloatArray,
        postures: FloatArray,
        of: NDArray[np.int64],
        shortfall: FloatArray,
    ) -> None:
        """Settle postures on a table whose axes are not parallel exactly, in place."""
        if self._uneven:
            worth = shortfall[of, 0] < WORTH_TELLING
            arguments = (self._lines, self._room, self._undrive, goals)
            postures[worth] = settled_on_table(*arguments, postures[worth], of[worth])

    def _found(
        self,
        motions: FloatArray,
        target: NDArray[np.int64],
        errors: FloatArray,
        shortfall: FloatArray,
        free: NDArray[np.bool_],
        nearest: FloatArray,
    ) -> Found:
        """Return what was written, in metres and rad."""
        length, edge = self.screws.length, self._near_the_edge(shortfall[:, 0])
        unit = np.where(self.screws.prismatic, length, 1.0)
        reached = np.full(len(shortfall), np.inf)
        np.minimum.at(reached, target, errors[:, 0])
        shortfall[(shortfall[:, 0] < ROUNDING) | (reached < SETTLED), 0] = 0.0
        stage, told_short = self._stages(shortfall)
        return Found(
            motions=motions * unit,
            target=target.astype(np.intp),
            position_error=errors[:, 0] * length,
            angle_error=errors[:, 1],
            open=free | edge,
            stage=stage,
            shortfall=told_short,
            nearest=nearest * unit,
        )

    def nearest(self, targets: FloatArray) -> FloatArray:
        """Return row motions (m, rows) that bring the tool's point nearest, the turn likewise."""
        found = self.solve(targets)
        best = found.nearest.copy()
        first = np.unique(found.target, return_index=True)
        best[first[0]] = found.motions[first[1]]
        return best

    def _write(self, scaled: FloatArray, begin: int, written: Written) -> tuple[int, int]:
        arguments = (self._asked, scaled, begin, written)
        if isinstance(self.structure, Level):
            return palletiser(self._lines, self.structure, *arguments)
        return parallel(self._lines, self.structure, *arguments)

    def _stages(self, shortfall: FloatArray) -> tuple[NDArray[np.int64], FloatArray]:
        """Return what each target fell short at, and by how much: reach before tilt."""
        reach = POSITION if isinstance(self.structure, Level) else REACH_ACROSS
        far, tilted = shortfall[:, 0] > 0.0, shortfall[:, 1] > TILT_TOLD
        stage = np.where(far, reach, np.where(tilted, TILT, NO_STAGE))
        told = np.where(far, shortfall[:, 0] * self.screws.length, shortfall[:, 1])
        return stage.astype(np.int64), np.where(far | tilted, told, 0.0)

    def _near_the_edge(self, short: FloatArray) -> NDArray[np.bool_]:
        """Return where axes out of parallel could make the difference between reach and none."""
        if self.geometry.regime == "exact":
            return np.zeros(len(short), np.bool_)
        if self.geometry.regime == "calibrated":
            return np.ones(len(short), np.bool_)
        return (short > 0.0) & (short < EDGE_OF_ROUNDED * self.geometry.residual)


def four_axes_of(arm: Arm, tool_in_flange: FloatArray, task: str = "pose") -> FourAxes | None:
    """Return the closed form of an arm that turns about one direction only, or None.

    Parameters
    ----------
    task : ``pose``, or ``position`` for an arm whose last turn leaves the tool's point in place:
        its last joint is then any, and found as if nothing was turned.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> turning, sliding = (Row(kind, 0.3, 0.0, 0.0, 0.0) for kind in JointKind)
    >>> rows = (turning, turning, sliding, turning)
    >>> solver = four_axes_of(Arm("four", Table(Convention.STANDARD, rows)), np.eye(4))
    >>> solver.geometry.say
    'axes 1, 2 and 4 are parallel and row 3 slides along them: closed form across the axes'
    >>> target = np.eye(4)[None]
    >>> target[0, :3, 3] = [0.9, 0.3, 0.1]
    >>> solver.solve(target).motions.round(6) + 0.0
    array([[-0.643501,  1.570796,  0.1     , -0.927295],
           [ 1.570796, -1.570796,  0.1     ,  0.      ]])
    """
    screws = screws_of(arm, tool_in_flange)
    for found in (plane_mechanism(arm, screws), level_palletiser(arm, screws)):
        if found is None:
            continue
        structure, geometry, last = found
        if task == "position" and not stays(screws, structure, last):
            return None
        return FourAxes(arm, screws, structure, geometry, task == "pose")
    return None


def _samples(arm: Arm) -> FloatArray:
    """Return turns that stand for a free joint: all around, and over the first joint's travel."""
    around = np.linspace(-np.pi, np.pi, _SAMPLES, endpoint=False)
    travel = arm.table.rows[0].travel
    if travel is None or arm.table.rows[0].joint is JointKind.PRISMATIC:
        return around
    within = np.linspace(travel.lower, travel.upper, 2 * _SAMPLES + 1)[1::2]
    return np.concatenate([around, within * arm.table.rows[0].direction])
