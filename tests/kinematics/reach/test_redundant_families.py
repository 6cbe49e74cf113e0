"""Families of arms with a joint to spare, told through the face of reach."""

import numpy as np

from kinematics.chain import tool_in_base
from kinematics.reach.checks import Reacher
from kinematics.reach.targets import NOT_FOUND, REACHABLE, SEARCH, Target, Targets
from tests.kinematics.inverse.redundant_arms import ARMS
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import postures_within_travel, targets_at


def test_families_are_told_from_the_joint_that_is_held_the_best_first() -> None:
    random = fresh()
    arm, tool = ARMS["on a track"](random)
    checks = Reacher(arm, tool).check(
        targets_at(arm, tool, 0, postures_within_travel(random, arm, 5))
    )
    assert checks.verdict.tolist() == [REACHABLE] * 5
    for index in range(5):
        families = checks.families_of(index)
        assert families
        assert {family.unit for family in families} == {"m"}
        assert {family.free_joints[0] for family in families} == {1}
        best = checks.joint_values[checks.offsets[index]]
        shown = tool_in_base(arm, np.stack([families[0].witness, best]), tool)
        np.testing.assert_allclose(shown[0], shown[1], atol=1e-8)
        travel = arm.table.rows[0].travel
        assert travel is not None
        for low, high in (ends for family in families for ends in family.interval):
            assert travel.lower - 1e-9 <= low <= high <= travel.upper + 1e-9


def test_the_resolution_is_told_with_every_yes() -> None:
    random = fresh()
    arm, tool = ARMS["shoulder and wrist"](random)
    checks = Reacher(arm, tool).check(
        targets_at(arm, tool, 0, postures_within_travel(random, arm, 1))
    )
    (finding,) = [one for one in checks.findings_of(0) if one.name == "redundant-resolution"]
    assert finding.unit == "rad"
    assert 0.0 < finding.measure <= np.radians(2.0) + 1e-9
    assert "joint 1 was tried at" in finding.text()


def test_what_is_within_the_links_but_not_met_is_not_found() -> None:
    """The tool turned over at the tip of a stretched arm; no closed form of seven proves a no."""
    random = fresh()
    arm, tool = ARMS["shoulder and wrist"](random)
    stretched = tool_in_base(arm, np.array([0.1, 0.2, 0.1, 0.05, 0.1, 0.2, 0.1]), tool)
    stretched[:3, 3] += 0.03 * stretched[:3, 3]
    checks = Reacher(arm, tool).check(Targets.of([Target(stretched)]), best_only=True)
    if checks.verdict[0] == NOT_FOUND:
        assert checks.proof[0] == SEARCH
    reason = checks.reason_of(0)
    assert (reason is None) == (checks.verdict[0] == REACHABLE)
