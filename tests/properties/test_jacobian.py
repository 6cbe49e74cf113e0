"""What holds for every arm's Jacobian: complex steps, batches, axes, power, speeds and back."""

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from kinematics.arm import Arm
from kinematics.jacobian import in_axes, joint_efforts, motion_of, singular_values_of, tool_twist
from kinematics.joint_speeds import joint_speeds
from kinematics.task_space import task_space
from tests.kinematics.plain_chain import stepped_jacobian
from tests.properties.arm_strategies import arms_and_postures, poses

thorough = settings(deadline=None, max_examples=60)
ROUNDING = 3e-14  # levers of up to some ten metres
parts = st.floats(-2.0, 2.0, allow_subnormal=False)
vectors = st.tuples(*[parts] * 6).map(np.array)


@thorough
@given(arms_and_postures(min_rows=0, most=2), poses)
def test_the_jacobian_is_the_complex_step(drawn: tuple[Arm, np.ndarray], tool: np.ndarray) -> None:
    arm, postures = drawn
    of_joints = motion_of(arm, postures, tool).of_joints
    assert of_joints.shape == (len(postures), 6, arm.joint_count)
    for index, joint_values in enumerate(postures):
        expected = stepped_jacobian(arm, joint_values, tool)
        np.testing.assert_allclose(of_joints[index], expected, rtol=0.0, atol=ROUNDING)


@thorough
@given(arms_and_postures(min_rows=0), poses)
def test_batch_equals_loop(drawn: tuple[Arm, np.ndarray], tool: np.ndarray) -> None:
    arm, postures = drawn
    batch = motion_of(arm, postures, tool)
    for index, joint_values in enumerate(postures):
        alone, part = motion_of(arm, joint_values, tool), batch.of_posture(index)
        for name in ("tool_in_base", "of_rows", "of_joints"):
            np.testing.assert_allclose(
                getattr(part, name), getattr(alone, name), rtol=0.0, atol=ROUNDING
            )


@thorough
@given(arms_and_postures(), poses, poses)
def test_axes_turn_columns_and_keep_singular_values(
    drawn: tuple[Arm, np.ndarray], tool: np.ndarray, frame: np.ndarray
) -> None:
    arm, postures = drawn
    of_joints = motion_of(arm, postures, tool).of_joints
    turned = in_axes(of_joints, frame[:3, :3])
    back = in_axes(turned, frame[:3, :3].T)
    np.testing.assert_allclose(back, of_joints, rtol=0.0, atol=ROUNDING)
    first, second = (np.linalg.svd(each, compute_uv=False) for each in (of_joints, turned))
    np.testing.assert_allclose(first, second, rtol=0.0, atol=ROUNDING)
    np.testing.assert_allclose(singular_values_of(of_joints), first, rtol=0.0, atol=ROUNDING)


@thorough
@given(arms_and_postures(), poses, vectors, st.data())
def test_the_power_at_the_joints_is_that_at_the_tool(
    drawn: tuple[Arm, np.ndarray], tool: np.ndarray, load: np.ndarray, data: st.DataObject
) -> None:
    arm, postures = drawn
    of_joints = motion_of(arm, postures, tool).of_joints
    speeds = np.array(data.draw(st.tuples(*[parts] * arm.joint_count)))
    at_tool = (tool_twist(of_joints, speeds) * load).sum(axis=-1)
    at_joints = (joint_efforts(of_joints, load) * speeds).sum(axis=-1)
    np.testing.assert_allclose(at_joints, at_tool, rtol=0.0, atol=1e-11)


@thorough
@given(arms_and_postures(max_rows=6), poses, st.data())
def test_the_two_speed_directions_undo_each_other(
    drawn: tuple[Arm, np.ndarray], tool: np.ndarray, data: st.DataObject
) -> None:
    """Speeds to a twist and back, where the joints are independent of each other."""
    arm, postures = drawn
    space = task_space(arm, tool)
    assert space is not None
    speeds = np.array(data.draw(st.tuples(*[parts] * arm.joint_count)))
    scale = np.array([1.0 / space.length] * 3 + [1.0] * 3)
    for of_joints in motion_of(arm, postures, tool).of_joints:
        values = np.linalg.svd(of_joints * scale[:, None] * space.joint_scale)[1]
        answer = joint_speeds(arm, space, of_joints, tool_twist(of_joints, speeds))
        if space.pose_rank == arm.joint_count and values[-1] > space.near:
            # Condition of up to 1e3 or so, in units of L for slides.
            tolerance = 1e-11 * max(1.0, space.length, 1.0 / space.length)
            np.testing.assert_allclose(answer.speeds, speeds, rtol=0.0, atol=tolerance)
            assert answer.findings == ()
        # In any case nothing grows beyond what damping allows.
        asked = np.linalg.norm(scale * tool_twist(of_joints, speeds))
        size = np.linalg.norm(answer.speeds / space.joint_scale)
        assert size <= asked / space.near * (1.0 + 1e-9)
