"""Axes, quaternions and rotation vectors against scipy, mpmath and values known by hand."""

import mpmath
import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from kinematics.errors import InvalidOrientation, NotFinite
from kinematics.rotations import (
    angle_of,
    elementary_rotation,
    quaternion_wxyz_of,
    rotation_about,
    rotation_from_quaternion,
    rotation_from_vector,
    rotation_vector_of,
)

RANDOM = np.random.default_rng(20240611)
QUATERNIONS_XYZW = RANDOM.normal(size=(500, 4))
SCIPY = Rotation.from_quat(QUATERNIONS_XYZW)

AXES = [[1, 0, 0], [0, -1, 0], [0, 0, 1], [2, -3, 6], [-1, 1, 0], [-1, -1, -1], [1e-9, 1, 0]]


def exact_rotation(axis: list[float], angle: object) -> mpmath.matrix:
    """Rodrigues' formula at 50 digits."""
    with mpmath.workdps(50):
        length = mpmath.sqrt(sum(mpmath.mpf(c) ** 2 for c in axis))
        x, y, z = (mpmath.mpf(c) / length for c in axis)
        cross = mpmath.matrix([[0, -z, y], [z, 0, -x], [-y, x, 0]])
        return mpmath.eye(3) + mpmath.sin(angle) * cross + (1 - mpmath.cos(angle)) * cross * cross


def as_doubles(matrix: mpmath.matrix) -> np.ndarray:
    return np.array(matrix.tolist(), dtype=np.float64)


def assert_near(actual: object, expected: object, tolerance: float) -> None:
    np.testing.assert_allclose(actual, expected, rtol=0.0, atol=tolerance)


def test_quarter_turns_known_by_hand() -> None:
    x, y, z = np.eye(3)
    for axis, from_, to in [(0, y, z), (1, z, x), (2, x, y)]:  # right-handed: x to y about z
        assert_near(elementary_rotation(axis, np.pi / 2) @ from_, to, 1e-16)
        assert_near(rotation_about(np.eye(3)[axis], np.pi / 2) @ from_, to, 1e-15)
        assert_near(rotation_from_vector(np.pi / 2 * np.eye(3)[axis]) @ from_, to, 1e-15)


def test_against_scipy() -> None:
    rotations = SCIPY.as_matrix()
    wxyz = np.roll(QUATERNIONS_XYZW, 1, axis=-1)
    assert_near(rotation_from_quaternion(wxyz), rotations, 1e-14)
    assert_near(quaternion_wxyz_of(rotations), SCIPY.as_quat(True, scalar_first=True), 1e-14)
    assert_near(rotation_vector_of(rotations), SCIPY.as_rotvec(), 1e-13)
    assert_near(rotation_from_vector(SCIPY.as_rotvec()), rotations, 1e-14)
    assert_near(angle_of(rotations), SCIPY.magnitude(), 1e-14)
    vectors = SCIPY.as_rotvec()
    assert_near(rotation_about(vectors, np.linalg.norm(vectors, axis=-1)), rotations, 1e-14)


@pytest.mark.parametrize("axis", AXES)
@pytest.mark.parametrize("angle", [1e-15, 1e-12, 1e-8, 1e-5, 1e-3, 0.5, 2.0, 3.0])
def test_small_angles_keep_their_digits(axis: list[float], angle: float) -> None:
    rotation = as_doubles(exact_rotation(axis, angle))  # 50-digit Rodrigues, rounded once
    vector = angle * np.asarray(axis) / np.linalg.norm(axis)
    assert_near(rotation_about(axis, angle), rotation, 1e-15)
    assert_near(rotation_from_vector(vector), rotation, 1e-15)
    assert_near(angle_of(rotation), angle, 1e-15)
    assert_near(rotation_vector_of(rotation), vector, 1e-15)
    if angle < 1e-5:  # relative too: the off-diagonal entries hold the angle to its last digits
        np.testing.assert_allclose(rotation_vector_of(rotation), vector, rtol=1e-14, atol=1e-28)


@pytest.mark.parametrize("axis", AXES)
@pytest.mark.parametrize("short", [1e-3, 1e-5, 1e-7, 1e-9, 1e-12, 1e-14])
def test_angles_just_short_of_a_half_turn(axis: list[float], short: float) -> None:
    with mpmath.workdps(50):
        rotation = as_doubles(exact_rotation(axis, mpmath.pi - mpmath.mpf(short)))
    vector = (np.pi - short) * np.asarray(axis) / np.linalg.norm(axis)
    # At w = 0 the entries hold w to a few 1e-16 only, so the angle to about 1e-15.
    assert_near(angle_of(rotation), np.pi - short, 2e-15)
    assert_near(rotation_vector_of(rotation), vector, 4e-15)
    assert_near(rotation_from_vector(vector), rotation, 2e-15)


