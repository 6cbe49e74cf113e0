"""The 27 cases of data/reach.json: solutions, verdicts and reasons; areas: test_envelope.py.

Targets of planar cases leave z free: their arms stay in the plane z = 0, and are asked there.
"""

from typing import Any

import numpy as np
import pytest

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.inverse.screws import screws_of
from kinematics.reach.bounds import Bounds
from kinematics.reach.checks import Reacher
from kinematics.reach.targets import (
    BOUND,
    CLOSED_FORM,
    NONE,
    ORIENTATION,
    OUTSIDE_TRAVEL,
    REACHABLE,
    UNREACHABLE,
    WITNESS,
    Checks,
    Target,
    Targets,
)
from kinematics.table import Convention, JointKind, Row, Table, Travel
from kinematics.travel_limits import travel_findings
from tests.published.cases import Case, assert_within, cases_of

CASES = cases_of("reach")

WAITING = {f"rch-{number}": "areas and volumes: test_envelope.py" for number in range(19, 27)}
"""Cases that are asked elsewhere, and where."""

ASKED = [name for name in CASES if name not in WAITING]


def arm_of(given: Case) -> Arm:
    rows = tuple(
        Row(
            JointKind(row["joint"]),
            a=row["a"],
            alpha=row["alpha"],
            d=row["d"],
            theta=row["theta"],
            direction=row["sign"],
            travel=Travel(*row["limits"]) if "limits" in row else None,
        )
        for row in given["table"]
    )
    assert given["base"] is None
    assert given["tool"] is None
    return Arm("published", Table(Convention(given["convention"]), rows))


def answered(case: Case) -> tuple[Arm, Target, Checks]:
    arm, given = arm_of(case["input"]["arm"]), case["input"]["target"]
    pose, freedom = np.eye(4), ORIENTATION
    if "pose" in given:
        pose, freedom = np.array(given["pose"]), NONE
    elif "position" in given:
        pose[:3, 3] = given["position"]
    else:
        pose[:2, 3] = given["position_xy"]
    target = Target(pose, freedom)
    return arm, target, Reacher(arm, np.eye(4)).check(Targets.of([target]))


def apart(values: np.ndarray, other: np.ndarray) -> float:
    """Return the largest difference of joint values, whole turns left out."""
    return float(np.abs(np.angle(np.exp(1j * (values - other)))).max())


def matched(actual: np.ndarray, expected: list[list[float]], tolerance: float) -> None:
    """Pair solutions one to one, whole turns apart or not."""
    left = [np.array(values) for values in expected]
    for values in actual:
        off = [apart(values, other) for other in left]
        assert min(off) <= tolerance
        left.pop(int(np.argmin(off)))
    assert not left


def test_every_case_is_asked_or_waits_with_a_reason() -> None:
    assert len(CASES) == 27
    assert len(ASKED) == 19
    assert set(WAITING) < set(CASES)
    for name in WAITING:
        assert "quantity" in CASES[name]["input"]
    counted = {name for name in ASKED if "solutions" in CASES[name]["expected"]}
    refused = {name for name in ASKED if CASES[name]["expected"].get("reachable") is False}
    assert len(counted) == 11
    assert len(refused) == 6
    assert set(ASKED) - counted - refused == {"rch-07", "rch-17"}


@pytest.mark.parametrize("name", [n for n in ASKED if "solutions" in CASES[n]["expected"]])
def test_all_solutions_and_no_other(name: str) -> None:
    case = CASES[name]
    arm, target, checks = answered(case)
    expected, tolerance = case["expected"], case["tolerance"]
    assert checks.verdict.tolist() == [REACHABLE]
    assert checks.proof.tolist() == [WITNESS]
    distinct = without_turns(checks.joint_values)
    assert len(distinct) == expected["count"] == len(expected["solutions"])
    matched(distinct, expected["solutions"], tolerance["abs_joint"])
    shown = tool_in_base(arm, checks.joint_values, np.eye(4))
    rows = slice(0, 3) if target.freedom == ORIENTATION else slice(0, 4)
    wanted = np.broadcast_to(target.tool_in_base, shown.shape)
    columns = slice(3, 4) if target.freedom == ORIENTATION else slice(0, 4)
    assert_within(tolerance["abs_pose"], shown[:, rows, columns], wanted[:, rows, columns])


def without_turns(joint_values: np.ndarray) -> np.ndarray:
    """Return postures of which each set of whole turns is kept once."""
    kept: list[np.ndarray] = []
    for values in joint_values:
        if all(apart(values, other) > 1e-4 for other in kept):
            kept.append(values)
    return np.array(kept)


