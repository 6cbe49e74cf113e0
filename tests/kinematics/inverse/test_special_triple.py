"""Every solution of arms with a special triple: none missed, none made up, each no with its reason.

Targets are made by the chain from motions drawn anew at each run, so that a solution is known;
hypothesis tells the seed of a failure. Full sizes: python -m tests.benchmarks.reach.
"""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import least_squares

from kinematics.chain import tool_in_base
from kinematics.inverse.found import (
    MEETING_POINT,
    MEETING_TURN,
    NO_STAGE,
    PLANE,
    REACH_ACROSS,
    WRIST_CENTRE,
    WRIST_ORIENTATION,
    Found,
)
from kinematics.inverse.geometry import meeting_point
from kinematics.inverse.screws import Screws, screws_of
from kinematics.inverse.special_triple import SpecialTriple, special_triple_of
from tests.kinematics.example_arms import SIX, arm_of, random_pose, revolute
from tests.kinematics.inverse.triple_arms import (
    FAMILIES,
    MORE_FAMILIES,
    random_motions,
    rounded,
)
from tests.kinematics.inverse.triple_sets import (
    OFF,
    centre_on_first_axis,
    folds,
    jacobians_at,
    lined_up,
    stretched,
    tools_at,
    turn_between,
)

QUARTER = np.pi / 2
ALL = {**FAMILIES, **MORE_FAMILIES}
SEEDS = st.integers(0, 2**32 - 1)
FEW = settings(max_examples=3, deadline=None)

# Generating motions come back to this where the smallest singular value is above 1e-6: gaps of
# some 1e-14 over it.
FOUND_AGAIN = 1e-6
REGULAR = 1e-6

# Over L and in rad; measured over 2e6 targets: at most 8e-14 away from nearly free joints.
LANDED = 1e-12


def solver_of(screws: Screws) -> SpecialTriple:
    solver = special_triple_of(screws)
    assert solver is not None
    return solver


def differences(screws: Screws, motions: np.ndarray, others: np.ndarray) -> np.ndarray:
    """Return the largest difference of each two motions, whole turns aside."""
    apart = np.abs(motions - others)
    turned = np.minimum(apart, np.abs(apart - 2 * np.pi))
    largest: np.ndarray = np.where(screws.prismatic, apart, turned).max(axis=-1)
    return largest


def missed(screws: Screws, motions: np.ndarray, found: Found) -> np.ndarray:
    """Return motions away from singular places that are not among what was found."""
    best = np.full(len(motions), np.inf)
    np.minimum.at(best, found.target, differences(screws, found.motions, motions[found.target]))
    lost = motions[best > FOUND_AGAIN]
    if not len(lost):
        return lost
    smallest = np.linalg.svd(jacobians_at(screws, lost), compute_uv=False)[:, -1]
    return lost[smallest > REGULAR]


def largest_error(screws: Screws, found: Found) -> float:
    position, angle = found.position_error / screws.length, found.angle_error
    return float(max(position.max(initial=0.0), angle.max(initial=0.0)))


@pytest.mark.parametrize("family", ALL)
@FEW
@given(seed=SEEDS)
def test_every_generating_solution_comes_back(family: str, seed: int) -> None:
    random = np.random.default_rng(seed)
    arm = ALL[family](random)
    screws = screws_of(arm, random_pose(random))
    solver, motions = solver_of(screws), random_motions(random, arm, 200)
    found = solver.solve(tools_at(screws, motions))
    assert not len(missed(screws, motions, found))
    assert largest_error(screws, found) <= LANDED
    assert (np.diff(found.target) >= 0).all()
    turns = found.motions[:, ~screws.prismatic]
    assert ((turns > -np.pi) & (turns <= np.pi)).all()


@pytest.mark.parametrize("family", ALL)
def test_what_is_found_lands_by_the_tables_own_chain(family: str) -> None:
    random = np.random.default_rng(5)
    arm, tool = ALL[family](random), random_pose(random)
    targets = tool_in_base(arm, random_motions(random, arm, 30), tool)
    screws = screws_of(arm, tool)
    found = solver_of(screws).solve(targets)
    # Each solution once, and at least the one the target was made from.
    assert (found.count_per_target() > 0).all()
    landed = tool_in_base(arm, found.motions, tool)
    np.testing.assert_allclose(landed, targets[found.target], rtol=0.0, atol=1e-12)
    for target in range(len(targets)):
        own = found.motions[found.target == target]
        for k, motions in enumerate(own):
            assert (differences(screws, own[:k], motions) > 1e-7).all()


