"""Arms of up to three joints and places: closed forms of the books, and motions led back."""

import numpy as np
import pytest

from kinematics.chain import tool_in_base
from kinematics.inverse.found import HEIGHT, POSITION
from kinematics.inverse.regional_arm import RegionalArm, regional_arm_of
from kinematics.table import Row
from tests.kinematics.example_arms import (
    PLANAR,
    SHOULDER_AND_ELBOW,
    SIX,
    arm_of,
    prismatic,
    random_arm,
    random_joint_values,
    random_pose,
    revolute,
)
from tests.kinematics.inverse.seeds import fresh

QUARTER = np.pi / 2


def places(*at: tuple[float, float, float]) -> np.ndarray:
    targets = np.tile(np.eye(4), (len(at), 1, 1))
    targets[:, :3, 3] = at
    return targets


def solver_of(*rows: Row) -> RegionalArm:
    solver = regional_arm_of(arm_of(*rows), np.eye(4))
    assert solver is not None
    return solver


def test_two_links_by_the_law_of_cosines() -> None:
    """cos q2 = (x^2 + y^2 - l1^2 - l2^2) / (2 l1 l2): Craig, section 4.4."""
    solver = solver_of(*PLANAR)
    random = np.random.default_rng(2)
    for _ in range(50):
        x, y = random.uniform(-0.5, 0.5, 2)
        cosine = (x * x + y * y - 0.42**2 - 0.31**2) / (2.0 * 0.42 * 0.31)
        found = solver.solve(places((x, y, 0.0)))
        if abs(cosine) > 1.0:
            assert len(found.motions) == 0
            short = max(np.hypot(x, y) - 0.73, 0.11 - np.hypot(x, y))
            if short > 1e-3:
                assert found.shortfall == pytest.approx(short, abs=1e-9)
                assert found.stage == POSITION
            continue
        second = np.array([-1.0, 1.0]) * np.arccos(cosine)
        across = np.arctan2(0.31 * np.sin(second), 0.42 + 0.31 * np.cos(second))
        first = np.arctan2(y, x) - across
        first -= 2.0 * np.pi * np.round(first / (2.0 * np.pi))
        order = np.argsort(found.motions[:, 1])
        assert found.motions[order] == pytest.approx(np.stack([first, second], axis=1), abs=1e-9)
        assert found.position_error.max() < 1e-15


def test_two_links_and_a_place_off_their_plane() -> None:
    solver = solver_of(*PLANAR)
    found = solver.solve(places((0.5, 0.2, 0.03), (0.5, 0.2, 1e-5)))
    assert found.target.tolist() == [1, 1]
    assert found.position_error == pytest.approx(1e-5, rel=1e-6)
    assert found.stage.tolist() == [HEIGHT, 0]
    assert found.shortfall == pytest.approx([0.03, 0.0])
    assert np.abs(found.nearest[0]).max() > 0.0


@pytest.mark.parametrize("kinds", ["RRR", "RRP", "RPR", "PRR", "RPP", "PRP", "PPR", "PPP"])
def test_three_joints_are_led_back(kinds: str) -> None:
    random = fresh()
    for _ in range(12):
        # Axes well out of parallel: nearly parallel slides go hundreds of metres for a millimetre.
        rows = tuple(
            (revolute if kind == "R" else prismatic)(
                random.uniform(-0.6, 0.6), random.uniform(0.3, 1.4), *random.uniform(-0.6, 0.6, 2)
            )
            for kind in kinds
        )
        arm, tool = arm_of(*rows), random_pose(random)
        solver = regional_arm_of(arm, tool)
        assert solver is not None
        values = random_joint_values(random, arm, 40)
        targets = tool_in_base(arm, values, tool)
        found = solver.solve(targets)
        off = found.motions - values[found.target]
        turning = ~solver.screws.prismatic
        off[:, turning] -= 2.0 * np.pi * np.round(off[:, turning] / (2.0 * np.pi))
        nearest = np.full(40, np.inf)
        np.minimum.at(nearest, found.target, np.abs(off).max(axis=1))
        assert nearest.max() < 1e-5
        reached = tool_in_base(arm, found.motions, tool)[:, :3, 3]
        missed = np.linalg.norm(reached - targets[found.target, :3, 3], axis=1)
        assert missed.max() < 1e-12
        assert np.abs(missed - found.position_error).max() < 1e-13
        assert (np.abs(found.motions[:, turning]) <= np.pi).all()
        assert (np.diff(found.target) >= 0).all()


