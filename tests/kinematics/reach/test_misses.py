"""By how much few joints miss a target: held against dense samples, and told in words."""

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from kinematics.chain import tool_in_base
from kinematics.inverse.measured import POSE
from kinematics.reach.checks import Reacher
from kinematics.reach.misses import Miss, least_miss, miss_told, postures_of
from kinematics.reach.targets import NONE, NOT_FOUND, UNREACHABLE, Reason, Target, Targets
from kinematics.reach.verdicts import Ranking
from kinematics.rotations import rotation_about
from kinematics.table import Coupling, Travel
from kinematics.travel_limits import travel_margin
from tests.kinematics.example_arms import AT_FLANGE, FIVE, arm_of, revolute
from tests.kinematics.inverse.bounded_arms import bounded
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import CLASSES, postures_within_travel

ALLOWED = np.array([1e-5, 1e-4])


def reason_of(reacher: Reacher, pose: np.ndarray) -> Reason:
    checks = reacher.check(Targets.of([Target(pose)]))
    assert checks.verdict[0] in (UNREACHABLE, NOT_FOUND)
    reason = checks.reason_of(0)
    assert reason is not None
    return reason


@pytest.mark.parametrize("degrees", [0.5, 12.0, 60.0])
def test_a_spin_that_five_joints_do_not_have_is_told_as_such(degrees: float) -> None:
    """The place, and where tool z points, can be had; the other postures need more spin."""
    arm, tool = bounded(FIVE, *[(-1.2, 1.2)] * 5), np.eye(4)
    tool[:3, :3] = rotation_about(np.eye(3)[1], 0.6)
    pose = tool_in_base(arm, np.array([0.3, 0.5, -0.9, 0.7, 0.4]), tool)
    pose[:3, :3] = pose[:3, :3] @ rotation_about(np.eye(3)[2], np.radians(degrees))
    reason = reason_of(Reacher(arm, tool), pose)
    assert reason.text().startswith("reachable with the spin about tool z off by")
    np.testing.assert_allclose(reason.shortfall, np.radians(degrees), rtol=1e-4)
    assert reason.nearest is not None
    np.testing.assert_allclose(reason.nearest[:3, 3], pose[:3, 3], atol=1e-5)
    np.testing.assert_allclose(reason.nearest[:3, 2], pose[:3, 2], atol=2e-4)


@pytest.mark.parametrize("degrees", [0.5, 12.0, 60.0])
def test_what_is_told_is_what_the_nearest_pose_misses(degrees: float) -> None:
    """And mostly no more than the posture does that the pose was turned away from."""
    random, little = fresh(), 0
    arm, tool, _ = CLASSES["five, with wrist"](random)
    poses = tool_in_base(arm, postures_within_travel(random, arm, 8), tool)
    for pose in poses:
        pose[:3, :3] = pose[:3, :3] @ rotation_about(random.normal(size=3), np.radians(degrees))
    checks = Reacher(arm, tool).check(Targets.of([Target(pose) for pose in poses]))
    for index, pose in enumerate(poses):
        reason = checks.reason_of(index)
        if reason is not None and reason.code == "orientation-off":
            assert reason.nearest is not None
            off = Rotation.from_matrix(reason.nearest[:3, :3] @ pose[:3, :3].T).magnitude()
            np.testing.assert_allclose(reason.shortfall, off, atol=1e-6)
            away = np.linalg.norm(reason.nearest[:3, 3] - pose[:3, 3])
            assert away <= max(1e-5, 1e-5 * 3.0 * off)
            little += off <= 3.0 * np.radians(degrees)
    assert little >= 2


