"""Which two joints alone move the point of an arm in a plane, and the region they bring it to.

Idea: which joints move the point along two given directions is asked of the chain at generic
postures rather than read from the table, so that couplings, linkages and constant links need no
case of their own. Where it is exactly two, what they reach in that plane is the region of a pair,
whatever moves the point across it. The region is cut where the motion of the pair folds, and the
cuts must be level lines of what the second joint moves: that too is asked, not supposed.

Source: regional structure of arms (Milenkovic and Huang 1983). Not covered: combined travel between
the pair and other joints.
"""

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.envelope.pair_region import PairRegion, PlaneMap, clipped
from kinematics.envelope.tolerances import IN_ONE_PLANE, MOST_PAIR_TURN, SAME_FOLD
from kinematics.jacobian import motion_of
from kinematics.reach.travel_region import TravelRegion, travel_region
from kinematics.table import FloatArray
from kinematics.task_space import sample_postures


@dataclass(frozen=True)
class PointMotion:
    """How the joints of an arm move its point, at generic postures.

    Attributes
    ----------
    postures : (samples, joints); places : (samples, 3), m, in the base.
    linear : (samples, 3, joints); off : motion that does not count, m or m/rad.
    """

    arm: Arm
    tool_in_flange: FloatArray
    limits: TravelRegion
    postures: FloatArray
    places: FloatArray
    linear: FloatArray
    off: float

    def at(self, postures: FloatArray) -> "PointMotion":
        """Return the same at other postures (samples, joints)."""
        moved = motion_of(self.arm, postures, self.tool_in_flange)
        places, linear = moved.tool_in_base[:, :3, 3], moved.of_joints[:, :3]
        return replace(self, postures=postures, places=places, linear=linear)

    def movers(self, directions: FloatArray) -> tuple[int, ...]:
        """Return the joints that move the point along any of some directions (count, 3)."""
        moved = np.abs(directions @ self.linear).max(axis=(0, 1), initial=0.0)
        return tuple(np.nonzero(moved > self.off)[0].tolist())

    def apart(self, joints: tuple[int, ...]) -> bool:
        """Whether no combined travel ties these joints to others."""
        some = np.zeros(self.arm.joint_count, dtype=bool)
        some[list(joints)] = True
        tied = self.limits.weights != 0.0
        return not (tied[:, some].any(axis=1) & tied[:, ~some].any(axis=1)).any()


def point_motion(arm: Arm, tool_in_flange: FloatArray, *, working: bool = False) -> PointMotion:
    """Return how the joints move the tool point.

    Raises
    ------
    KinematicsError : as ``travel_region``.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = [Row(JointKind.REVOLUTE, *row, 0.0, 0.0) for row in ((0.0, np.pi / 2), (0.5, 0.0))]
    >>> motion = point_motion(Arm("two", Table(Convention.STANDARD, tuple(rows))), np.eye(4))
    >>> motion.movers(np.array([[0.0, 0.0, 1.0]]))
    (1,)
    """
    limits = _within_a_turn(arm, travel_region(arm, working=working))
    postures = sample_postures(arm, 1.0)
    moved = motion_of(arm, postures, tool_in_flange)
    linear = moved.of_joints[:, :3]
    # An arm that does not move its point at all has no length to take a share of.
    off = IN_ONE_PLANE * max(float(np.abs(linear).max(initial=0.0)), 1e-300)
    return PointMotion(
        arm, tool_in_flange, limits, postures, moved.tool_in_base[:, :3, 3], linear, off
    )


def _within_a_turn(arm: Arm, limits: TravelRegion) -> TravelRegion:
    """Return the region with one turn, the one about 0, of each joint that has a turn to itself.

    More of it brings the point nowhere new, and far from 0 angles lose digits.
    """
    lower, upper = limits.lower.copy(), limits.upper.copy()
    for joint in whole_turns(arm, limits).tolist():
        lower[joint] = min(max(-np.pi, lower[joint]), upper[joint] - 2.0 * np.pi)
        upper[joint] = lower[joint] + 2.0 * np.pi
    return replace(limits, lower=lower, upper=upper)