@pytest.mark.parametrize("count", [1, 2])
def test_one_and_two_joints_are_led_back(count: int) -> None:
    random = fresh()
    solved = 0
    for _ in range(25):
        arm, tool = random_arm(random, count, prismatic_share=0.4), random_pose(random)
        solver = regional_arm_of(arm, tool)
        if solver is None:  # two slides or turns that do the same
            continue
        values = random_joint_values(random, arm, 20)
        found = solver.solve(tool_in_base(arm, values, tool))
        motions = arm.drive_map.motions(values)
        off = found.motions - motions[found.target]
        turning = ~solver.screws.prismatic
        off[:, turning] -= 2.0 * np.pi * np.round(off[:, turning] / (2.0 * np.pi))
        nearest = np.full(20, np.inf)
        np.minimum.at(nearest, found.target, np.abs(off).max(axis=1))
        assert nearest.max() < 1e-5
        solved += 1
    assert solved > 15


@pytest.mark.parametrize("away", [0.87, 0.86 + 1e-6, 0.03])
def test_a_hair_beyond_reach_is_not_met(away: float) -> None:
    """Links of 0.43 and 0.37 from a shoulder 0.4 up: a shell from 0.06 to 0.8."""
    solver = solver_of(*SHOULDER_AND_ELBOW)
    beyond = away - 0.06 if away > 0.5 else away
    found = solver.solve(places((0.0, beyond, 0.4)))
    short = beyond - 0.8 if away > 0.5 else 0.06 - beyond
    if short > 1e-3:
        assert len(found.motions) == 0
        assert found.shortfall == pytest.approx(short, abs=1e-9)
    else:
        assert found.position_error == pytest.approx(short, rel=1e-6)


def test_the_place_on_the_waist_axis_leaves_the_waist_free_and_a_no_open() -> None:
    found = solver_of(*SHOULDER_AND_ELBOW).solve(places((0.0, 0.0, 0.9), (0.3, 0.2, 0.5)))
    assert found.open.tolist() == [True, False]
    on_axis = found.motions[found.target == 0]
    assert len(np.unique(on_axis[:, 0].round(6))) >= 12
    assert np.abs(found.position_error).max() < 1e-12
    assert len(found.motions[found.target == 1]) == 4


def test_nearest_brings_the_tool_towards_the_place() -> None:
    solver = solver_of(*SHOULDER_AND_ELBOW)
    arm = arm_of(*SHOULDER_AND_ELBOW)
    reached = tool_in_base(arm, solver.nearest(places((0.0, 2.0, 0.4))), np.eye(4))
    assert reached[0, :3, 3] == pytest.approx([0.0, 0.8, 0.4], abs=1e-7)


def test_joints_that_do_not_suit_a_place() -> None:
    three_in_a_plane = (revolute(a=0.3), revolute(a=0.3), revolute(a=0.3))
    slides_along_one_line = (prismatic(), prismatic(), revolute(a=0.3))
    for rows in (SIX, three_in_a_plane, slides_along_one_line):
        assert regional_arm_of(arm_of(*rows), np.eye(4)) is None


def test_what_is_used_is_said() -> None:
    said = solver_of(revolute(alpha=QUARTER), revolute(alpha=QUARTER), prismatic()).geometry.say
    assert said == (
        "joints 1, 2 and 3 (turning, turning, sliding) bring the tool's point to its place in "
        "closed form"
    )
    assert solver_of(*PLANAR).proof == "closed-form"


def test_no_targets() -> None:
    found = solver_of(*PLANAR).solve(np.empty((0, 4, 4)))
    assert found.motions.shape == (0, 2)
    assert len(found.open) == 0


def test_one_joint_gets_to_its_places_however_far_it_slides() -> None:
    """A slide of metres under a tool of a millimetre: thousands of times the arm's length."""
    random = fresh()
    tool = np.eye(4)
    tool[0, 3] = 1e-3
    for row in (prismatic(alpha=0.7), revolute(alpha=0.7, a=0.4)):
        arm = arm_of(row, convention="modified" if row.joint == "prismatic" else "standard")
        solver = regional_arm_of(arm, tool)
        assert solver is not None
        values = random.uniform(-3.0, 3.0, size=(20, 1))
        found = solver.solve(tool_in_base(arm, values, tool))
        assert found.target.tolist() == list(range(20))
        np.testing.assert_allclose(found.motions, values, atol=1e-12)
