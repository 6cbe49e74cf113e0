"""All 24 orders against scipy, and against 50-digit products near lock and near a half turn."""

import itertools

import mpmath
import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from kinematics.angle_triples import (
    AxisOrder,
    angles_of,
    distance_from_gimbal_lock,
    rotation_from_angles,
    sum_is_determined,
)
from kinematics.tolerances import LOCK_EXACT

ORDERS = [
    AxisOrder(axes, about_fixed)
    for axes in itertools.product(range(3), repeat=3)
    if axes[0] != axes[1] != axes[2]
    for about_fixed in (True, False)
]


def name_of(order: AxisOrder) -> str:
    return "".join("xyz"[axis] for axis in order.axes) + ("-fixed" if order.about_fixed else "")


every_order = pytest.mark.parametrize("order", ORDERS, ids=name_of)


def locks_of(order: AxisOrder) -> tuple[float, float]:
    return (0.0, np.pi) if order.first_is_last else (-np.pi / 2, np.pi / 2)


def exact_rotation(order: AxisOrder, angles: list[object]) -> np.ndarray:
    """Product of elementary matrices at 50 digits, rounded once; one turn after the other."""
    with mpmath.workdps(50):
        product = mpmath.eye(3)
        for axis, angle in zip(order.axes, angles, strict=True):
            turn = mpmath.eye(3)
            j, k = (axis + 1) % 3, (axis + 2) % 3
            turn[j, j] = turn[k, k] = mpmath.cos(angle)
            turn[k, j] = mpmath.sin(angle)
            turn[j, k] = -turn[k, j]
            product = turn * product if order.about_fixed else product * turn
        return np.array(product.tolist(), dtype=np.float64)


def assert_same_rotation(order: AxisOrder, angles: np.ndarray, rotation: np.ndarray) -> None:
    exact = exact_rotation(order, [mpmath.mpf(float(angle)) for angle in angles])
    np.testing.assert_allclose(exact, rotation, rtol=0.0, atol=LOCK_EXACT)


def assert_canonical(order: AxisOrder, angles: np.ndarray) -> None:
    outer = angles[..., [0, 2]]
    assert (outer > -np.pi).all()
    assert (outer <= np.pi).all()
    lower, upper = locks_of(order)
    assert (angles[..., 1] >= lower).all()
    assert (angles[..., 1] <= upper).all()
    assert not np.signbit(angles[angles == 0.0]).any()


def test_there_are_24_orders() -> None:
    assert len(ORDERS) == len(set(ORDERS)) == 24


@every_order
def test_against_scipy(order: AxisOrder) -> None:
    sequence = "".join("xyz"[axis] for axis in order.axes)
    rotations = Rotation.from_quat(np.random.default_rng(5).normal(size=(300, 4)))
    # scipy: lower case turns about fixed axes, upper case about current ones.
    expected = rotations.as_euler(sequence if order.about_fixed else sequence.upper())
    angles = angles_of(order, rotations.as_matrix())
    np.testing.assert_allclose(angles, expected, rtol=0.0, atol=1e-12)
    np.testing.assert_allclose(
        rotation_from_angles(order, expected), rotations.as_matrix(), rtol=0.0, atol=1e-14
    )
    assert_canonical(order, angles)


def test_fixed_turns_pre_multiply_by_hand() -> None:
    # 90 deg about fixed z sends x to y; then 90 deg about fixed x sends that y to z.
    fixed = rotation_from_angles(AxisOrder((2, 0, 1), True), [np.pi / 2, np.pi / 2, 0.0])
    np.testing.assert_allclose(fixed @ [1, 0, 0], [0, 0, 1], rtol=0.0, atol=1e-15)
    # About the current x instead, which stays where it is: x still ends on y.
    current = rotation_from_angles(AxisOrder((2, 0, 1), False), [np.pi / 2, np.pi / 2, 0.0])
    np.testing.assert_allclose(current @ [1, 0, 0], [0, 1, 0], rtol=0.0, atol=1e-15)


@every_order
@pytest.mark.parametrize("exponent", range(5, 17))
def test_near_gimbal_lock_the_rotation_comes_back(order: AxisOrder, exponent: int) -> None:
    distance = mpmath.mpf(10) ** -exponent
    for lock, (first, last) in itertools.product(
        range(2), [(0.3, -1.1), (2.9, 2.8), (-3.1, 0.2), (1.5, -1.5)]
    ):
        with mpmath.workdps(50):
            if order.first_is_last:
                middle = distance if lock == 0 else mpmath.pi - distance
            else:
                middle = (1 if lock else -1) * (mpmath.pi / 2 - distance)
        rotation = exact_rotation(order, [first, middle, last])
        angles = angles_of(order, rotation)
        assert_canonical(order, angles)
        assert_same_rotation(order, angles, rotation)
        assert float(distance_from_gimbal_lock(order, rotation)) == pytest.approx(
            float(distance), rel=1e-9, abs=2e-16
        )
        if exponent > 12:
            assert angles[2] == 0.0
            assert angles[1] == locks_of(order)[lock]
        if exponent < 12:  # 50-digit angles: the small entries still hold them to many digits
            np.testing.assert_allclose(angles[[0, 2]], [first, last], rtol=0.0, atol=1e-12)
            assert float(middle) == pytest.approx(angles[1], abs=1e-15)


