"""Bounds that need no solving: annuli by hand, wrist centres, slides, no reachable place."""

import numpy as np
import pytest

from kinematics.chain import tool_in_base
from kinematics.inverse.screws import screws_of
from kinematics.reach.bounds import BEYOND, FREE, WITHIN, Bounds
from tests.kinematics.example_arms import (
    AT_FLANGE,
    PLANAR,
    QUARTER,
    SHOULDER_AND_ELBOW,
    WRIST,
    arm_of,
    prismatic,
    random_arm,
    random_joint_values,
    random_pose,
    revolute,
)
from tests.kinematics.inverse.seeds import fresh


def at(*place: float) -> np.ndarray:
    pose = np.eye(4)
    pose[:3, 3] = place
    return pose[None]


def test_two_links_leave_an_annulus() -> None:
    bounds = Bounds(screws_of(arm_of(*PLANAR), AT_FLANGE))
    np.testing.assert_allclose([bounds.furthest, bounds.nearest], [0.73, 0.11])
    places = np.concatenate([at(0.73, 0, 0), at(0.731, 0, 0), at(0.11, 0, 0), at(0, 0.109, 0)])
    held = bounds.hold(places)
    assert held.outcome.tolist() == [FREE, BEYOND, FREE, WITHIN]
    np.testing.assert_allclose(held.distance, [0.73, 0.731, 0.11, 0.109])


def test_with_a_wrist_its_centre_is_held() -> None:
    arm = arm_of(
        *SHOULDER_AND_ELBOW[:2],
        revolute(alpha=QUARTER, theta=QUARTER),
        revolute(alpha=-QUARTER, d=0.37),
        revolute(alpha=QUARTER),
        revolute(d=0.09),
    )
    bounds = Bounds(screws_of(arm, AT_FLANGE), posed=True)
    assert bounds.place == "wrist centre"
    np.testing.assert_allclose(bounds.aim, [0.0, 0.0, -0.09], atol=1e-12)
    np.testing.assert_allclose([bounds.furthest, bounds.nearest], [0.8, 0.06], atol=1e-9)
    assert Bounds(screws_of(arm, AT_FLANGE)).place == "tool"


def test_a_slide_before_the_links_leaves_its_direction_open() -> None:
    arm = arm_of(prismatic(alpha=QUARTER), *PLANAR)
    bounds = Bounds(screws_of(arm, AT_FLANGE))
    np.testing.assert_allclose(bounds.furthest, 0.73)
    assert bounds.nearest == 0.0
    # The slide runs along z, and the links turn about -y beside it.
    assert bounds.hold(np.concatenate([at(0, 0, 99), at(0.8, 0, 9)])).outcome.tolist() == [
        FREE,
        BEYOND,
    ]


def test_a_slide_between_links_bounds_nothing() -> None:
    arm = arm_of(revolute(a=0.3), prismatic(), revolute(a=0.3))
    bounds = Bounds(screws_of(arm, AT_FLANGE))
    assert bounds.furthest == np.inf
    assert bounds.hold(at(1e6, 0, 0)).outcome.tolist() == [FREE]


@pytest.mark.parametrize("joints", [1, 2, 3, 4, 6, 7])
@pytest.mark.parametrize("posed", [False, True])
def test_no_place_an_arm_is_at_is_out_of_bounds(joints: int, posed: bool) -> None:
    random = fresh()
    for _ in range(20):
        arm, tool = random_arm(random, joints), random_pose(random)
        poses = tool_in_base(arm, random_joint_values(random, arm, 50), tool)
        assert not Bounds(screws_of(arm, tool), posed).hold(poses).outcome.any()


def test_the_furthest_place_of_random_arms_is_near_the_bound() -> None:
    """Two links askew: the tool comes within some percent of it in many postures."""
    random = fresh()
    shares = []
    for _ in range(20):
        arm = random_arm(random, 3, prismatic_share=0.0)
        bounds = Bounds(screws_of(arm, AT_FLANGE))
        poses = tool_in_base(arm, random_joint_values(random, arm, 3000), AT_FLANGE)
        shares.append(bounds.hold(poses).distance.max() / bounds.furthest)
    assert max(shares) <= 1.0 + 1e-12
    assert np.median(shares) > 0.85


def test_places_are_apart_as_the_wrist_centre_is() -> None:
    arm = arm_of(*SHOULDER_AND_ELBOW, *WRIST)
    bounds = Bounds(screws_of(arm, AT_FLANGE), posed=True)
    turned = np.diag([1.0, -1.0, -1.0, 1.0])
    np.testing.assert_allclose(bounds.apart(np.eye(4), turned), 0.18)
