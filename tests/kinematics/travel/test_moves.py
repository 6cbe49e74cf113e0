"""Questions about moves: approaches and retracts made into courses, and what is refused."""

import numpy as np
import pytest

from kinematics.errors import KinematicsError
from kinematics.reach.targets import SPIN, Target
from kinematics.travel.moves import Approach
from kinematics.travel.to_targets import approached, back_along, in_base
from tests.kinematics.example_arms import random_pose
from tests.kinematics.inverse.seeds import fresh


def test_an_approach_comes_along_tool_z_or_a_direction_of_any_length() -> None:
    pose = random_pose(fresh())
    target = Target(pose, SPIN, 0.0, 1e-4, 1e-3)
    course = approached(target, Approach(0.2, speed=0.1), None, 7)
    assert course.start.target is not None
    assert course.start.target.tool_in_base[:3, 3] == pytest.approx(pose[:3, 3] - 0.2 * pose[:3, 2])
    assert (course.start.target.tool_in_base[:3, :3] == pose[:3, :3]).all()
    assert course.start.target.freedom == SPIN
    assert (course.position_tolerance, course.angle_tolerance, course.samples) == (1e-4, 1e-3, 7)
    (leg,) = course.legs
    assert leg.end.target is target
    assert leg.speed == 0.1
    down = back_along(target, Approach(0.2, np.array([0.0, 0.0, -30.0])), "approach")
    assert down.tool_in_base[:3, 3] == pytest.approx(pose[:3, 3] + [0.0, 0.0, 0.2])


def test_a_retract_alone_begins_at_the_target() -> None:
    target = Target(random_pose(fresh()))
    course = approached(target, None, Approach(0.1, speed=0.3))
    assert course.start.target is target
    assert [leg.speed for leg in course.legs] == [0.3]


def test_a_direction_in_a_frame_is_turned_with_it_alone() -> None:
    frame = random_pose(fresh())
    turned = in_base(Approach(0.1, np.array([0.0, 2.0, 0.0])), frame)
    assert turned.along == pytest.approx(2.0 * frame[:3, 1])
    along_tool = Approach(0.1)
    assert in_base(along_tool, frame) is along_tool


@pytest.mark.parametrize(
    ("approach", "where"),
    [
        (Approach(0.0), ("approach", "distance")),
        (Approach(-0.1), ("approach", "distance")),
        (Approach(0.1, np.zeros(3)), ("approach", "along")),
        (Approach(0.1, np.array([np.nan, 0.0, 0.0])), ("approach", "along")),
        (Approach(0.1, None, 0.0), ("approach", "speed")),
    ],
)
def test_what_leads_nowhere_is_refused_where_it_stands(
    approach: Approach, where: tuple[str, str]
) -> None:
    target = Target(np.eye(4))
    with pytest.raises(KinematicsError) as refused:
        approached(target, approach)
    assert refused.value.where == where
    assert refused.value.way_out
    with pytest.raises(KinematicsError) as refused:
        approached(target, Approach(0.1), approach)
    assert refused.value.where == ("retract", where[1])


def test_neither_way_is_no_way() -> None:
    with pytest.raises(KinematicsError, match="needs an approach or a retract"):
        approached(Target(np.eye(4)), None)
