"""Poses against the plain chain in 50 digits, postures known by hand, and what is refused."""

import numpy as np
import pytest

from kinematics.arm import Arm
from kinematics.chain import checked_joint_values, tool_in_base, walk
from kinematics.errors import NotFinite, OutOfRange, WrongJointCount
from tests.kinematics.example_arms import (
    AT_FLANGE,
    PLANAR,
    QUARTER,
    SELECTIVE,
    SIX,
    arm_of,
    prismatic,
    random_arm,
    random_joint_values,
    random_pose,
    revolute,
)
from tests.kinematics.plain_chain import exact_link_frames, exact_tool_pose

EPS = np.finfo(np.float64).eps
# Roundings of numbers up to the reach, most of which cancel. Measured over 1500 random arms of one
# to twelve rows: at most 1.7e-16 of 1 m + reach, whether joints turn once or 1e9 rad.
OF_REACH = 5e-16


def reach_of(arm: Arm, joint_values: np.ndarray, tool: np.ndarray) -> float:
    """Return the longest way to the tool, metres: all lengths and all slides in a row."""
    slides = np.abs(arm.drive_map.motions(joint_values))[~arm.table.chain.revolute]
    lengths = sum(abs(row.a) + abs(row.d) for row in arm.table.rows)
    return float(lengths + slides.sum() + np.linalg.norm(tool[:3, 3]))


def turned_error(arm: Arm, joint_values: np.ndarray) -> float:
    """Return the angle that rounding C q and its sines can leave, radians.

    A row that adds up couplings rounds once for each; its angle is then off by half a digit.
    """
    moved = np.abs(arm.drive_map.matrix) @ np.abs(joint_values)
    summed = (arm.drive_map.matrix != 0.0).sum(axis=1) * moved
    alone = (np.abs(arm.drive_map.matrix) == 1.0).sum(axis=1) == 1
    alone &= (arm.drive_map.matrix != 0.0).sum(axis=1) == 1
    return float(EPS * summed[~alone].sum())


KINDS = [
    pytest.param({}, id="plain"),
    pytest.param({"prismatic_share": 0.0}, id="all revolute"),
    pytest.param({"prismatic_share": 1.0}, id="all prismatic"),
    pytest.param({"prismatic_first": True}, id="prismatic first"),
    pytest.param({"coupled": True}, id="coupled"),
    pytest.param({"coupled": True, "passive": 2}, id="coupled with passive rows"),
]


@pytest.mark.parametrize("count", [1, 2, 5, 6, 7, 12])
@pytest.mark.parametrize("kind", KINDS)
def test_tool_and_links_against_50_digits(kind: dict[str, object], count: int) -> None:
    random = np.random.default_rng([count, len(kind)])
    for _ in range(5):
        arm = random_arm(random, count, **kind)
        tool = random_pose(random)
        (joint_values,) = random_joint_values(random, arm, 1)
        scale = 1.0 + reach_of(arm, joint_values, tool)
        tolerance = scale * (OF_REACH + turned_error(arm, joint_values))
        posed = tool_in_base(arm, joint_values, tool)
        expected = exact_tool_pose(arm, joint_values, tool)
        np.testing.assert_allclose(posed, expected, rtol=0.0, atol=tolerance)
        links = walk(arm, joint_values).link_in_base
        frames = exact_link_frames(arm, joint_values)
        np.testing.assert_allclose(links, frames, rtol=0.0, atol=tolerance)


@pytest.mark.parametrize("turns", [1e4, 1e6, 1e9])
def test_many_turns_cost_no_digit(turns: float) -> None:
    """A joint value of 1e4 rad is a double like any other: offsets are not added to it.

    Added first, they would be rounded at 1e4 times 1e-16, and the tool would be off by 1e-12 m.
    """
    random = np.random.default_rng(4)
    for _ in range(30):
        arm = random_arm(random, 6, prismatic_share=0.0)
        joint_values = random.uniform(-turns, turns, size=6)
        expected = exact_tool_pose(arm, joint_values, AT_FLANGE)
        posed = tool_in_base(arm, joint_values, AT_FLANGE)
        reach = 1.0 + reach_of(arm, joint_values, AT_FLANGE)
        np.testing.assert_allclose(posed, expected, rtol=0.0, atol=OF_REACH * reach)