def test_the_elbow_arm_has_the_eight_solutions_of_the_textbooks() -> None:
    # Spong, Hutchinson and Vidyasagar, chapter 5: two shoulders, two elbows, two wrists.
    upper, fore, height, hand = 0.43, 0.41, 0.4, 0.09
    arm = arm_of(
        revolute(alpha=QUARTER, d=height),
        revolute(a=upper),
        revolute(alpha=QUARTER),
        revolute(alpha=-QUARTER, d=fore),
        revolute(alpha=QUARTER),
        revolute(d=hand),
    )
    target = tool_in_base(arm, np.array([[0.4, 0.7, 0.5, 0.3, 0.8, -0.6]]), np.eye(4))
    x, y, z = target[0, :3, 3] - hand * target[0, :3, 2]
    expected = []
    for facing in (0.0, np.pi):
        out, up = np.hypot(x, y) * (1 if facing == 0.0 else -1), z - height
        cosine = (out**2 + up**2 - upper**2 - fore**2) / (2 * upper * fore)
        for bent in (np.arccos(cosine), -np.arccos(cosine)):
            second = np.arctan2(up, out) - np.arctan2(
                fore * np.sin(bent), upper + fore * np.cos(bent)
            )
            # Joint 3 counts from where the forearm stands square to the upper arm's line.
            expected += [(np.arctan2(y, x) + facing, second, bent + QUARTER)] * 2
    found = solver_of(screws_of(arm, np.eye(4))).solve(target)
    assert len(found.motions) == 8
    for first_three in expected:
        off = (found.motions[:, :3] - first_three + np.pi) % (2 * np.pi) - np.pi
        assert (np.abs(off).max(axis=1) < 1e-12).sum() == 2


@pytest.mark.parametrize("family", ["wrist on any arm", "axes 3 4 5 parallel", "R R P and wrist"])
def test_finds_all_that_least_squares_find_from_many_starts(family: str) -> None:
    random = np.random.default_rng(6)
    arm = ALL[family](random)
    screws = screws_of(arm, np.eye(4))
    solver = solver_of(screws)
    for motions in random_motions(random, arm, 2):
        target = tools_at(screws, motions[None])
        ours = solver.solve(target).motions

        def residual(values: np.ndarray, target: np.ndarray = target) -> np.ndarray:
            landed = tool_in_base(arm, values[None], np.eye(4))[0]
            left: np.ndarray = (landed - target[0])[:3].ravel()
            return left

        for start in random_motions(random, arm, 20):
            tried = least_squares(residual, start, xtol=1e-15, ftol=1e-15, gtol=1e-15)
            if np.abs(tried.fun).max() < 1e-10:
                values = np.where(
                    screws.prismatic, tried.x, (tried.x + np.pi) % (2 * np.pi) - np.pi
                )
                assert differences(screws, ours, values).min() < 1e-6


def centre_of(screws: Screws) -> np.ndarray:
    return meeting_point(screws.axis[3:], screws.point[3:])


@pytest.mark.parametrize("off", OFF)
@FEW
@given(seed=SEEDS)
def test_a_witness_at_each_kind_of_singular_posture(off: float, seed: int) -> None:
    random = np.random.default_rng(seed)
    for family in ("elbow with offsets", "elbow without offsets", "slanted wrist"):
        arm = FAMILIES[family](random)
        screws, motions = screws_of(arm, np.eye(4)), random_motions(random, arm, 60)
        sets = [
            lined_up(screws, 3, motions, off),
            stretched(screws, centre_of(screws), motions, off, folded=False),
            stretched(screws, centre_of(screws), motions, off, folded=True),
        ]
        if family == "elbow without offsets":
            sets.append(centre_on_first_axis(screws, centre_of(screws), motions, off))
            sets.append(lined_up(screws, 3, sets[-1], off))
        found = solver_of(screws).solve(tools_at(screws, np.concatenate(sets)))
        assert (found.count_per_target() > 0).all()
        assert largest_error(screws, found) <= 1e-9


