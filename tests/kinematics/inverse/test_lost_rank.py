"""Which motions have lost rank: against singular values of the chain's own Jacobian."""

import numpy as np

from kinematics.inverse.lost_rank import LostRank
from kinematics.inverse.screws import screws_of
from kinematics.jacobian import motion_of
from kinematics.tolerances import LOST_RANK
from tests.kinematics.example_arms import AT_FLANGE, SIX, arm_of, random_joint_values
from tests.kinematics.inverse.seeds import fresh


def test_it_is_the_smallest_singular_value_that_decides() -> None:
    random = fresh()
    arm = arm_of(*SIX)
    screws = screws_of(arm, AT_FLANGE)
    values = random_joint_values(random, arm, 400)
    values[:, 4] = random.choice([-1.0, 1.0], 400) * 10.0 ** random.uniform(-8.0, 0.0, size=400)
    values[::50, 4] = 0.0
    jacobians = motion_of(arm, values, AT_FLANGE).of_joints
    jacobians[:, :3] /= screws.length
    smallest = np.linalg.svd(jacobians, compute_uv=False)[:, -1]
    clear = np.abs(smallest / LOST_RANK - 1.0) > 1e-6
    lost = LostRank(screws).of(arm.drive_map.motions(values))
    assert lost is not None
    np.testing.assert_array_equal(lost[clear], (smallest < LOST_RANK)[clear])
    assert 8 <= lost.sum() < 200


def test_random_postures_keep_their_rank() -> None:
    random = fresh()
    arm = arm_of(*SIX)
    motions = arm.drive_map.motions(random_joint_values(random, arm, 100))
    # Of a hundred the nearest to singular is some 1e-4 away: a thousandth of that counts as lost.
    assert LostRank(screws_of(arm, AT_FLANGE)).of(motions) is None
    assert LostRank(screws_of(arm, AT_FLANGE)).of(np.empty((0, 6))) is None
