"""What holds for every judgement: scipy's values, batches, any unit, any base, any axes."""

from dataclasses import replace

import numpy as np
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy.linalg import svdvals

from kinematics.arm import Arm
from kinematics.jacobian import characteristic_length, motion_of
from kinematics.singularity import SINGULAR, Judgement, judge
from kinematics.task_space import TaskSpace, task_space
from tests.kinematics.plain_chain import stepped_jacobian
from tests.properties.arm_strategies import arms_and_postures, poses
from tests.properties.test_chain import scaled, scaled_values

thorough = settings(deadline=None, max_examples=60)
tasks = st.sampled_from([None, "pose", "position", "orientation", ["vx", "vz", "wy"], ["wz"]])
ROUNDING = 1e-12  # singular values of up to some hundred, where L is short against the levers


def judged(
    arm: Arm, postures: np.ndarray, task: object = None, tool: np.ndarray | None = None
) -> tuple[TaskSpace, Judgement]:
    tool_in_flange = np.eye(4) if tool is None else tool
    space = task_space(arm, tool_in_flange, task)  # type: ignore[arg-type]
    assert space is not None
    return space, judge(arm, space, motion_of(arm, postures, tool_in_flange))


@thorough
@given(arms_and_postures(), tasks, poses)
def test_values_are_those_of_the_scaled_plain_jacobian(
    drawn: tuple[Arm, np.ndarray], task: object, tool: np.ndarray
) -> None:
    arm, postures = drawn
    space, judgement = judged(arm, postures, task, tool)
    for index, joint_values in enumerate(postures):
        matrix = space.scaled(stepped_jacobian(arm, joint_values, tool))
        values = svdvals(matrix)[: space.generic_rank]
        # The basis leaves out motions that reach 1e-4 of the largest in no sample posture.
        kept = space.basis.shape[1] == len(space.rows)
        tolerance = ROUNDING if kept else 1e-3 * max(1.0, *values, 0.0)
        np.testing.assert_allclose(judgement.values[index], values, rtol=0.0, atol=tolerance)


@thorough
@given(arms_and_postures(), tasks)
def test_parts_of_a_judgement_belong_together(drawn: tuple[Arm, np.ndarray], task: object) -> None:
    arm, postures = drawn
    space, judgement = judged(arm, postures, task)
    rank = space.generic_rank
    assert judgement.values.shape == (len(postures), rank)
    assert (np.diff(judgement.values, axis=-1) <= 0.0).all()
    assert (judgement.values >= 0.0).all()
    assert ((judgement.rank == rank) == (judgement.state != SINGULAR)).all() or rank == 0
    assert (judgement.condition >= 1.0).all()
    assert np.isfinite(judgement.manipulability).all()
    motions = np.concatenate([judgement.right, judgement.rest], axis=-1)
    identity = np.broadcast_to(np.eye(arm.joint_count), motions.shape)
    np.testing.assert_allclose(
        np.swapaxes(motions, -1, -2) @ motions, identity, rtol=0.0, atol=1e-13
    )
    told = ~np.isnan(judgement.step).any(axis=-1)
    assert (~told | (judgement.state != SINGULAR)).all()


@thorough
@given(arms_and_postures(), tasks)
def test_batch_equals_loop(drawn: tuple[Arm, np.ndarray], task: object) -> None:
    arm, postures = drawn
    _, batch = judged(arm, postures, task)
    assert len(batch.state) == len(postures)
    for index, joint_values in enumerate(postures):
        _, alone = judged(arm, joint_values, task)
        part = batch.of_posture(index)
        np.testing.assert_allclose(part.values, alone.values, rtol=0.0, atol=ROUNDING)
        if np.abs(np.log(alone.smallest + 1e-30) - np.log(1e-9)) > 1e-3:
            assert int(part.rank) == int(alone.rank)


@thorough
@given(arms_and_postures(), tasks, st.sampled_from([1000.0, 1 / 0.0254, 0.001]))
def test_units_do_not_matter(drawn: tuple[Arm, np.ndarray], task: object, factor: float) -> None:
    """All lengths times a factor: L grows with them, and pure numbers stay what they are."""
    arm, postures = drawn
    bare = sum(abs(row.a) + abs(row.d) for row in arm.table.rows)
    length = characteristic_length(arm, np.eye(4))
    assume(bare > 0.0)
    assume(length != 1.0)  # the 1 m of an arm without lengths is no length of the arm
    space, before = judged(arm, postures, task)
    other = scaled(arm, factor)
    space_after, after = judged(other, scaled_values(arm, postures, factor), task)
    np.testing.assert_allclose(space_after.length, factor * length, rtol=1e-13)
    assert space_after.generic_rank == space.generic_rank
    np.testing.assert_allclose(after.values, before.values, rtol=0.0, atol=10 * ROUNDING)


@thorough
@given(arms_and_postures(), poses)
def test_where_the_base_stands_does_not_matter(
    drawn: tuple[Arm, np.ndarray], base_in_world: np.ndarray
) -> None:
    arm, postures = drawn
    _, before = judged(arm, postures)
    _, after = judged(replace(arm, base_in_world=base_in_world), postures)
    np.testing.assert_array_equal(before.values, after.values)
    np.testing.assert_array_equal(before.state, after.state)


@thorough
@given(arms_and_postures(min_rows=6, max_rows=7), poses)
def test_a_stretched_tool_changes_no_rank_of_the_pose(
    drawn: tuple[Arm, np.ndarray], tool: np.ndarray
) -> None:
    """The tool point is a choice: with one length for both, the determinant does not know it."""
    arm, postures = drawn
    arm = replace(arm, characteristic_length=1.0)
    space, before = judged(arm, postures, "pose")
    space_after, after = judged(arm, postures, "pose", tool)
    assume(space.generic_rank == space_after.generic_rank == 6)
    np.testing.assert_allclose(
        after.manipulability, before.manipulability, rtol=0.0, atol=100 * ROUNDING
    )
