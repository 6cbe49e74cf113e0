"""All 8 cases of data/equivalence.json: one arm in both conventions, each way round."""

import numpy as np
import pytest

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.table import Convention
from kinematics.table_conversion import converted
from tests.published.cases import (
    Case,
    arm_and_joint_values,
    arm_of,
    assert_within,
    cases_of,
    entries_of,
)

CASES = cases_of("equivalence")
EACH = pytest.mark.parametrize("case", CASES.values(), ids=CASES)


def test_every_case_and_every_entry_has_its_test() -> None:
    assert list(CASES) == [f"eq-{number:02d}" for number in range(1, 9)]
    assert entries_of(CASES) == {"T", "arm_in_other_convention"}
    written = [case["input"]["arm"]["convention"] for case in CASES.values()]
    assert written.count("standard") == 5
    assert written.count("modified") == 3
    assert [len(case["input"]["q"]) for case in CASES.values()] == [3, 2, 3, 2, 1, 1, 2, 2]


def tools_in_world(arm: Arm, postures: np.ndarray) -> np.ndarray:
    return arm.base_in_world @ tool_in_base(arm, postures, arm.tool_in_flange(None))


def other_of(case: Case) -> Arm:
    return arm_of(case["expected"]["arm_in_other_convention"], case["input"]["units"])


@EACH
def test_as_written(case: Case) -> None:
    arm, postures = arm_and_joint_values(case)
    assert_within(case["tolerance"]["abs"], tools_in_world(arm, postures), case["expected"]["T"])


@EACH
def test_the_table_expected_in_the_other_convention(case: Case) -> None:
    _, postures = arm_and_joint_values(case)
    actual = tools_in_world(other_of(case), postures)
    assert_within(case["tolerance"]["abs"], actual, case["expected"]["T"])


@EACH
def test_our_conversion_puts_the_tool_in_the_same_place(case: Case) -> None:
    arm, postures = arm_and_joint_values(case)
    other = converted(arm, other_of(case).table.convention)
    assert other.table.convention is not arm.table.convention
    assert_within(case["tolerance"]["abs"], tools_in_world(other, postures), case["expected"]["T"])


@EACH
def test_our_conversion_gives_the_expected_numbers(case: Case) -> None:
    """Another table would be right too; regrouping leads to just this one."""
    arm, _ = arm_and_joint_values(case)
    expected = other_of(case)
    other = converted(arm, expected.table.convention)
    assert other.table.rows == expected.table.rows
    tolerance = case["tolerance"]["abs"]
    assert_within(tolerance, other.base_in_world, expected.base_in_world)
    assert_within(tolerance, other.tool_in_flange(None), expected.tool_in_flange(None))


@EACH
def test_back_again_gives_the_table_that_was_written(case: Case) -> None:
    arm, postures = arm_and_joint_values(case)
    back = converted(converted(arm, other_of(case).table.convention), arm.table.convention)
    first = arm.table.rows[0]
    if arm.table.convention is Convention.MODIFIED and (first.a, first.alpha) != (0.0, 0.0):
        # eq-07: what moved into the base stays there; the rows behind it come back.
        assert back.table.rows[1:] == arm.table.rows[1:]
    elif arm.table.convention is Convention.STANDARD:
        # The last link moved into the tool and stays there.
        assert back.table.rows[:-1] == arm.table.rows[:-1]
    else:
        assert back.table.rows == arm.table.rows
    assert_within(case["tolerance"]["abs"], tools_in_world(back, postures), case["expected"]["T"])