@pytest.mark.parametrize("order", [o for o in ORDERS if o.first_is_last], ids=name_of)
def test_small_middle_angles_keep_their_digits(order: AxisOrder) -> None:
    rotation = exact_rotation(order, [0.4, mpmath.mpf("5e-9"), -1.3])
    assert angles_of(order, rotation)[1] == pytest.approx(5e-9, rel=1e-14)


@every_order
def test_at_gimbal_lock_the_last_is_zero_and_the_combination_holds(order: AxisOrder) -> None:
    first, last = 0.7, -0.4
    for lock in locks_of(order):
        rotation = rotation_from_angles(order, [first, lock, last])
        angles = angles_of(order, rotation)
        combination = first + last if sum_is_determined(order, rotation) else first - last
        np.testing.assert_allclose(angles, [combination, lock, 0.0], rtol=0.0, atol=1e-15)
        assert angles[2] == 0.0
        # The other combination is free: turning both angles along it leaves the rotation.
        step = -0.25 if sum_is_determined(order, rotation) else 0.25
        turned = rotation_from_angles(order, [first + 0.25, lock, last + step])
        np.testing.assert_allclose(turned, rotation, rtol=0.0, atol=1e-15)


@every_order
def test_lock_reached_with_rounding_noise_is_lock(order: AxisOrder) -> None:
    for lock, noise in itertools.product(locks_of(order), np.random.default_rng(3).normal(size=20)):
        rotation = rotation_from_angles(order, [0.7, lock, -0.4]) + 1e-15 * noise
        assert angles_of(order, rotation)[2] == 0.0


@every_order
def test_outer_angles_of_minus_half_a_turn_come_out_as_plus(order: AxisOrder) -> None:
    middle = 0.5
    for outer in ([-np.pi, 0.2], [0.2, -np.pi], [np.pi, np.pi], [-np.pi, -np.pi]):
        angles = angles_of(order, rotation_from_angles(order, [outer[0], middle, outer[1]]))
        expected = [np.pi if abs(angle) == np.pi else angle for angle in outer]
        np.testing.assert_allclose(angles[[0, 2]], expected, rtol=0.0, atol=2e-15)
        assert_canonical(order, angles)


@every_order
@pytest.mark.parametrize("short", ["1e-5", "1e-7", "1e-10", "1e-13"])
def test_outer_angles_just_beyond_minus_half_a_turn_keep_their_sign(
    order: AxisOrder, short: str
) -> None:
    with mpmath.workdps(50):
        near = mpmath.mpf(short) - mpmath.pi
    rotation = exact_rotation(order, [near, mpmath.mpf("0.5"), near])
    # One unit in the last place of pi is 4e-16.
    np.testing.assert_allclose(
        angles_of(order, rotation)[[0, 2]], float(near), rtol=0.0, atol=1e-15
    )


@every_order
def test_the_24_right_angled_rotations_come_back(order: AxisOrder) -> None:
    count = 0
    for axes in itertools.permutations(np.eye(3)):
        for signs in itertools.product((-1.0, 1.0), repeat=3):
            rotation = np.array(signs) * np.array(axes)
            if np.linalg.det(rotation) > 0:
                count += 1
                angles = angles_of(order, rotation)
                assert_canonical(order, angles)
                back = rotation_from_angles(order, angles)
                np.testing.assert_allclose(back, rotation, rtol=0.0, atol=1e-15)
    assert count == 24


@pytest.mark.parametrize("size", [1e4, 1e9])
def test_huge_angles(size: float) -> None:
    order = AxisOrder((2, 1, 0), False)
    angles = [size, -0.9 * size, 0.7 * size]
    expected = exact_rotation(order, [mpmath.mpf(angle) for angle in angles])
    np.testing.assert_allclose(rotation_from_angles(order, angles), expected, rtol=0.0, atol=1e-15)


@every_order
@pytest.mark.parametrize("batch", [(), (0,), (2, 3), (3, 0)])
def test_shapes(order: AxisOrder, batch: tuple[int, ...]) -> None:
    rotation = rotation_from_angles(order, np.zeros((*batch, 3)))
    assert rotation.shape == (*batch, 3, 3)
    assert angles_of(order, rotation).shape == (*batch, 3)
    assert distance_from_gimbal_lock(order, rotation).shape == batch
    assert sum_is_determined(order, rotation).shape == batch


@every_order
def test_a_row_of_nan_stays_nan_and_leaves_the_others(order: AxisOrder) -> None:
    rotations = rotation_from_angles(order, [[0.1, 0.2, 0.3], [np.nan] * 3, [np.inf] * 3])
    angles = angles_of(order, rotations)
    np.testing.assert_allclose(angles[0], [0.1, 0.2, 0.3], rtol=0.0, atol=1e-15)
    assert np.isnan(angles[1:]).all()