@pytest.mark.parametrize("count", [127, 128, 129, 300])
def test_long_batches_equal_loops(count: int) -> None:
    """Postures are worked on in blocks of 128: none is lost or mixed up where blocks meet."""
    random = np.random.default_rng(count)
    arm = random_arm(random, 6, coupled=True, passive=1)
    tool = random_pose(random)
    postures = random_joint_values(random, arm, count)
    # One posture in the midst of a block takes the way of angles beyond a million radians.
    postures[count // 2] *= 1e7
    posed, walked = tool_in_base(arm, postures, tool), walk(arm, postures)
    for index in range(count):
        alone = walk(arm, postures[index])
        scale = 1.0 + reach_of(arm, postures[index], tool)
        single = tool_in_base(arm, postures[index], tool)
        np.testing.assert_allclose(posed[index], single, rtol=0.0, atol=OF_REACH * scale)
        for part in ("axis_direction", "axis_point", "link_in_base", "flange_in_base"):
            actual, expected = getattr(walked, part)[index], getattr(alone, part)
            np.testing.assert_allclose(actual, expected, rtol=0.0, atol=OF_REACH * scale)


def test_any_layout_of_joint_values_is_read_alike() -> None:
    random = np.random.default_rng(2)
    arm = random_arm(random, 6)
    postures = random_joint_values(random, arm, 20)
    expected = tool_in_base(arm, postures, AT_FLANGE)
    frozen = postures.copy()
    frozen.setflags(write=False)
    wide = np.zeros((40, 12))
    wide[::2, ::2] = postures
    for layout in (np.asfortranarray(postures), frozen, wide[::2, ::2], postures[::-1][::-1]):
        assert (tool_in_base(arm, layout, AT_FLANGE) == expected).all()
        assert (walk(arm, layout).flange_in_base == walk(arm, postures).flange_in_base).all()
    assert (postures == frozen).all()


def test_poses_are_written_where_they_are_wanted() -> None:
    arm = arm_of(*SIX)
    postures = random_joint_values(np.random.default_rng(3), arm, 10)
    out = np.full((10, 4, 4), np.nan)
    posed = tool_in_base(arm, postures, AT_FLANGE, out=out)
    assert np.shares_memory(posed, out)
    assert (out == tool_in_base(arm, postures, AT_FLANGE)).all()


def test_many_turns_through_couplings_cost_what_adding_them_costs() -> None:
    random = np.random.default_rng(5)
    for _ in range(20):
        arm = random_arm(random, 6, prismatic_share=0.0, coupled=True)
        joint_values = random.uniform(-1e4, 1e4, size=6)
        expected = exact_tool_pose(arm, joint_values, AT_FLANGE)
        posed = tool_in_base(arm, joint_values, AT_FLANGE)
        reach = 1.0 + reach_of(arm, joint_values, AT_FLANGE)
        tolerance = reach * (OF_REACH + turned_error(arm, joint_values))
        np.testing.assert_allclose(posed, expected, rtol=0.0, atol=tolerance)


def test_planar_postures_by_hand() -> None:
    arm = arm_of(*PLANAR)
    postures = np.array([[0.0, 0.0], [QUARTER, 0.0], [0.0, QUARTER], [0.0, np.pi]])
    places = tool_in_base(arm, postures, AT_FLANGE)[:, :3, 3]
    expected = [[0.73, 0, 0], [0, 0.73, 0], [0.42, 0.31, 0], [0.11, 0, 0]]
    np.testing.assert_allclose(places, expected, rtol=0.0, atol=1e-16)


def test_offsets_directions_and_slides_by_hand() -> None:
    """The slide starts at d = 0.1 and counts downwards; the turn starts at a quarter."""
    arm = arm_of(prismatic(d=0.1, direction=-1), revolute(a=0.5, theta=QUARTER, direction=-1))
    places = tool_in_base(arm, np.array([[0.0, 0.0], [0.3, QUARTER]]), AT_FLANGE)[:, :3, 3]
    np.testing.assert_allclose(places, [[0, 0.5, 0.1], [0.5, 0, -0.2]], rtol=0.0, atol=1e-16)


def test_the_hand_of_the_selective_arm_hangs_down() -> None:
    """Its joint 3 moves down: the table turns z over in row 2."""
    walked = walk(arm_of(*SELECTIVE), np.array([0.0, 0.0, 0.2, 0.0]))
    np.testing.assert_allclose(walked.flange_in_base[:3, 3], [0.77, 0, -0.28], rtol=0.0, atol=1e-15)
    np.testing.assert_allclose(walked.axis_direction[2:], [[0, 0, -1]] * 2, rtol=0.0, atol=1e-15)
    assert walked.axis_direction[:2].tolist() == [[0, 0, 1], [0, 0, 1]]


def test_frames_are_read_after_the_link_or_before_it() -> None:
    """Frame 1 of a standard table sits at the end of link 1, of a modified one on axis 1."""
    row = revolute(a=0.4)
    standard = walk(arm_of(row, row), np.zeros(2)).link_in_base[:, 0, 3]
    modified = walk(arm_of(row, row, convention="modified"), np.zeros(2)).link_in_base[:, 0, 3]
    assert standard.tolist() == [0.0, 0.4, 0.8]
    assert modified.tolist() == [0.0, 0.4, 0.8]
    turned = np.array([QUARTER, 0.0])
    standard = walk(arm_of(row, row), turned).link_in_base[1, :3, 3]
    modified = walk(arm_of(row, row, convention="modified"), turned).link_in_base[1, :3, 3]
    np.testing.assert_allclose(standard, [0, 0.4, 0], rtol=0.0, atol=1e-16)
    np.testing.assert_allclose(modified, [0.4, 0, 0], rtol=0.0, atol=1e-16)


@pytest.mark.parametrize("batch", [(), (0,), (1,), (5,), (2, 3), (2, 0)])
@pytest.mark.parametrize("rows", [(), PLANAR, SIX])
def test_shapes(rows: tuple[object, ...], batch: tuple[int, ...]) -> None:
    arm = arm_of(*rows)
    count = len(rows)
    walked = walk(arm, np.zeros((*batch, count)))
    assert walked.axis_direction.shape == walked.axis_point.shape == (*batch, count, 3)
    assert walked.link_in_base.shape == (*batch, count + 1, 4, 4)
    assert walked.flange_in_base.shape == (*batch, 4, 4)
    assert tool_in_base(arm, np.zeros((*batch, count)), AT_FLANGE).shape == (*batch, 4, 4)


def test_an_arm_without_rows_holds_its_tool_at_the_base() -> None:
    arm = arm_of()
    tool = random_pose(np.random.default_rng(3))
    assert (tool_in_base(arm, np.empty(0), tool) == tool).all()
    assert (tool_in_base(arm, np.empty((4, 0)), tool) == tool).all()


def test_of_posture_leaves_the_batch_axis_out() -> None:
    arm = arm_of(*SIX)
    postures = random_joint_values(np.random.default_rng(1), arm, 4)
    third, alone = walk(arm, postures).of_posture(2), walk(arm, postures[2])
    for part in ("axis_direction", "axis_point", "link_in_base", "flange_in_base"):
        np.testing.assert_allclose(getattr(third, part), getattr(alone, part), rtol=0, atol=1e-15)


@pytest.mark.parametrize(
    ("given", "count"),
    [([], 0), ([1.0], 1), ([1.0, 2, 3], 3), ([[1.0, 2, 3]], 3), (1.0, 0), (np.zeros((3, 0)), 0)],
)
def test_another_count_of_joint_values_is_refused(given: object, count: int) -> None:
    with pytest.raises(WrongJointCount, match="arm of 2 joints") as caught:
        checked_joint_values(arm_of(*PLANAR), given)
    assert caught.value.value == count
    assert "give 2 values" in caught.value.way_out


def test_passive_rows_take_no_joint_value() -> None:
    arm = arm_of(*PLANAR, revolute(passive=True))
    assert checked_joint_values(arm, [1, 2]).tolist() == [1.0, 2.0]
    with pytest.raises(WrongJointCount):
        checked_joint_values(arm, [1, 2, 3])


@pytest.mark.parametrize("value", [np.nan, np.inf, -np.inf])
def test_values_that_are_not_finite_are_refused_where_they_stand(value: float) -> None:
    with pytest.raises(NotFinite) as caught:
        checked_joint_values(arm_of(*PLANAR), [[0.0, 0.0], [0.0, value]])
    assert caught.value.where == (1, 1)
    assert caught.value.way_out


@pytest.mark.parametrize("value", [1.0000001e9, -2e9, 1e300])
def test_values_out_of_range_are_refused_where_they_stand(value: float) -> None:
    with pytest.raises(OutOfRange) as caught:
        checked_joint_values(arm_of(*PLANAR), [value, 0.0])
    assert caught.value.where == (0,)
    assert caught.value.value == value
    assert checked_joint_values(arm_of(*PLANAR), [1e9, -1e9]).tolist() == [1e9, -1e9]
