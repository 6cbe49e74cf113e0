"""Ranked postures: values put onto a limit are held against their target once more."""

from dataclasses import replace

import numpy as np

from kinematics.chain import tool_in_base
from kinematics.inverse.found import Found, none_found
from kinematics.reach.targets import ORIENTATION, Target, Targets
from kinematics.reach.verdicts import Ranking
from kinematics.table import Travel
from tests.kinematics.example_arms import AT_FLANGE, PLANAR, SIX, arm_of

LIMIT = 1.2


def found_for(motions: np.ndarray, error: float = 0.0) -> Found:
    count, rows = motions.shape
    return replace(
        none_found(count, rows),
        motions=motions,
        target=np.arange(count, dtype=np.intp),
        position_error=np.full(count, error),
        angle_error=np.zeros(count),
    )


def test_a_stretched_arm_is_put_onto_its_stop() -> None:
    """Elbow straight is a stop: joint 2 at 0 or just below it brings the tool to the same place."""
    arm = arm_of(PLANAR[0], replace(PLANAR[1], travel=Travel(0.0, 2.0)))
    pose = tool_in_base(arm, np.array([0.3, 0.0]), AT_FLANGE)
    targets = Targets.of([Target(pose, ORIENTATION, position_tolerance=1e-12)])
    ranked = Ranking(arm, AT_FLANGE).rank(
        found_for(np.array([[0.3, -5e-8]])), targets, angles_count=False
    )
    assert ranked.inside.tolist() == [True]
    assert ranked.joint_values.tolist() == [[0.3, 0.0]]
    assert ranked.margin.tolist() == [0.0]


def test_what_leaves_its_target_on_a_stop_is_beyond_travel() -> None:
    """Elbow bent: 5e-8 rad are 1e-8 m, more than six joints may be off."""
    arm = arm_of(*(replace(row, travel=Travel(-LIMIT, LIMIT)) for row in SIX))
    ranking = Ranking(arm, AT_FLANGE)
    values = np.array([[0.1, LIMIT + 5e-8, 0.3, 0.4, 0.5, 0.6], [0.1, LIMIT, 0.3, 0.4, 0.5, 0.6]])
    targets = Targets.of([Target(pose) for pose in tool_in_base(arm, values, AT_FLANGE)])
    ranked = ranking.rank(found_for(arm.drive_map.motions(values)), targets)
    assert ranked.inside.tolist() == [False, True]
    assert ranked.margin[0] < 0.0
    assert not ranked.all_listed


def test_errors_are_held_to_what_the_number_of_joints_allows() -> None:
    few, six = Ranking(arm_of(*PLANAR), AT_FLANGE), Ranking(arm_of(*SIX), AT_FLANGE)
    targets = Targets.of([Target(np.eye(4))])
    for ranking, limit in ((few, 1e-5), (six, 1e-9 * six.screws.length)):
        motions = np.zeros((1, ranking.screws.rows))
        for share, accepted in ((0.99, True), (1.01, False)):
            found = found_for(motions, share * limit)
            assert ranking.accepted(found, targets).tolist() == [accepted]


def test_distance_is_the_largest_share_of_a_range_of_motion() -> None:
    arm = arm_of(replace(PLANAR[0], travel=Travel(-1.0, 1.0)), PLANAR[1])
    shares = Ranking(arm, AT_FLANGE).distance(np.array([[0.5, 0.0], [0.0, np.pi]]), np.zeros(2))
    np.testing.assert_allclose(shares, [0.25, 0.5])
