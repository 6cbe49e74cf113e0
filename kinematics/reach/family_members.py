"""Solutions that are points of one family, kept as its witness alone.

Where an axis lines up with another, or the tool's point stands on one, solutions are no longer
single: a closed form returns some points of a continuum. Each is followed (inverse/families.py),
and those on one curve give way to the posture of it that is furthest from the ends of travel.

Source: none. Not covered: arms with joints to spare, all of whose solutions are of families; theirs
are told of the best postures found, and none gives way.
"""

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.inverse.drive import INSIDE, drive_of
from kinematics.inverse.families import Family as Followed
from kinematics.inverse.families import families_of
from kinematics.inverse.found import Found, none_found
from kinematics.inverse.iterative import TASKS
from kinematics.inverse.measured import DIRECTION, POSE, POSITION, errors_of, wrapped
from kinematics.inverse.screws import screws_of
from kinematics.inverse.self_motions import Curve, SelfMotions
from kinematics.inverse.several import joined, picked
from kinematics.inverse.solve import Method
from kinematics.reach.aligned_joints import AlignedJoints
from kinematics.reach.targets import Family
from kinematics.reach.tolerances import FAMILY_MEMBER, MOST_FOLLOWED
from kinematics.table import FloatArray

FamiliesOf = dict[int, tuple[Family, ...]]


def with_witnesses(
    method: Method,
    found: Found,
    targets: FloatArray,
    suspects: NDArray[np.bool_],
) -> tuple[Found, FamiliesOf]:
    """Return what was found with families in place of their points, and the families by target.

    Of more targets than are followed the solutions stay as they are, and their families are none.

    Parameters
    ----------
    targets : (m, 4, 4), the tool in base; suspects : (k,), solutions that are looked at.
    """
    families: FamiliesOf = {}
    kept, witnesses, of = np.ones(len(found.target), np.bool_), [], []
    suspected = np.unique(found.target[suspects]).tolist()
    for index in suspected[MOST_FOLLOWED:]:
        families[index] = ()
    for index in suspected[:MOST_FOLLOWED]:
        mine = np.flatnonzero((found.target == index) & suspects)
        told, members = _of_one(method, found.motions[mine], targets[index])
        kept[mine[members]] = False
        if not told:
            continue
        families[index] = told
        witnesses += [family.witness for family in told]
        of += [index] * len(told)
    if not of:
        return picked(found, kept), families
    motions = method.arm.drive_map.motions(np.array(witnesses))
    which = np.unique(of)
    return joined(
        picked(found, kept),
        _as_found(method, motions, np.searchsorted(which, of), found, targets, which),
        which,
    ), families


def _as_found(
    method: Method,
    motions: FloatArray,
    target: NDArray[np.intp],
    found: Found,
    targets: FloatArray,
    which: NDArray[np.intp],
) -> Found:
    """Return witnesses as solutions of the targets ``which``, of which nothing else changes."""
    screws = screws_of(method.arm, method.tool_in_flange)
    position, angle = errors_of(screws, motions, targets[which], target, method.task)
    return replace(
        none_found(len(which), screws.rows),
        motions=wrapped(motions, screws.prismatic),
        target=target,
        position_error=position,
        angle_error=angle,
        open=found.open[which],
        stage=found.stage[which],
        shortfall=found.shortfall[which],
        nearest=found.nearest[which],
    )


def families_told(
    method: Method, target: FloatArray, joint_values: FloatArray
) -> tuple[Family, ...]:
    """Return the families of postures (k, joints) on a target (4, 4), in the words of answers."""
    arm = method.arm
    followed = families_of(arm, method.tool_in_flange, method.task, target, joint_values)
    return tuple(_told(family, arm.joint_units) for family in followed)