@pytest.mark.parametrize("off", OFF)
@FEW
@given(seed=SEEDS)
def test_a_witness_where_four_axes_are_parallel(off: float, seed: int) -> None:
    random = np.random.default_rng(seed)
    arm = FAMILIES["three parallel, right angles"](random)
    screws, motions = screws_of(arm, np.eye(4)), random_motions(random, arm, 300)
    motions[:, 4] = turn_between(screws, 4, screws.axis[3], screws.axis[5]) + off
    found = solver_of(screws).solve(tools_at(screws, motions))
    assert (found.count_per_target() > 0).all()
    # One of the joints is free: solutions are samples, and a no would not be proved.
    if off <= 1e-8:
        assert found.open.all()
    if off >= 1e-4:
        assert not found.open.all()


@pytest.mark.parametrize("family", ALL)
@FEW
@given(seed=SEEDS)
def test_a_witness_at_exact_folds(family: str, seed: int) -> None:
    random = np.random.default_rng(seed)
    arm = ALL[family](random)
    screws = screws_of(arm, np.eye(4))
    there = folds(random, screws, random_motions(random, arm, 60))
    found = solver_of(screws).solve(tools_at(screws, there))
    assert (found.count_per_target() > 0).all()


@FEW
@given(seed=SEEDS)
def test_a_hair_beyond_reach_there_is_none_and_the_nearest_is_that_far_off(seed: int) -> None:
    random = np.random.default_rng(seed)
    arm = FAMILIES["elbow without offsets"](random)
    screws = screws_of(arm, np.eye(4))
    solver, centre = solver_of(screws), centre_of(screws)
    motions = stretched(screws, centre, random_motions(random, arm, 40), 0.0, folded=False)
    targets = tools_at(screws, motions)
    outward = centre_at(screws, targets, centre) - screws.point[1]
    outward /= np.linalg.norm(outward, axis=1)[:, None]
    assert (solver.solve(targets).count_per_target() > 0).all()
    for hair in (1e-6, 1e-3, 0.3):
        further = targets.copy()
        further[:, :3, 3] += hair * screws.length * outward
        found = solver.solve(further)
        assert not len(found.motions)
        assert not found.open.any()
        assert (found.stage == WRIST_CENTRE).all()
        nearest = tools_at(screws, solver.nearest(further[:5]))
        # Turned as asked, and as near as the wrist centre comes.
        np.testing.assert_allclose(nearest[:, :3, :3], further[:5, :3, :3], atol=1e-9)
        short = np.linalg.norm(nearest[:, :3, 3] - further[:5, :3, 3], axis=1) / screws.length
        np.testing.assert_allclose(short, hair, rtol=1e-4, atol=1e-12)


def centre_at(screws: Screws, targets: np.ndarray, centre: np.ndarray) -> np.ndarray:
    """Return where the targets have the wrist centre, over L."""
    in_tool = np.linalg.inv(screws.tool_at_zero) @ np.append(centre, 1.0)
    places: np.ndarray = screws.scaled(targets) @ in_tool
    return places[:, :3]


def test_a_wrist_that_cannot_turn_so_far_says_by_how_much() -> None:
    # Neighbouring axes 40 deg apart: axis 6 gets within 80 deg of axis 4, no further. Axes 1 to 3
    # slide, so axis 4 always points up.
    lean = np.deg2rad(40)
    screws = Screws(
        np.array(
            [
                *np.eye(3),
                [0, 0, 1],
                [0, np.sin(lean), np.cos(lean)],
                [0, np.sin(2 * lean), np.cos(2 * lean)],
            ]
        ),
        np.zeros((6, 3)),
        np.array([True] * 3 + [False] * 3),
        np.eye(4),
        1.0,
    )
    solver = solver_of(screws)
    assert solver.geometry.say.startswith("axes 4, 5 and 6 meet in a point")
    motions = np.zeros((1, 6))
    target = tools_at(screws, motions)
    assert len(solver.solve(target).motions)
    # Turned about x by 10 deg more, axis 6 would have to be 90 deg from axis 4.
    ten = np.deg2rad(10)
    turn = np.array([[1, 0, 0], [0, np.cos(-ten), -np.sin(-ten)], [0, np.sin(-ten), np.cos(-ten)]])
    target[0, :3, :3] = turn
    found = solver.solve(target)
    assert not len(found.motions)
    assert found.stage.tolist() == [WRIST_ORIENTATION]
    assert found.shortfall[0] == pytest.approx(ten, abs=1e-12)
    assert not found.open[0]


