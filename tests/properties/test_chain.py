"""What holds for every arm's poses: rigid, one by one as all at once, scaled with their lengths."""

from dataclasses import replace

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from kinematics.arm import Arm
from kinematics.chain import tool_in_base, walk
from kinematics.rigidity import defect
from kinematics.table import Table
from tests.kinematics.plain_chain import tool_pose
from tests.properties.arm_strategies import arms_and_postures, poses

thorough = settings(deadline=None, max_examples=60)
ROUNDING = 1e-14  # up to eight rows of up to 1.6 m each


@thorough
@given(arms_and_postures(min_rows=0), poses)
def test_poses_are_those_of_the_plain_chain(
    drawn: tuple[Arm, np.ndarray], tool: np.ndarray
) -> None:
    arm, postures = drawn
    posed = tool_in_base(arm, postures, tool)
    assert posed.shape == (len(postures), 4, 4)
    for joint_values, actual in zip(postures, posed, strict=True):
        expected = np.array(tool_pose(arm, [complex(q) for q in joint_values], tool)).real
        np.testing.assert_allclose(actual, expected, rtol=0.0, atol=ROUNDING)


@thorough
@given(arms_and_postures(min_rows=0), poses)
def test_poses_are_rigid(drawn: tuple[Arm, np.ndarray], tool: np.ndarray) -> None:
    arm, postures = drawn
    walked = walk(arm, postures)
    for frames in (walked.link_in_base, tool_in_base(arm, postures, tool)):
        assert (defect(frames[..., :3, :3]) < 1e-13).all()
        assert (np.linalg.det(frames[..., :3, :3]) > 0.0).all()
        assert (frames[..., 3, :] == [0.0, 0.0, 0.0, 1.0]).all()
    lengths = np.linalg.norm(walked.axis_direction, axis=-1)
    np.testing.assert_allclose(lengths, 1.0, rtol=0.0, atol=1e-13)


@thorough
@given(arms_and_postures(min_rows=0), poses)
def test_batch_equals_loop(drawn: tuple[Arm, np.ndarray], tool: np.ndarray) -> None:
    arm, postures = drawn
    walked, posed = walk(arm, postures), tool_in_base(arm, postures, tool)
    assert len(posed) == len(walked.flange_in_base) == len(postures)
    for index, joint_values in enumerate(postures):
        alone = walk(arm, joint_values)
        for part in ("axis_direction", "axis_point", "link_in_base", "flange_in_base"):
            actual = getattr(walked, part)[index]
            np.testing.assert_allclose(actual, getattr(alone, part), rtol=0.0, atol=ROUNDING)
        single = tool_in_base(arm, joint_values, tool)
        np.testing.assert_allclose(posed[index], single, rtol=0.0, atol=ROUNDING)
    stacked = tool_in_base(arm, postures[None, :, None], tool)
    assert stacked.shape == (1, len(postures), 1, 4, 4)
    np.testing.assert_allclose(stacked[0, :, 0], posed, rtol=0.0, atol=ROUNDING)


def scaled(arm: Arm, factor: float) -> Arm:
    """Return the arm with every length, and every ratio of a slide to a turn, times a factor."""
    rows = arm.table.rows
    changed = []
    for row in rows:
        couplings = tuple(
            replace(
                coupling,
                ratio=coupling.ratio
                * (1.0 if row.is_revolute else factor)
                / (1.0 if rows[coupling.axis - 1].is_revolute else factor),
            )
            for coupling in row.couplings
        )
        changed.append(replace(row, a=row.a * factor, d=row.d * factor, couplings=couplings))
    return replace(arm, table=Table(arm.table.convention, tuple(changed)))


def scaled_values(arm: Arm, postures: np.ndarray, factor: float) -> np.ndarray:
    return postures * np.where(np.array(arm.joint_units) == "m", factor, 1.0)


@thorough
@given(arms_and_postures(), st.sampled_from([1000.0, 1 / 0.0254, 0.001]))
def test_lengths_times_a_factor_are_positions_times_it(
    drawn: tuple[Arm, np.ndarray], factor: float
) -> None:
    arm, postures = drawn
    posed = tool_in_base(arm, postures, np.eye(4))
    other = tool_in_base(scaled(arm, factor), scaled_values(arm, postures, factor), np.eye(4))
    np.testing.assert_allclose(other[..., :3, :3], posed[..., :3, :3], rtol=0.0, atol=ROUNDING)
    np.testing.assert_allclose(
        other[..., :3, 3], factor * posed[..., :3, 3], rtol=0.0, atol=factor * ROUNDING
    )