def whole_turns(arm: Arm, limits: TravelRegion) -> NDArray[np.intp]:
    """Return the joints that turn one row alone, are bounded alone, and have a whole turn.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table, Travel
    >>> rows = [Row(JointKind.REVOLUTE, 0.4, 0, 0, 0, travel=Travel(0.0, most)) for most in (6, 7)]
    >>> arm = Arm("two", Table(Convention.STANDARD, tuple(rows)))
    >>> whole_turns(arm, travel_region(arm))
    array([1])
    """
    matrix = np.abs(arm.drive_map.matrix)
    alone = (np.count_nonzero(matrix, axis=0) == 1) & (matrix.max(axis=0, initial=0.0) == 1.0)
    free = ~limits.weights.any(axis=0)
    # One turn of a joint without travel is a rounding short of one.
    wide = limits.upper - limits.lower >= 2.0 * np.pi * (1.0 - 1e-15)
    found: NDArray[np.intp] = np.nonzero(arm.revolute_joints & alone & free & wide)[0]
    return found


def pair_region_of(
    motion: PointMotion,
    directions: FloatArray,
    origin: FloatArray,
    held: tuple[int, ...] = (),
) -> PairRegion | None:
    """Return what two joints bring the point to along two directions; None where others do too.

    Parameters
    ----------
    directions : (2, 3), unit vectors in the base, across each other; origin : (3,), counted from.
    held : joints that do not count and stay where the first posture of the motion has them.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = [Row(JointKind.REVOLUTE, *row, 0.0, 0.0) for row in
    ...         ((0.0, np.pi / 2), (0.5, 0.0), (0.3, 0.0))]
    >>> arm = Arm("upright", Table(Convention.STANDARD, tuple(rows)))
    >>> motion = point_motion(arm, np.eye(4))
    >>> held = motion.at(motion.postures * [0.0, 1.0, 1.0])
    >>> region = pair_region_of(held, np.eye(3)[[0, 2]], np.zeros(3), held=(0,))
    >>> region.extent().round(9)
    array([-0.8,  0.8])
    """
    pair = tuple(joint for joint in motion.movers(directions) if joint not in held)
    if len(pair) != 2 or not motion.apart(pair):
        return None
    arm, limits, chosen = motion.arm, motion.limits, list(pair)
    still = motion.postures[0]

    def place_of(postures: FloatArray) -> tuple[FloatArray, FloatArray]:
        joint_values = np.tile(still, (len(postures), 1))
        joint_values[:, chosen] = postures
        moved = motion_of(arm, joint_values, motion.tool_in_flange)
        places = (moved.tool_in_base[:, :3, 3] - origin) @ directions.T
        return places, directions @ moved.of_joints[:, :3, chosen]

    level = arm.drive_map.matrix[arm.drive_map.driven[pair[1]]][chosen]
    if not _folds_on(level, place_of, motion.postures[:, chosen]):
        return None
    low, high = limits.lower[chosen], limits.upper[chosen]
    polygon = np.array([[low[0], low[1]], [high[0], low[1]], [high[0], high[1]], [low[0], high[1]]])
    for cut, least, most in zip(limits.weights, limits.cut_lower, limits.cut_upper, strict=True):
        if cut[chosen].any():
            polygon = clipped(clipped(polygon, cut[chosen], most), -cut[chosen], -least)
    if np.ptp(polygon, axis=0)[arm.revolute_joints[chosen]].max(initial=0.0) > MOST_PAIR_TURN:
        return None
    if len(polygon) < 3 or np.ptp(polygon, axis=0).min() <= 0.0:
        return None  # a joint that its travel holds still
    region = PairRegion(place_of, polygon, level)
    return region if region.parts else None


def _folds_on(level: FloatArray, place_of: PlaneMap, postures: FloatArray) -> bool:
    """Whether the determinant keeps its value along level lines of the second joint's variable."""
    along = np.array([-level[1], level[0]])
    steps = np.linspace(-1.0, 1.0, len(postures))[:, None] * along
    jacobians = place_of(postures)[1]
    here, there = _determinants(jacobians), _determinants(place_of(postures + steps)[1])
    sizes = np.sqrt((jacobians * jacobians).sum(axis=1)).prod(axis=1)
    if (np.abs(here) <= SAME_FOLD * sizes).all():
        return False  # both joints move the point one way everywhere
    return bool(np.abs(here - there).max() <= SAME_FOLD * np.abs(here).max())


def _determinants(jacobians: FloatArray) -> FloatArray:
    found: FloatArray = (
        jacobians[:, 0, 0] * jacobians[:, 1, 1] - jacobians[:, 0, 1] * jacobians[:, 1, 0]
    )
    return found
