"""Default tasks and generic ranks of ordinary and of awkward arms, known by hand; scaling."""

from typing import Any

import numpy as np
import pytest
from scipy.linalg import svdvals

from kinematics.errors import KinematicsError
from kinematics.jacobian import motion_of
from kinematics.table import Coupling, Row, Travel
from kinematics.task_space import TaskSpace, rows_of, sample_postures, task_space
from kinematics.transforms import pose
from tests.kinematics.example_arms import (
    AT_FLANGE,
    FIVE,
    NINE,
    PLANAR,
    QUARTER,
    SELECTIVE,
    SEVEN,
    SHOULDER_AND_ELBOW,
    SIX,
    SIX_ON_A_TRACK,
    TWELVE,
    WRIST,
    arm_of,
    prismatic,
    random_arm,
    random_joint_values,
    revolute,
)
from tests.kinematics.plain_chain import stepped_jacobian

AT_WRIST_POINT = pose(np.eye(3), [0.0, 0.0, -0.09])


def space_of(*rows: Row, tool: np.ndarray = AT_FLANGE, task: Any = None, **more: Any) -> TaskSpace:
    space = task_space(arm_of(*rows, **more), tool, task)
    assert space is not None
    return space


def tilted(rows: tuple[Row, ...], quarter: float, half: float) -> tuple[Row, ...]:
    """Return the rows with right and straight angles as they are typed."""
    typed = {QUARTER: quarter, -QUARTER: -quarter, np.pi: half}
    return tuple(
        Row(**{name: getattr(row, name) for name in Row.__slots__} | {"alpha": typed[row.alpha]})
        if row.alpha in typed
        else row
        for row in rows
    )


# Rows, default task, generic rank of its rows, rank of all six, watched rank of the position.
BY_HAND: dict[str, tuple[tuple[Row, ...], str, int, int, int]] = {
    "one turn off its axis": ((revolute(a=0.5),), "position", 1, 1, 0),
    "one turn on its axis": ((revolute(),), "orientation", 1, 1, 0),
    "one slide": ((prismatic(),), "position", 1, 1, 0),
    "two slides on one line": ((prismatic(), prismatic()), "pose", 1, 1, 1),
    "two slides across": ((prismatic(alpha=QUARTER), prismatic()), "position", 2, 2, 0),
    "three slides": (
        (prismatic(alpha=QUARTER), prismatic(alpha=QUARTER, theta=QUARTER), prismatic()),
        "position",
        3,
        3,
        0,
    ),
    "planar 2R": (PLANAR, "position", 2, 2, 0),
    "planar 3R": ((*PLANAR, revolute(a=0.2)), "pose", 3, 3, 2),
    "four parallel axes": ((revolute(a=0.3),) * 4, "pose", 3, 3, 2),
    "shoulder and elbow": (SHOULDER_AND_ELBOW, "position", 3, 3, 0),
    "selective": (SELECTIVE, "pose", 4, 4, 3),
    "five": (FIVE, "pose", 5, 5, 3),
    "six": (SIX, "pose", 6, 6, 0),
    "seven": (SEVEN, "pose", 6, 6, 0),
    "six on a track": (SIX_ON_A_TRACK, "pose", 6, 6, 0),
    "nine": (NINE, "pose", 6, 6, 0),
    "twelve": (TWELVE, "pose", 6, 6, 0),
    "wrist with a hand": (WRIST, "pose", 3, 3, 2),
    "two rows of no length": ((revolute(alpha=QUARTER), revolute()), "orientation", 2, 2, 0),
    "three turns about one line": ((revolute(),) * 3, "orientation", 1, 1, 0),
    # Six turns through one point: only the orientation moves, but six joints are asked for all.
    "six rows of no length": ((revolute(alpha=QUARTER),) * 6, "pose", 3, 3, 0),
    "passive row in front": ((revolute(passive=True), *PLANAR), "position", 2, 2, 0),
}


@pytest.mark.parametrize("name", BY_HAND)
def test_default_task_and_ranks_by_hand(name: str) -> None:
    rows, task, rank, pose_rank, watched = BY_HAND[name]
    space = space_of(*rows)
    assert (space.task, space.generic_rank, space.pose_rank) == (task, rank, pose_rank)
    assert space.watched_position_rank == watched
    kept = space.basis.shape[1]
    assert space.basis.shape[0] == len(space.rows)
    assert kept >= rank
    np.testing.assert_allclose(space.basis.T @ space.basis, np.eye(kept), rtol=0.0, atol=1e-14)


