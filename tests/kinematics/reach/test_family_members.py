"""Solutions of a continuum give way to one witness, and every point of it is on the target."""

import numpy as np

from kinematics.chain import tool_in_base
from kinematics.reach.checks import Reacher
from kinematics.reach.targets import ORIENTATION, REACHABLE, Target, Targets
from kinematics.table import Travel
from tests.kinematics.example_arms import (
    AT_FLANGE,
    QUARTER,
    SEVEN,
    SHOULDER_AND_ELBOW,
    SIX,
    WRIST,
    arm_of,
    revolute,
)
from tests.kinematics.inverse.seeds import fresh

TRAVEL = Travel(-2.5, 2.0)
NO_OFFSETS = (
    *SHOULDER_AND_ELBOW[:2],
    revolute(alpha=QUARTER, theta=QUARTER),
    revolute(alpha=-QUARTER, d=0.41),
    *WRIST[1:],
)


def test_a_lined_up_wrist_is_one_family_for_each_elbow() -> None:
    random = fresh()
    rows = [revolute(r.a, r.alpha, r.d, r.theta, travel=TRAVEL) for r in SIX]
    arm = arm_of(*rows)
    for _ in range(5):
        values = random.uniform(-0.9, 0.9, 6)
        values[4] = 0.0
        pose = tool_in_base(arm, values, AT_FLANGE)
        checks = Reacher(arm, AT_FLANGE).check(Targets.of([Target(pose)]))
        assert checks.verdict.tolist() == [REACHABLE]
        families = checks.families_of(0)
        sums = []
        for family in families:
            assert family.free_joints == (4, 6)
            assert family.relation == "joint 4 + joint 6 = {measure}"
            sums.append(family.measure)
            for low, high in family.interval:
                for fourth in np.linspace(low, high, 5):
                    point = family.witness.copy()
                    point[3], point[5] = fourth, family.measure - fourth
                    np.testing.assert_allclose(tool_in_base(arm, point, AT_FLANGE), pose, atol=1e-8)
                    assert (np.abs(point + 0.25) <= 2.25 + 1e-9).all()
        own = int(np.argmin([abs(total - values[3] - values[5]) for total in sums]))
        assert abs(sums[own] - values[3] - values[5]) < 1e-8
        lined_up = np.abs(checks.joint_values[:, 4]) < 1e-6
        assert lined_up.sum() == len(families)
        # Its witness is the posture that is furthest from the ends of travel.
        ends = [min(v - TRAVEL.lower, TRAVEL.upper - v) for v in families[own].witness]
        assert min(ends) >= min(np.minimum(values - TRAVEL.lower, TRAVEL.upper - values)) - 1e-6


def test_a_wrist_centre_on_axis_1_leaves_that_free() -> None:
    arm = arm_of(*NO_OFFSETS)
    values = np.array([0.4, 0.9, 0.0, 0.6, 0.7, 0.8])
    # Brings the wrist centre over axis 1.
    upper, fore = 0.43, 0.41
    values[2] = np.arccos(-upper * np.cos(values[1]) / fore) - values[1]
    pose = tool_in_base(arm, values, AT_FLANGE)
    centre = pose[:3, 3] - 0.09 * pose[:3, 2]
    np.testing.assert_allclose(centre[:2], 0.0, atol=1e-12)
    checks = Reacher(arm, AT_FLANGE).check(Targets.of([Target(pose)]))
    assert checks.verdict.tolist() == [REACHABLE]
    families = checks.families_of(0)
    assert families
    assert {1} <= set(families[0].free_joints)
    shown = tool_in_base(arm, np.array([family.witness for family in families]), AT_FLANGE)
    np.testing.assert_allclose(shown, np.stack([pose] * len(families)), atol=1e-8)
    assert len(checks.joint_values) < 16


def test_spare_joints_are_told_as_a_family_of_the_best() -> None:
    arm = arm_of(*SEVEN)
    pose = tool_in_base(arm, np.array([0.3, 0.5, -0.2, 1.0, 0.4, 0.8, 0.1]), AT_FLANGE)
    checks = Reacher(arm, AT_FLANGE).check(Targets.of([Target(pose)]))
    assert checks.verdict.tolist() == [REACHABLE]
    families = checks.families_of(0)
    assert families
    for family in families:
        assert len(family.free_joints) >= 5
        np.testing.assert_allclose(tool_in_base(arm, family.witness, AT_FLANGE), pose, atol=1e-7)


def test_a_regular_posture_has_no_family() -> None:
    arm = arm_of(*SIX)
    pose = tool_in_base(arm, np.array([0.3, 0.5, 0.4, 0.5, 0.6, 0.7]), AT_FLANGE)
    assert Reacher(arm, AT_FLANGE).check(Targets.of([Target(pose)])).families_of(0) == ()
    place = Target(pose, ORIENTATION)
    assert len(Reacher(arm, AT_FLANGE).check(Targets.of([place])).families_of(0)) >= 1
