"""Poses put together, inverted and checked, on values known by hand."""

import numpy as np
import pytest

from kinematics.errors import KinematicsError, NotFinite, NotRigid, OutOfRange
from kinematics.rotations import rotation_about
from kinematics.transforms import checked_pose, checked_position, inverse, pose

QUARTER_TURN_ABOUT_Z = rotation_about([0, 0, 1], np.pi / 2)


def test_pose_moves_points_by_hand() -> None:
    tool_in_base = pose(QUARTER_TURN_ABOUT_Z, [1, 2, 3])
    np.testing.assert_allclose(tool_in_base @ [1, 0, 0, 1], [1, 3, 3, 1], rtol=0.0, atol=1e-15)
    assert tool_in_base[3].tolist() == [0, 0, 0, 1]


def test_inverse_by_hand() -> None:
    base_in_tool = inverse(pose(QUARTER_TURN_ABOUT_Z, [1, 2, 3]))
    # Seen from the turned tool, base is 2 back along its x (base y) and 1 along its y (- base x).
    np.testing.assert_allclose(base_in_tool[:3, 3], [-2, 1, -3], rtol=0.0, atol=1e-15)
    np.testing.assert_allclose(base_in_tool[:3, :3], QUARTER_TURN_ABOUT_Z.T, rtol=0.0, atol=1e-15)


def test_inverse_undoes() -> None:
    rotations = rotation_about(np.random.default_rng(1).normal(size=(50, 3)), np.linspace(0, 4, 50))
    x_in_y = pose(rotations, np.linspace(-3, 3, 150).reshape(50, 3))
    # Positions of up to 5 m: a dozen roundings of 5e-16 each.
    identity = np.broadcast_to(np.eye(4), (50, 4, 4))
    np.testing.assert_allclose(inverse(x_in_y) @ x_in_y, identity, rtol=0.0, atol=1e-14)
    np.testing.assert_allclose(x_in_y @ inverse(x_in_y), identity, rtol=0.0, atol=1e-14)
    np.testing.assert_allclose(inverse(inverse(x_in_y)), x_in_y, rtol=0.0, atol=1e-14)


def test_no_minus_zero_in_the_inverse_of_identity() -> None:
    assert not np.signbit(inverse(np.eye(4))).any()


@pytest.mark.parametrize(
    ("rotation_batch", "position_batch", "batch"),
    [
        ((), (), ()),
        ((0,), (), (0,)),
        ((5,), (), (5,)),
        ((), (2, 3), (2, 3)),
        ((3,), (2, 1), (2, 3)),
    ],
)
def test_shapes_and_broadcasting(
    rotation_batch: tuple[int, ...], position_batch: tuple[int, ...], batch: tuple[int, ...]
) -> None:
    rotation = np.broadcast_to(np.eye(3), (*rotation_batch, 3, 3))
    x_in_y = pose(rotation, np.zeros((*position_batch, 3)))
    assert x_in_y.shape == (*batch, 4, 4)
    assert inverse(x_in_y).shape == (*batch, 4, 4)


def test_checked_pose_takes_a_good_one() -> None:
    given = pose(QUARTER_TURN_ABOUT_Z, [1, 2, 3])
    taken, findings = checked_pose(given.tolist())
    assert findings == ()
    assert (taken == given).all()


def test_checked_pose_repairs_typed_decimals_and_says_so() -> None:
    exact = rotation_about([2, -3, 6], 0.9)
    taken, (finding,) = checked_pose(pose(np.round(exact, 4), [1, 2, 3]).tolist())
    assert finding.code == 6
    np.testing.assert_allclose(taken[:3, :3], exact, rtol=0.0, atol=1e-4)
    assert taken[:3, 3].tolist() == [1, 2, 3]


@pytest.mark.parametrize("row", [[0, 0, 0, 2], [1e-3, 0, 0, 1], [0, 0, 0, 0], [1, 2, 3, 1]])
def test_another_last_row_is_refused(row: list[float]) -> None:
    matrix = np.eye(4)
    matrix[3] = row
    with pytest.raises(NotRigid, match="last row") as caught:
        checked_pose(matrix.tolist())
    assert caught.value.where == (3,)
    assert caught.value.value == row


def test_rounding_noise_in_the_last_row_is_put_right_silently() -> None:
    matrix = np.eye(4)
    matrix[3] = [1e-16, -1e-16, 0, 1 + 2e-16]
    taken, findings = checked_pose(matrix.tolist())
    assert findings == ()
    assert (taken == np.eye(4)).all()


@pytest.mark.parametrize("place", [(0, 0), (1, 3), (3, 3)])
def test_entries_that_cannot_be_used_are_named(place: tuple[int, int]) -> None:
    for bad, error in ((np.nan, NotFinite), (np.inf, NotFinite), (1e308, OutOfRange)):
        matrix = np.eye(4)
        matrix[place] = bad
        with pytest.raises(error) as caught:
            checked_pose(matrix.tolist())
        assert caught.value.where == place


def test_matrices_that_are_no_poses() -> None:
    with pytest.raises(NotRigid, match="mirrored"):
        checked_pose(np.diag([1.0, 1.0, -1.0, 1.0]).tolist())
    with pytest.raises(NotRigid, match="no rotation"):
        checked_pose(np.diag([2.0, 2.0, 2.0, 1.0]).tolist())
    for bad in (np.eye(3).tolist(), [[1, 0, 0, 0]] * 3, None, "x", []):
        with pytest.raises(KinematicsError, match="4 x 4") as caught:
            checked_pose(bad)
        assert caught.value.code == "unusable-value"


def test_checked_position() -> None:
    assert checked_position((1, 2, 1e9)).tolist() == [1, 2, 1e9]
    with pytest.raises(OutOfRange) as caught:
        checked_position([0, 0, 1.1e9])
    assert caught.value.where == (2,)
    with pytest.raises(NotFinite):
        checked_position([0, np.nan, 0])
    with pytest.raises(KinematicsError, match="a position takes 3 numbers"):
        checked_position([0, 0])