def test_the_tool_decides_what_a_wrist_does() -> None:
    space = space_of(*WRIST, tool=AT_WRIST_POINT)
    assert (space.task, space.generic_rank, space.length) == ("orientation", 3, 1.0)


def test_without_joints_there_is_no_task() -> None:
    assert task_space(arm_of(), AT_FLANGE) is None
    assert task_space(arm_of(revolute(a=0.4, passive=True)), AT_FLANGE) is None
    with pytest.raises(KinematicsError):
        task_space(arm_of(), AT_FLANGE, "poise")


@pytest.mark.parametrize(("quarter", "half"), [(1.5708, 3.1416), (1.5707, 3.1415)])
@pytest.mark.parametrize("name", ["selective", "five", "six", "seven", "shoulder and elbow"])
def test_angles_typed_with_four_decimals_change_no_rank(
    name: str, quarter: float, half: float
) -> None:
    rows, task, rank, pose_rank, _ = BY_HAND[name]
    assert tilted(rows, quarter, half) != rows
    space = space_of(*tilted(rows, quarter, half))
    assert (space.task, space.generic_rank, space.pose_rank) == (task, rank, pose_rank)


@pytest.mark.parametrize("tilt", [5e-5, -5e-5])
@pytest.mark.parametrize("count", [3, 4, 6])
def test_axes_parallel_to_four_decimals_are_parallel(count: int, tilt: float) -> None:
    assert space_of(*(revolute(a=0.3, alpha=tilt),) * count, task="pose").generic_rank == 3


@pytest.mark.parametrize("count", [1, 2, 3, 5, 7])
@pytest.mark.parametrize("task", ["pose", "position", "orientation", ["vx", "vz", "wy"]])
def test_generic_rank_of_random_arms_against_scipy(task: Any, count: int) -> None:
    """Against the rank of 60 other postures, by singular values of the plain chain's Jacobian."""
    random = np.random.default_rng(count)
    for _ in range(3):
        arm = random_arm(random, count, coupled=True, passive=1)
        space = task_space(arm, AT_FLANGE, task)
        assert space is not None
        best = 0
        for joint_values in random_joint_values(random, arm, 60):
            scaled = space.scaled(stepped_jacobian(arm, joint_values, AT_FLANGE))
            values = svdvals(scaled)
            best = max(best, int((values > 1e-3 * values[0]).sum())) if values[0] else best
        assert space.generic_rank == best


# --- scaling -------------------------------------------------------------------------------


def test_scaling_by_hand() -> None:
    """L = 0.85 m: linear rows over L, the slide's column times L."""
    space = space_of(*SELECTIVE)
    assert space.length == pytest.approx(0.85)
    assert space.joint_scale.tolist() == [1.0, 1.0, space.length, 1.0]
    assert space.row_scale.tolist() == [1.0 / space.length] * 3 + [1.0] * 3
    ones = space.scaled(np.ones((6, 4)))
    np.testing.assert_allclose(ones[:3], [[1 / 0.85, 1 / 0.85, 1.0, 1 / 0.85]] * 3, rtol=1e-15)
    np.testing.assert_allclose(ones[3:], [[1.0, 1.0, 0.85, 1.0]] * 3, rtol=1e-15)
    assert space.scaled(np.ones((0, 6, 4))).shape == (0, 6, 4)


def test_the_rows_of_a_task_are_taken_in_the_order_of_the_jacobian() -> None:
    space = space_of(*SELECTIVE, task=["wz", "vx"])
    assert space.task == ["wz", "vx"]
    assert space.rows == (0, 5)
    of_joints = np.arange(24.0).reshape(6, 4)
    expected = of_joints[[0, 5]] * [[1 / space.length], [1.0]] * space.joint_scale
    np.testing.assert_allclose(space.scaled(of_joints), expected, rtol=1e-15)


