"""The joint values that all travel limits allow, as a box and what cuts it.

Idea: a travel limit of one joint is a side of a box; a combined travel, and the travel of a row
that a linkage moves, bound a sum of several joints and cut corners off that box. The smallest box
around what is left has its sides where linear programs put them, two for each joint. A revolute
joint that nothing bounds takes one turn, since more of it brings the tool nowhere new.

Source: linear programs solved by HiGHS (Huangfu and Hall 2018) in scipy. Not covered: how often
each place in the region can be reached, and regions with curved sides.
"""

from dataclasses import dataclass
from weakref import WeakKeyDictionary

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.errors import KinematicsError
from kinematics.table import FloatArray
from kinematics.travel_limits import Limit, limits_of


@dataclass(frozen=True)
class TravelRegion:
    """What travel allows: ``lower <= q <= upper`` and ``cut_lower <= weights q <= cut_upper``.

    Attributes
    ----------
    lower, upper : (joints,), the smallest box that holds the region; rad or m.
    weights : (cuts, joints), of limits that bound more than one joint; cut_lower, cut_upper :
        (cuts,).
    """

    lower: FloatArray
    upper: FloatArray
    weights: FloatArray
    cut_lower: FloatArray
    cut_upper: FloatArray

    @property
    def is_box(self) -> bool:
        """Whether nothing is cut off the box."""
        return not len(self.weights)

    def holds(self, joint_values: FloatArray) -> NDArray[np.bool_]:
        """Return which of some postures in the box (count, joints) keep to what cuts it."""
        sums = joint_values @ self.weights.T
        inside = (sums >= self.cut_lower) & (sums <= self.cut_upper)
        return np.asarray(inside.all(axis=-1))


_kept: dict[tuple[bool, bool], WeakKeyDictionary[Arm, TravelRegion]] = {
    (working, tight): WeakKeyDictionary() for working in (False, True) for tight in (False, True)
}
"""What was found of an arm, within travel and within working travel, as long as it is there."""


def travel_region(arm: Arm, *, working: bool = False, tight: bool = True) -> TravelRegion:
    """Return the joint values an arm may take.

    Parameters
    ----------
    working : whether working travel bounds too.
    tight : whether the box is to be the smallest; else it is that of the limits of single joints,
        for which no linear program is solved, and which may hold nothing that all cuts allow.

    Raises
    ------
    KinematicsError : an arm without joints, a prismatic joint that nothing bounds, limits that no
        joint values keep to.

    Examples
    --------
    Two joints of one turn each whose sum is held to a quarter of one.

    >>> from kinematics.arm import CombinedTravel
    >>> from kinematics.table import Convention, JointKind, Row, Table, Travel
    >>> row = Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0, travel=Travel(0.0, 6.0))
    >>> sum_of_both = CombinedTravel({1: 1.0, 2: 1.0}, Travel(-1.0, 1.5))
    >>> arm = Arm("two", Table(Convention.STANDARD, (row, row)), combined_travel=(sum_of_both,))
    >>> travel_region(arm).upper
    array([1.5, 1.5])
    """
    kept = _kept[working, tight]
    region = kept.get(arm)
    if region is None:
        region = kept[arm] = _region(arm, working=working, tight=tight)
    return region


def _region(arm: Arm, *, working: bool, tight: bool) -> TravelRegion:
    if not arm.joint_count:
        raise KinematicsError(
            "the arm has no joints, and so no reach",
            where=("arm", "rows"),
            way_out="ask about an arm with at least one driven row",
        )
    limits = [limit for limit in limits_of(arm).each if working or not limit.working]
    lower, upper = np.full(arm.joint_count, -np.inf), np.full(arm.joint_count, np.inf)
    cuts: list[Limit] = []
    for limit in limits:
        (of_joints,) = np.nonzero(limit.weights)
        if len(of_joints) > 1:
            cuts.append(limit)
            continue
        for joint in of_joints.tolist():
            ends = (np.array(limit.travel) - limit.constant) / limit.weights[joint]
            lower[joint] = max(lower[joint], ends.min())
            upper[joint] = min(upper[joint], ends.max())
    weights = np.array([limit.weights for limit in cuts]).reshape(len(cuts), arm.joint_count)
    constants = np.array([limit.constant for limit in cuts])
    cut_lower = np.array([limit.travel.lower for limit in cuts]) - constants
    cut_upper = np.array([limit.travel.upper for limit in cuts]) - constants
    if cuts and tight:
        lower, upper = _tightened(lower, upper, weights, cut_lower, cut_upper)
    elif (lower > upper).any():
        raise _nothing_left()
    lower, upper = _one_turn(arm, lower, upper)
    return TravelRegion(lower, upper, weights, cut_lower, cut_upper)


def _tightened(
    lower: FloatArray,
    upper: FloatArray,
    weights: FloatArray,
    cut_lower: FloatArray,
    cut_upper: FloatArray,
) -> tuple[FloatArray, FloatArray]:
    """Return the smallest box around what the cuts leave of a box; infinite where it is open."""
    # Imported where it is needed: it takes as long as all else of the core.
    from scipy.optimize import linprog

    ends = np.stack([lower, upper])
    for joint in range(len(lower)):
        for end, sign in ((0, 1.0), (1, -1.0)):
            cost = np.zeros(len(lower))
            cost[joint] = sign
            found = linprog(
                cost,
                A_ub=np.vstack([weights, -weights]),
                b_ub=np.concatenate([cut_upper, -cut_lower]),
                bounds=np.stack([lower, upper], axis=1),
            )
            if found.status == _INFEASIBLE:
                raise _nothing_left()
            if found.status == _SOLVED:
                ends[end, joint] = sign * found.fun
    # What the programs put a rounding outside of a joint's own travel is brought back into it.
    return np.maximum(ends[0], lower), np.minimum(ends[1], upper)


_SOLVED, _INFEASIBLE = 0, 2
"""Of ``linprog``; any other outcome leaves the side where it was, which loses nothing."""


def _one_turn(arm: Arm, lower: FloatArray, upper: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return the box with one turn where a revolute joint is open."""
    lower, upper = lower.copy(), upper.copy()
    for joint, revolute in enumerate(arm.revolute_joints.tolist()):
        if np.isfinite(lower[joint]) and np.isfinite(upper[joint]):
            continue
        if not revolute:
            row = arm.drive_map.driven[joint]
            raise KinematicsError(
                f"joint {joint + 1} slides without end: its row has no travel",
                where=("arm", "rows", row, "travel"),
                way_out=f"give row {row + 1} its travel",
            )
        if np.isfinite(lower[joint]):
            upper[joint] = lower[joint] + 2.0 * np.pi
        elif np.isfinite(upper[joint]):
            lower[joint] = upper[joint] - 2.0 * np.pi
        else:
            lower[joint], upper[joint] = -np.pi, np.pi
    return lower, upper


def _nothing_left() -> KinematicsError:
    return KinematicsError(
        "the travel limits of the arm exclude each other: no joint values keep to all of them",
        where=("arm",),
        way_out="check combined travel and the travel of passive rows against that of the joints",
    )