@pytest.mark.parametrize(
    ("family", "stages"),
    [
        ("elbow with offsets", {WRIST_CENTRE}),
        ("axes 1 2 3 meet", {MEETING_POINT, MEETING_TURN}),
        ("axes 2 3 4 parallel", {PLANE, REACH_ACROSS}),
    ],
)
def test_far_out_each_no_names_its_stage(family: str, stages: set[int]) -> None:
    random = np.random.default_rng(9)
    arm = ALL[family](random)
    screws = screws_of(arm, np.eye(4))
    solver, motions = solver_of(screws), random_motions(random, arm, 50)
    targets = tools_at(screws, motions)
    near = solver.solve(targets)
    assert (near.stage == NO_STAGE).all()
    assert not near.shortfall.any()
    targets[:, :3, 3] *= 40.0 / np.linalg.norm(targets[:, :3, 3], axis=1)[:, None]
    found = solver.solve(targets)
    assert not len(found.motions)
    assert not found.open.any()
    assert set(found.stage.tolist()) <= stages


@pytest.mark.parametrize("decimals", [4, 5])
def test_a_typed_table_is_solved_on_itself(decimals: int) -> None:
    random = np.random.default_rng(11)
    for family in ("elbow with offsets", "three parallel, right angles"):
        arm = rounded(FAMILIES[family](random), decimals)
        screws, motions = screws_of(arm, np.eye(4)), random_motions(random, arm, 100)
        found = solver_of(screws).solve(tools_at(screws, motions))
        assert not len(missed(screws, motions, found))
        assert largest_error(screws, found) <= LANDED


def test_parallel_axes_typed_with_four_decimals_count_as_parallel() -> None:
    # alpha = 3.1416 is 7e-6 rad off half a turn.
    arm = arm_of(
        revolute(alpha=1.5708, d=0.3),
        revolute(a=0.5, alpha=3.1416),
        revolute(a=0.4, alpha=-3.1416, d=0.1),
        revolute(alpha=1.5708, d=0.15),
        revolute(alpha=-1.5708, d=0.1),
        revolute(d=0.08),
    )
    screws, random = screws_of(arm, np.eye(4)), np.random.default_rng(12)
    solver, motions = solver_of(screws), random.uniform(-np.pi, np.pi, (300, 6))
    assert "treated as parallel" in solver.geometry.say
    found = solver.solve(tools_at(screws, motions))
    landed = tool_in_base(arm, found.motions, np.eye(4))
    # On the table as it is typed, not on the parallel one.
    assert largest_error(screws, found) <= LANDED
    np.testing.assert_allclose(
        landed, tools_at(screws, motions)[found.target], rtol=0.0, atol=1e-12
    )
    assert len(missed(screws, motions, found)) <= 3


def test_one_by_one_and_in_other_lengths_it_is_the_same() -> None:
    arm = arm_of(*SIX)
    screws, random = screws_of(arm, np.eye(4)), np.random.default_rng(13)
    targets = tools_at(screws, random.uniform(-np.pi, np.pi, (20, 6)))
    solver = solver_of(screws)
    together = solver.solve(targets)
    for index, target in enumerate(targets):
        alone = solver.solve(target[None])
        np.testing.assert_array_equal(alone.motions, together.motions[together.target == index])
    larger = Screws(
        screws.axis, screws.point, screws.prismatic, screws.tool_at_zero, 1000 * screws.length
    )
    targets[:, :3, 3] *= 1000.0
    again = solver_of(larger).solve(targets)
    np.testing.assert_allclose(again.motions, together.motions, rtol=0.0, atol=1e-9)


def test_no_targets_no_solutions() -> None:
    found = solver_of(screws_of(arm_of(*SIX), np.eye(4))).solve(np.empty((0, 4, 4)))
    assert found.motions.shape == (0, 6)
    assert found.open.shape == (0,)


def test_arms_without_a_special_triple_have_no_such_solver() -> None:
    random = np.random.default_rng(14)
    rows = [revolute(a=0.3, alpha=1.0, d=0.2, theta=random.random()) for _ in range(6)]
    assert special_triple_of(screws_of(arm_of(*rows), np.eye(4))) is None
    assert special_triple_of(screws_of(arm_of(*SIX[:5]), np.eye(4))) is None