def turned_freely(arm: Arm, idle: NDArray[np.bool_], values: FloatArray) -> Family:
    """Return the family of a posture (joints,) whose ``idle`` joints do not matter.

    The interval is the travel of the first of them, or a whole turn.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table, Travel
    >>> row = Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0, travel=Travel(-1.0, 2.0))
    >>> arm = Arm("one", Table(Convention.STANDARD, (row,)))
    >>> family = turned_freely(arm, np.array([True]), np.zeros(1))
    >>> family.free_joints, family.interval
    ((1,), ((-1.0, 2.0),))
    """
    free = np.flatnonzero(idle)
    low, high = drive_of(arm).box[:, free[0]].tolist()
    numbers = tuple(int(joint) + 1 for joint in free)
    return Family(numbers, arm.joint_units[free[0]], ((low, high),), values)


def spare_joints(method: Method) -> int:
    """Return how many more joints an arm has than its task asks for.

    Examples
    --------
    >>> from kinematics.inverse.solve import method_of
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = (Row(JointKind.REVOLUTE, 0.4, 0.3, 0.1, 0.0),) * 4
    >>> spare_joints(method_of(Arm("four", Table(Convention.STANDARD, rows)), np.eye(4), POSITION))
    1
    """
    return max(0, method.arm.joint_count - {POSE: 6, POSITION: 3, DIRECTION: 5}[method.task])


def _told(family: Followed, units: tuple[str, ...]) -> Family:
    relation = family.relation
    return Family(
        free_joints=family.free_joints,
        unit=units[family.free_joints[0] - 1],
        interval=family.interval,
        witness=family.witness,
        relation=None if relation is None else relation.say,
        measure=0.0 if relation is None else relation.measure,
    )


def _of_one(
    method: Method, motions: FloatArray, target: FloatArray
) -> tuple[tuple[Family, ...], NDArray[np.bool_]]:
    """Return the families of one target's suspects (k, rows), and which give way to them, (k,).

    Of a family beyond travel, which is not told, the posture met first stays.
    """
    postures = drive_of(method.arm).postures(motions)
    if method.task == POSE and method.arm.joint_count == 6:
        _, first = np.unique(postures.source, return_index=True)
        screws = screws_of(method.arm, method.tool_in_flange)
        in_line = AlignedJoints(method.arm, screws).families(postures.joint_values[first], target)
        if in_line is not None:
            return tuple(in_line[0]), in_line[1]
    self_motions = SelfMotions(method.arm, method.tool_in_flange, TASKS[method.task], target)
    curves: list[Curve] = []
    told: list[Family] = []
    members, leading = np.zeros(len(motions), np.bool_), np.zeros(len(motions), np.bool_)
    # Those within travel first: what is whole turns apart need not be on the same stretch.
    for place in np.argsort(postures.flags & INSIDE == 0, kind="stable").tolist():
        values, source = postures.joint_values[place], postures.source[place]
        scaled = values / self_motions.scale
        known = any(_lies_on(scaled, curve, self_motions.turning) for curve in curves)
        started = [] if known else list(self_motions.curves_from(scaled))
        curves += started
        leading[source] |= bool(started)
        members[source] |= known or bool(started)
        inside = bool(postures.flags[place] & INSIDE)
        if started or (known and inside and _is_of_another(values, told)):
            told += families_told(method, target, values[None])
    return tuple(told), members if told else members & ~leading


def _is_of_another(values: FloatArray, told: list[Family]) -> bool:
    """Tell whether a posture (joints,) is whole turns away from all families of two joints.

    Two axes in line turn against each other: their sum, or difference, is the family's own.
    """
    for family in told:
        if len(family.free_joints) != 2:
            return False
        one, other = (values - family.witness)[np.array(family.free_joints) - 1]
        if min(abs(one + other), abs(one - other)) < FAMILY_MEMBER:
            return False
    return True


def _lies_on(posture: FloatArray, curve: Curve, turning: NDArray[np.bool_]) -> bool:
    """Tell whether scaled joint values (joints,) are a point of a curve."""
    return replace(curve, points=posture[None], start=0).lies_on(curve, turning)