def joints_outside(arm: Arm, values: np.ndarray) -> list[int]:
    return [finding.joint for finding in travel_findings(arm, values) if finding.joint]


@pytest.mark.parametrize("name", ["rch-09", "rch-27"])
def test_solutions_beyond_travel_are_all_told_with_their_joints(name: str) -> None:
    case = CASES[name]
    arm, _, checks = answered(case)
    rejected = case["expected"]["rejected"]
    assert checks.verdict.tolist() == [OUTSIDE_TRAVEL]
    assert checks.proof.tolist() == [CLOSED_FORM]
    assert len(checks.joint_values) == len(rejected)
    assert (checks.margin < 0.0).all()
    for values in checks.joint_values:
        off = [
            np.abs(np.angle(np.exp(1j * (values - np.array(one["q"]))))).max() for one in rejected
        ]
        assert min(off) <= case["tolerance"]["abs_joint"]
        assert joints_outside(arm, values) == rejected[int(np.argmin(off))]["joints_out_of_limits"]
    reason = checks.reason_of(0)
    assert reason is not None
    assert reason.code == "outside-travel"
    assert reason.shortfall > 0.0


@pytest.mark.parametrize("name", ["rch-08", "rch-14"])
def test_solutions_beyond_travel_are_not_told_beside_others(name: str) -> None:
    case = CASES[name]
    _, _, checks = answered(case)
    for one in case["expected"]["rejected"]:
        assert all(apart(values, np.array(one["q"])) > 0.1 for values in checks.joint_values)


BOUNDS: dict[str, tuple[str, str, str]] = {
    "rch-03": ("beyond-the-links", "distance", "max_reach"),
    "rch-04": ("inside-the-void", "distance", "min_reach"),
    "rch-15": ("beyond-the-links", "wrist_centre_distance", "max_wrist_centre_distance"),
    "rch-16": ("inside-the-void", "wrist_centre_distance", "min_wrist_centre_distance"),
}


@pytest.mark.parametrize("name", BOUNDS)
def test_a_no_by_bounds_has_distance_and_limit(name: str) -> None:
    case, (code, distance, limit) = CASES[name], BOUNDS[name]
    arm, target, checks = answered(case)
    assert checks.verdict.tolist() == [UNREACHABLE]
    assert checks.proof.tolist() == [BOUND]
    reason = checks.reason_of(0)
    assert reason is not None
    assert reason.code == code
    expected, tolerance = case["expected"], case["tolerance"]["abs_joint"]
    assert_within(tolerance, reason.measure, expected[distance])
    assert_within(tolerance, reason.threshold, expected[limit])
    assert_within(tolerance, reason.shortfall, abs(expected[distance] - expected[limit]))
    assert_within(tolerance, reason.shortfall, expected.get("shortfall", reason.shortfall))
    assert reason.nearest is not None
    if target.freedom == ORIENTATION:
        missed = np.linalg.norm(reason.nearest[:3, 3] - target.tool_in_base[:3, 3])
        assert_within(1e-6, missed, reason.shortfall)
    assert arm.joint_count == len(case["input"]["arm"]["table"])


def test_a_target_on_the_axis_leaves_it_free() -> None:
    """rch-07: equal links folded back; joint 1 is any."""
    case = CASES["rch-07"]
    _, _, checks = answered(case)
    expected = case["expected"]
    assert expected["count"] == "infinite"
    assert checks.verdict.tolist() == [REACHABLE]
    (family,) = checks.families_of(0)
    assert family.free_joints == (expected["free_joint"],)
    assert_within(1e-9, np.array(family.interval), [[-np.pi, np.pi]])
    assert len(checks.joint_values) == 1
    assert_within(case["tolerance"]["abs_joint"], abs(checks.joint_values[0, 1]), expected["q2"])


@pytest.mark.parametrize(("arm", "suffix"), [("arm", ""), ("arm_b", "_b")])
def test_bounds_of_three_links(arm: str, suffix: str) -> None:
    case: dict[str, Any] = CASES["rch-17"]
    bounds = Bounds(screws_of(arm_of(case["input"][arm]), np.eye(4)))
    expected, tolerance = case["expected"], case["tolerance"]["abs_pose"]
    assert_within(tolerance, bounds.furthest, expected[f"max_reach{suffix}"])
    assert_within(tolerance, bounds.nearest, expected[f"min_reach{suffix}"])