def test_the_least_turn_is_that_of_dense_samples() -> None:
    """One joint that turns the tool about a tilted axis: 10 000 postures come no nearer."""
    random = fresh()
    arm = bounded((revolute(alpha=0.6), revolute(a=0.0, alpha=0.3)), (-2.0, 2.0), (-2.0, 2.0))
    target = np.eye(4)
    target[:3, :3] = rotation_about(random.normal(size=3), 1.2)
    q = np.stack(np.meshgrid(*[np.linspace(-2.0, 2.0, 200)] * 2), axis=-1).reshape(-1, 2)
    turns = tool_in_base(arm, q, AT_FLANGE)[:, :3, :3]
    trace = np.einsum("kij,ij->k", turns, target[:3, :3])
    sampled = np.arccos(np.clip((trace - 1.0) / 2.0, -1.0, 1.0))
    ranking = Ranking(arm, AT_FLANGE)
    targets = Targets.of([Target(target, NONE, 0.0, 1e-5, 1e-5)])
    starts = arm.drive_map.motions(q[np.argsort(sampled)[:50:7]])
    miss = least_miss(ranking, targets, 0, starts, POSE)
    # Where tool z points as it should, some more turn is told.
    aimed = miss.tilt <= 1e-5
    assert miss.angle <= sampled.min() * (3.0 if aimed else 1.0) + 1e-9
    assert miss.angle >= sampled.min() - 0.02
    assert (np.abs(miss.joint_values) <= 2.0).all()


def test_it_stays_within_travel() -> None:
    random = fresh()
    arm = bounded(FIVE, *[(-1.0, 1.0)] * 5)
    ranking = Ranking(arm, AT_FLANGE)
    poses = tool_in_base(arm_of(*FIVE), random.uniform(-2.5, 2.5, (10, 5)), AT_FLANGE)
    targets = Targets.of([Target(pose) for pose in poses])
    for index in range(10):
        miss = least_miss(ranking, targets, index, random.uniform(-3.0, 3.0, (3, 5)), POSE)
        assert travel_margin(arm, miss.joint_values) >= 0.0
        there = tool_in_base(arm, miss.joint_values, AT_FLANGE)
        off = np.linalg.norm(there[:3, 3] - poses[index, :3, 3])
        np.testing.assert_allclose(miss.position, off, atol=1e-9)


@pytest.mark.parametrize(
    ("miss", "said"),
    [
        (Miss(np.zeros(1), 0.2, 1.0, 1.0, False), "the tool gets within 0.2 m of the place"),
        (Miss(np.zeros(1), 0.0, 0.3, 0.3, True), "reachable with tool z tilted by 0.3 rad"),
        (Miss(np.zeros(1), 0.0, 0.3, 0.1, True), "reachable with the tool turned off by 0.3 rad"),
        (
            Miss(np.zeros(1), 0.0, 0.3, 0.0, True),
            "reachable with the spin about tool z off by 0.3 rad",
        ),
    ],
)
def test_words(miss: Miss, said: str) -> None:
    reason = miss_told(miss, ALLOWED, POSE, np.eye(4))
    assert reason.text().startswith(said)
    assert "more than the tolerance of" in reason.text()
    assert reason.code == ("position-off" if miss.position else "orientation-off")


def test_a_tolerance_of_nothing_divides_nothing() -> None:
    arm = arm_of(*(revolute(a=0.3, alpha=0.4, travel=Travel(-2.0, 2.0)) for _ in range(4)))
    pose = tool_in_base(arm, np.full(4, 0.4), AT_FLANGE)
    pose[:3, :3] = pose[:3, :3] @ np.diag([1.0, -1.0, -1.0])
    checks = Reacher(arm, AT_FLANGE).check(Targets.of([Target(pose, NONE, 0.0, 0.0, 0.0)]))
    reason = checks.reason_of(0)
    assert reason is not None
    assert reason.shortfall > 0.1


def test_a_passive_row_that_cannot_move_as_wanted_is_left_out() -> None:
    """Joint 2 follows joint 1 by half; motions of 1 and of 1 have no joint value, yet a nearest."""
    rows = (
        revolute(a=0.3),
        revolute(a=0.2, passive=True, couplings=(Coupling(1, 0.5),)),
    )
    arm = arm_of(*rows)
    np.testing.assert_array_equal(postures_of(arm, np.array([[1.0, 1.0]])), [[1.0]])
    np.testing.assert_allclose(postures_of(arm, np.array([[1.0, 0.5]])), [[1.0]])