def test_a_covector_does_to_the_jacobian_what_the_scaled_one_does() -> None:
    random = np.random.default_rng(1)
    space = space_of(*SELECTIVE, task=["vx", "vy", "wz"])
    of_joints, left = random.normal(size=(5, 6, 4)), random.normal(size=(5, 3))
    covector = space.covector(left)
    assert not covector[:, [2, 3, 4]].any()
    plain = np.einsum("bi,bij->bj", covector, of_joints) * space.joint_scale
    scaled = np.einsum("bi,bij->bj", left, space.scaled(of_joints))
    np.testing.assert_allclose(plain, scaled, rtol=0.0, atol=1e-14)


@pytest.mark.parametrize("scale", [1e3, 1 / 0.0254, 1e-3])
def test_generic_rank_and_values_do_not_depend_on_the_unit_of_length(scale: float) -> None:
    rows = tuple(
        Row(
            **{name: getattr(row, name) for name in Row.__slots__}
            | {"a": row.a * scale, "d": row.d * scale}
        )
        for row in SIX_ON_A_TRACK
    )
    before, after = space_of(*SIX_ON_A_TRACK), space_of(*rows)
    assert after.length == pytest.approx(scale * before.length)
    assert after.generic_rank == before.generic_rank
    assert (before.joint_scale / before.length)[0] == 1.0 == (after.joint_scale / after.length)[0]


# --- sample postures -----------------------------------------------------------------------


def test_sample_postures_lie_in_travel_and_spread_over_it() -> None:
    rows = (
        revolute(travel=Travel(-0.5, 2.0)),
        prismatic(),
        revolute(passive=True, travel=Travel(5.0, 6.0)),
        revolute(),
        prismatic(travel=Travel(0.1, 0.3)),
    )
    lower, upper = np.array([[-0.5, -0.7, -np.pi, 0.1], [2.0, 0.7, np.pi, 0.3]])
    postures = sample_postures(arm_of(*rows), 0.7)
    assert postures.shape == (16, 4)
    shares = (postures - lower) / (upper - lower)
    assert ((shares >= 0.0) & (shares < 1.0)).all()
    # Evenly: each quarter of each joint's travel holds two to six of sixteen.
    counts = np.array([np.histogram(share, bins=4, range=(0, 1))[0] for share in shares.T])
    assert counts.min() >= 2
    assert counts.max() <= 6
    assert (sample_postures(arm_of(*rows), 0.7) == postures).all()


def test_sample_postures_follow_the_plastic_number() -> None:
    """For two joints the root of x^3 = x + 1 is 1.3247179572..., known from the literature."""
    plastic = 1.324717957244746
    travel = Travel(0.0, 1.0)
    rows = revolute(travel=travel), revolute(travel=travel)
    steps = np.arange(1, 17)[:, None]
    expected = (0.5 + steps / np.array([plastic, plastic**2])) % 1.0
    actual = sample_postures(arm_of(*rows), 1.0)
    np.testing.assert_allclose(actual, expected, rtol=0.0, atol=1e-13)


def test_coupled_rows_are_sampled_over_the_joint_values() -> None:
    rows = revolute(a=0.3), revolute(a=0.2, couplings=(Coupling(1, -1.0),))
    space = space_of(*rows)
    of_joints = motion_of(arm_of(*rows), space.samples, AT_FLANGE).of_joints
    assert of_joints.shape == (16, 6, 2)
    assert space.generic_rank == 2


# --- tasks that are refused ----------------------------------------------------------------


@pytest.mark.parametrize(
    ("task", "where", "value"),
    [
        ("poise", ("task",), "poise"),
        ("", ("task",), ""),
        ("vx", ("task",), "vx"),
        ([], ("task",), []),
        (["vx", "vx"], ("task",), ["vx", "vx"]),
        (["vx", "vw"], ("task", 1), "vw"),
        (["pose"], ("task", 0), "pose"),
    ],
)
def test_unknown_tasks(task: Any, where: tuple[object, ...], value: object) -> None:
    with pytest.raises(KinematicsError) as caught:
        rows_of(task)
    assert caught.value.where == where
    assert caught.value.value == value
    assert "vx vy vz wx wy wz" in caught.value.way_out


def test_named_tasks() -> None:
    assert rows_of("pose") == (0, 1, 2, 3, 4, 5)
    assert rows_of("position") == (0, 1, 2)
    assert rows_of("orientation") == (3, 4, 5)
    assert rows_of(("wx", "vz", "vx")) == (0, 2, 3)
