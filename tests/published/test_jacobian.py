"""All 16 cases of data/jacobian.json: both Jacobians and all that is derived from them.

The cases' singular values mix metres and radians as they stand: a characteristic length of 1 m.
"""

import numpy as np
import pytest

from kinematics.jacobian import ROW_NAMES, in_axes, motion_of
from kinematics.singularity import Judgement, judge
from kinematics.task_space import task_space
from tests.published.cases import (
    Case,
    arm_and_joint_values,
    assert_within,
    cases_of,
    entries_of,
)

CASES = cases_of("jacobian")
EACH = pytest.mark.parametrize("case", CASES.values(), ids=CASES)
# The condition number divides by the smallest singular value, whose relative error it takes on:
# none is below 0.039, so the 1e-10 that the cases grant the values is enough for it too.


def test_every_case_and_every_entry_has_its_test() -> None:
    assert list(CASES) == [f"jac-{number:02d}" for number in range(1, 17)]
    assert entries_of(CASES) == {
        *("T", "J_base", "J_tool", "row_order", "task_rows", "singular_values_task_rows"),
        *("yoshikawa_task_rows", "condition_number_task_rows", "det_task_rows"),
        *("yoshikawa_peaks_at_q2", "yoshikawa_maximum"),
    }
    assert sum("det_task_rows" in case["expected"] for case in CASES.values()) == 15
    assert {tuple(case["input"]["units"].values()) for case in CASES.values()} == {("m", "rad")}


def judged(case: Case, joint_values: np.ndarray | None = None) -> Judgement:
    arm, given = arm_and_joint_values(case, characteristic_length=1.0)
    tool = arm.tool_in_flange(None)
    space = task_space(arm, tool, [ROW_NAMES[row] for row in case["expected"]["task_rows"]])
    assert space is not None
    postures = given if joint_values is None else joint_values
    return judge(arm, space, motion_of(arm, postures, tool))


@EACH
def test_pose_and_jacobians(case: Case) -> None:
    expected, tolerance = case["expected"], case["tolerance"]["abs"]
    assert tuple(expected["row_order"]) == ROW_NAMES
    arm, joint_values = arm_and_joint_values(case)
    motion = motion_of(arm, joint_values, arm.tool_in_flange(None))
    tool_in_world = arm.base_in_world @ motion.tool_in_base
    assert_within(tolerance, tool_in_world, expected["T"])
    in_world = in_axes(motion.of_joints, arm.base_in_world[:3, :3])
    assert_within(tolerance, in_world, expected["J_base"])
    in_tool = in_axes(motion.of_joints, motion.tool_in_base[:3, :3].T)
    assert_within(tolerance, in_tool, expected["J_tool"])


@EACH
def test_measures_of_the_task_rows(case: Case) -> None:
    expected, relative = case["expected"], case["tolerance"]["rel_singular_values"]
    judgement = judged(case)
    np.testing.assert_allclose(
        judgement.values, expected["singular_values_task_rows"], rtol=relative, atol=0.0
    )
    np.testing.assert_allclose(
        judgement.manipulability, expected["yoshikawa_task_rows"], rtol=relative, atol=0.0
    )
    np.testing.assert_allclose(
        judgement.condition, expected["condition_number_task_rows"], rtol=relative, atol=0.0
    )


@pytest.mark.parametrize("name", [n for n, c in CASES.items() if "det_task_rows" in c["expected"]])
def test_determinant_of_the_task_rows(name: str) -> None:
    case = CASES[name]
    arm, joint_values = arm_and_joint_values(case)
    motion = motion_of(arm, joint_values, arm.tool_in_flange(None))
    rows = in_axes(motion.of_joints, arm.base_in_world[:3, :3])[case["expected"]["task_rows"]]
    expected = case["expected"]["det_task_rows"]
    assert_within(case["tolerance"]["abs"], np.linalg.det(rows), expected)
    # With its sign: the product of singular values alone would not see a mirrored column.
    assert abs(expected) == pytest.approx(case["expected"]["yoshikawa_task_rows"], rel=1e-12)


def test_where_the_manipulability_peaks() -> None:
    case = CASES["jac-02"]
    peaks, maximum = (case["expected"][f"yoshikawa_{what}"] for what in ("peaks_at_q2", "maximum"))
    assert len(peaks) == 2
    at_peaks = judged(case, np.array([[first, peak] for first in (0.0, 1.1) for peak in peaks]))
    assert_within(case["tolerance"]["abs"], at_peaks.manipulability, np.full(4, maximum))
    turn = np.linspace(-np.pi, np.pi, 721)
    all_round = judged(case, np.stack([np.zeros_like(turn), turn], axis=-1))
    assert all_round.manipulability.max() <= maximum + case["tolerance"]["abs"]
    highest = turn[all_round.manipulability > maximum * (1.0 - 1e-6)]
    assert_within(np.pi / 300, np.sort(np.abs(highest)), np.full(len(highest), np.pi / 2))
