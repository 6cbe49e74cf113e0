"""Has every kernel compiled ahead of the first question, by asking one of each kind.

In parts, so that several processes can compile at once for another that loads what they leave in
the cache: ``python -m kinematics.warm_up PART``. Left out: when, and in which process (the
service's business).
"""

import sys
from collections.abc import Callable, Mapping, Sequence

import numpy as np

from kinematics.angle_triples import AxisOrder, angles_of
from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.frames import FrameGraph
from kinematics.jacobian import Motion, motion_of, singular_values_of
from kinematics.kernels.compiler import is_kept
from kinematics.kernels.frame_poses import loops_walked
from kinematics.kernels.judgement import judge_postures
from kinematics.kernels.travel import travel_left
from kinematics.orientation_batches import checked_rotations
from kinematics.orientation_forms import shape_of
from kinematics.pose_batches import poses_as_given
from kinematics.rotations import quaternion_wxyz_of
from kinematics.singularity import judge
from kinematics.table import Convention, JointKind, Row, Table
from kinematics.task_space import TaskSpace
from kinematics.travel_limits import margin_and_outside

_ROW = Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0, top_speed=1.0)
_POSTURE = np.array([[0.3, 0.4]])


def _poses() -> None:
    arm, flange = _arm(), np.eye(4)
    tool = tool_in_base(arm, _POSTURE, flange)
    quaternion_wxyz_of(tool)
    angles_of(AxisOrder((2, 1, 0), False), tool[:, :3, :3])
    motion_of(arm, _POSTURE, flange)
    margin_and_outside(arm, _POSTURE)


def _judgements() -> None:
    # Made up, so that no kernel of the other part is needed.
    axes, jacobian, pose = np.zeros((1, 2, 3)), np.ones((1, 6, 2)), np.eye(4)[None].copy()
    motion = Motion(pose, pose, axes, axes, jacobian, jacobian)
    singular_values_of(jacobian)
    space = TaskSpace(
        task="position",
        rows=(0, 1, 2),
        length=1.0,
        joint_scale=np.ones(2),
        generic_rank=2,
        pose_rank=2,
        near=0.1,
        basis=np.eye(3),
        watched_position_rank=0,
        samples=_POSTURE,
    )
    judge(_arm(), space, motion)


def _relations() -> None:
    for form in ("xyz-fixed", "rotation-vector", "quaternion-wxyz"):
        checked_rotations(form, np.ones((1, *shape_of(form))))
    given = poses_as_given("xyz-fixed", np.zeros((2, 3)), np.zeros((2, 3)))
    assert given is not None
    graph = FrameGraph(["a", "a"], ["b", "b"], given)
    graph.ways(["a"], ["b"])
    assert len(graph.closures[0]) == 1


# What is imported below is as much as all the rest, and only wanted where reach is asked about.
def _closed_forms() -> None:
    from kinematics.reach.first_checks import check_closed_forms

    check_closed_forms()


def _searches() -> None:
    from kinematics.reach.first_checks import check_searches

    check_searches()


def _courses() -> None:
    from kinematics.travel.first_courses import follow_first_courses

    follow_first_courses()


_PARTS: Mapping[str, Callable[[], None]] = {
    "poses": _poses,
    "judgements": _judgements,
    "relations": _relations,
    "closed-forms": _closed_forms,
    "searches": _searches,
    "courses": _courses,
}
POSTURES = ("poses", "judgements")
"""The parts that questions about postures need; they take about as long."""

RELATIONS = ("relations",)
"""The parts that questions about rotations and frames need beside those."""

REACH = ("closed-forms", "searches", "courses")
"""The parts that questions about reach need beside those; they take the longest."""


def warm_up(parts: Sequence[str] = (*POSTURES, *RELATIONS, *REACH)) -> None:
    """Compile, or load from the cache, the kernels of some parts; some seconds when cold.

    Examples
    --------
    >>> warm_up(["poses"])
    """
    for part in parts:
        _PARTS[part]()


def to_be_compiled(parts: Sequence[str]) -> list[str]:
    """Return the parts that must be compiled and whose code can then be kept for others.

    Examples
    --------
    >>> warm_up(POSTURES)
    >>> to_be_compiled(POSTURES)
    []
    """
    return [part for part in parts if is_kept(_LAST[part]()) is False]


def _last_of_closed_forms() -> Callable[..., object]:
    from kinematics.reach.first_checks import LAST_OF_CLOSED_FORMS

    return LAST_OF_CLOSED_FORMS


def _last_of_searches() -> Callable[..., object]:
    from kinematics.reach.first_checks import LAST_OF_SEARCHES

    return LAST_OF_SEARCHES


def _last_of_courses() -> Callable[..., object]:
    from kinematics.travel.first_courses import LAST_OF_COURSES

    return LAST_OF_COURSES


_LAST: Mapping[str, Callable[[], Callable[..., object]]] = {
    "poses": lambda: travel_left,
    "judgements": lambda: judge_postures,
    "relations": lambda: loops_walked,
    "closed-forms": _last_of_closed_forms,
    "searches": _last_of_searches,
    "courses": _last_of_courses,
}
"""A kernel that each part ends with, so that a part which was cut short counts as missing."""


def _arm() -> Arm:
    return Arm("planar", Table(Convention.STANDARD, (_ROW, _ROW)))


if __name__ == "__main__":
    warm_up(sys.argv[1:])