@pytest.mark.parametrize("axis", AXES)
@pytest.mark.parametrize("noise", [0.0, 1e-16, -1e-16])
def test_at_a_half_turn_the_sign_is_that_of_the_axis_not_of_noise(
    axis: list[float], noise: float
) -> None:
    rotation = rotation_about(axis, np.pi + noise)
    unit = np.asarray(axis) / np.linalg.norm(axis)
    leading = unit[np.abs(unit) > 1e-12][0]
    quaternion = quaternion_wxyz_of(rotation)
    assert quaternion[0] == 0.0
    assert_near(quaternion[1:], unit * np.sign(leading), 1e-15)
    assert_near(rotation_vector_of(rotation), np.pi * unit * np.sign(leading), 2e-15)
    assert float(angle_of(rotation)) == np.pi
    opposite = quaternion_wxyz_of(rotation_about(-unit, np.pi + noise))
    assert_near(opposite, quaternion, 1e-15)


@pytest.mark.parametrize("noise", [1e-16, -1e-16])
def test_a_component_of_noise_does_not_decide_the_sign(noise: float) -> None:
    rotation = rotation_about([0, -3, 4], np.pi)
    rotation[0, 1:] += noise
    rotation[1:, 0] += noise
    assert_near(quaternion_wxyz_of(rotation), [0, 0, 0.6, -0.8], 1e-15)


def test_versine_of_a_small_angle_keeps_its_digits() -> None:
    # By hand: the xy entry about (1, 1, 0) is (1 - cos a) / 2, that is a^2 / 4 for a small a.
    assert rotation_about([1, 1, 0], 1e-7)[0, 1] == pytest.approx(2.5e-15, rel=1e-13, abs=0.0)


def test_no_minus_zero_comes_out() -> None:
    rotations = [
        np.eye(3),
        *(elementary_rotation(axis, angle) for axis in range(3) for angle in (-np.pi, -2.5)),
    ]
    for values in (quaternion_wxyz_of(rotations), rotation_vector_of(rotations)):
        assert not np.signbit(values[values == 0.0]).any()


def test_both_signs_and_any_length_of_a_quaternion_say_the_same() -> None:
    wxyz = np.array([0.5, -0.5, 0.1, 0.7])
    expected = rotation_from_quaternion(wxyz)
    for factor in (-1.0, 7.0, 1e-200, 1e200):
        assert_near(rotation_from_quaternion(factor * wxyz), expected, 1e-15)


@pytest.mark.parametrize("angle", [1e4, 1e9, -1e9])
def test_huge_angles(angle: float) -> None:
    expected = as_doubles(exact_rotation([2, -3, 6], angle))  # 50-digit Rodrigues
    assert_near(rotation_about([2, -3, 6], angle), expected, 1e-15)
    # The length of the vector is good to half a unit in its last place, 1e-16 of the angle.
    vector = angle * np.array([2, -3, 6]) / 7
    assert_near(rotation_from_vector(vector), expected, 1e-15 + 4e-16 * abs(angle))


def test_a_turn_about_an_axis_of_any_length() -> None:
    expected = rotation_about([1, 2, -2], 0.8)
    for factor in (1e-200, 1e-3, 1e200):
        assert_near(rotation_about(factor * np.array([1, 2, -2]), 0.8), expected, 1e-15)


def test_refusals_of_rotation_about() -> None:
    with pytest.raises(InvalidOrientation, match="length zero"):
        rotation_about([[1, 0, 0], [0, 0, 0]], 0.5)
    with pytest.raises(NotFinite):
        rotation_about([1, 0, np.nan], 0.5)
    with pytest.raises(NotFinite):
        rotation_about([1, 0, 0], np.inf)


def test_rows_without_a_meaning_give_nan_and_leave_the_others() -> None:
    wxyz = [[1, 0, 0, 0], [0, 0, 0, 0], [np.nan, 0, 0, 1], [np.inf, 0, 0, 1]]
    rotations = rotation_from_quaternion(wxyz)
    assert_near(rotations[0], np.eye(3), 0.0)
    assert np.isnan(rotations[1:]).all()
    vectors = rotation_from_vector([[0, 0, 0], [np.nan, 0, 0], [0, np.inf, 0], [1e308, 1e308, 0]])
    assert_near(vectors[0], np.eye(3), 0.0)
    assert np.isnan(vectors[1:]).all()
    broken = np.stack([np.eye(3), np.full((3, 3), np.nan)])
    assert np.isnan(quaternion_wxyz_of(broken)[1]).all()
    assert np.isnan(rotation_vector_of(broken)[1]).all()
    assert_near(quaternion_wxyz_of(broken)[0], [1, 0, 0, 0], 0.0)


@pytest.mark.parametrize("batch", [(), (0,), (1,), (2, 3), (4, 0, 2)])
def test_shapes(batch: tuple[int, ...]) -> None:
    rotation = np.broadcast_to(np.eye(3), (*batch, 3, 3))
    assert elementary_rotation(1, np.zeros(batch)).shape == (*batch, 3, 3)
    assert rotation_about([1, 0, 0], np.zeros(batch)).shape == (*batch, 3, 3)
    assert rotation_from_quaternion(np.ones((*batch, 4))).shape == (*batch, 3, 3)
    assert rotation_from_vector(np.ones((*batch, 3))).shape == (*batch, 3, 3)
    assert quaternion_wxyz_of(rotation).shape == (*batch, 4)
    assert rotation_vector_of(rotation).shape == (*batch, 3)
    assert angle_of(rotation).shape == batch
