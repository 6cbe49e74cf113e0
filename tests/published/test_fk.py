"""All 25 cases of data/fk.json: tool poses, link frames, units, and the convention trap."""

import numpy as np
import pytest

from kinematics.arm import Arm
from kinematics.chain import checked_joint_values, tool_in_base, walk
from tests.published.cases import (
    Case,
    arm_and_joint_values,
    assert_within,
    cases_of,
    entries_of,
)

CASES = cases_of("fk")


def test_every_case_and_every_entry_has_its_test() -> None:
    assert list(CASES) == [f"fk-{number:02d}" for number in range(1, 26)]
    # T by every case; frames (in the order stated) by 13; the two in mm and deg expect SI.
    assert entries_of(CASES) == {"T", "frames", "frames_order", "expected_units"}
    assert sum("frames" in case["expected"] for case in CASES.values()) == 13
    other_units = [case for case in CASES.values() if case["input"]["units"]["length"] == "mm"]
    assert len(other_units) == 2
    assert {len(case["input"]["q"]) for case in CASES.values()} == {2, 3, 4, 6}
    for case in CASES.values():
        stated = case["expected"].get("expected_units", {"length": "m", "angle": "rad"})
        assert stated == {"length": "m", "angle": "rad"}


def tool_in_world(arm: Arm, joint_values: np.ndarray) -> np.ndarray:
    usable = checked_joint_values(arm, joint_values)
    return arm.base_in_world @ tool_in_base(arm, usable, arm.tool_in_flange(None))


@pytest.mark.parametrize("case", CASES.values(), ids=CASES)
def test_tool_pose(case: Case) -> None:
    arm, joint_values = arm_and_joint_values(case)
    expected = case["expected"]["T"]
    assert_within(case["tolerance"]["abs"], tool_in_world(arm, joint_values), expected)
    batch = tool_in_world(arm, np.stack([joint_values, 0.5 * joint_values, joint_values]))
    assert_within(case["tolerance"]["abs"], batch[2], expected)


WITH_FRAMES = [name for name, case in CASES.items() if "frames" in case["expected"]]


@pytest.mark.parametrize("name", WITH_FRAMES)
def test_link_frames(name: str) -> None:
    case = CASES[name]
    assert case["expected"]["frames_order"] == "frame 0 (= base), frame 1 ... frame n, tool"
    arm, joint_values = arm_and_joint_values(case)
    walked = walk(arm, joint_values)
    tool = walked.flange_in_base @ arm.tool_in_flange(None)
    in_base = np.concatenate([walked.link_in_base, tool[None]])
    assert len(in_base) == len(arm.table.rows) + 2
    tolerance = case["tolerance"]["abs"]
    assert_within(tolerance, arm.base_in_world @ in_base, case["expected"]["frames"])
    # The flange is the last frame of the table in both conventions.
    assert_within(tolerance, walked.flange_in_base, walked.link_in_base[-1])


def test_the_same_rows_read_in_the_other_convention_are_another_arm() -> None:
    """fk-15 and fk-25 share every number but the convention, and their tools are 0.2 m apart."""
    right, wrong = CASES["fk-15"], CASES["fk-25"]
    assert right["input"]["arm"]["table"] == wrong["input"]["arm"]["table"]
    assert right["input"]["q"] == wrong["input"]["q"]
    poses = [tool_in_world(*arm_and_joint_values(case)) for case in (right, wrong)]
    apart = np.linalg.norm(poses[0][:3, 3] - poses[1][:3, 3])
    expected = np.subtract(right["expected"]["T"], wrong["expected"]["T"])[:3, 3]
    assert_within(1e-12, apart, np.linalg.norm(expected))
    assert apart > 0.19
