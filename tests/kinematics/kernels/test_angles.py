"""The compiled angle triples against the same formulas written with NumPy, for all orders."""

from itertools import permutations, product

import numpy as np
import pytest

from kinematics.angle_triples import (
    AxisOrder,
    angles_and_distance,
    angles_of,
    distance_from_gimbal_lock,
    rotation_from_angles,
)
from kinematics.number_checks import FloatArray
from kinematics.orientation_forms import ORDERS
from kinematics.rotations import rotation_from_quaternion
from kinematics.tolerances import HALF_TURN_NOISE, LOCK_EXACT
from kinematics.transforms import pose

EACH_ORDER = pytest.mark.parametrize("order", ORDERS.values(), ids=ORDERS)


def plainly(order: AxisOrder, rotations: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return angles and distance from lock: the outer turn read off, undone, the inner read."""
    i, j, innermost = order.as_current
    k, parity = 3 - i - j, 1 if (j - i) % 3 == 1 else -1
    across_j, across_k = rotations[..., j, innermost], rotations[..., k, innermost]
    along = rotations[..., i, innermost]
    across = np.hypot(across_j, across_k)
    distance = np.arctan2(across, np.abs(along))
    locked = distance <= LOCK_EXACT
    if order.first_is_last:
        outer = np.arctan2(across_j, -parity * across_k)
        middle = np.arctan2(np.where(locked, 0.0, across), along)
    else:
        outer = np.arctan2(-parity * across_j, across_k)
        middle = np.arctan2(parity * along, np.where(locked, 0.0, across))
    outer = np.where(locked, 0.0, outer)
    cosine, sine = np.cos(outer)[..., None], parity * np.sin(outer)[..., None]
    rest_j = cosine * rotations[..., j, :] + sine * rotations[..., k, :]
    beside = -parity * rest_j[..., k] if order.first_is_last else parity * rest_j[..., i]
    inner = np.arctan2(beside, rest_j[..., j])
    if order.about_fixed:
        first, last = inner, outer
    else:
        first = np.where(locked, np.where(along > 0.0, inner, -inner), outer)
        last = np.where(locked, 0.0, inner)
    outside = [np.where(angle <= HALF_TURN_NOISE - np.pi, np.pi, angle) for angle in (first, last)]
    return np.stack([outside[0], middle, outside[1]], axis=-1) + 0.0, distance


def drawn(order: AxisOrder, count: int = 4000) -> FloatArray:
    """Return rotations of any kind, and many at gimbal lock or by some of every magnitude off."""
    generator = np.random.default_rng(20_261_202)
    anywhere = rotation_from_quaternion(generator.normal(size=(count // 2, 4)))
    angles = generator.uniform(-np.pi, np.pi, size=(count // 2, 3))
    quarters = generator.integers(-2, 3, size=angles.shape) * (np.pi / 2)
    angles = np.where(generator.random(angles.shape) < 0.3, quarters, angles)
    locks = [0.0, np.pi] if order.first_is_last else [-np.pi / 2, np.pi / 2]
    off = 10.0 ** generator.uniform(-17, 0, size=count // 2)
    angles[:, 1] = generator.choice(locks, size=count // 2)
    angles[:, 1] += generator.choice([-1.0, 0.0, 1.0], size=count // 2) * off
    return np.concatenate([anywhere, rotation_from_angles(order, angles), exact_ones()])


def exact_ones() -> FloatArray:
    """Return the 24 rotations whose entries are 0 and 1, their zeros of either sign."""
    signed = [
        np.diag(signs) @ np.eye(3)[list(places)]
        for signs in product([1.0, -1.0], repeat=3)
        for places in permutations(range(3))
    ]
    rotations = np.array([matrix for matrix in signed if np.linalg.det(matrix) > 0.0])
    assert len(rotations) == 24
    return np.concatenate([np.where(rotations == 0.0, zero, rotations) for zero in (0.0, -0.0)])


@EACH_ORDER
def test_the_kernel_does_what_the_formulas_say(order: AxisOrder) -> None:
    rotations = drawn(order)
    expected, distance = plainly(order, rotations)
    found, found_distance = angles_and_distance(order, rotations)
    # Two libraries' sines and arc tangents, each good to a unit in the last place of 3.1.
    np.testing.assert_allclose(found, expected, rtol=0.0, atol=1e-15)
    np.testing.assert_allclose(found_distance, distance, rtol=1e-15, atol=0.0)
    assert not np.signbit(found[found == 0.0]).any()
    locked = distance <= LOCK_EXACT
    assert min(locked.sum(), (~locked).sum(), ((distance > 0) & (distance < 1e-6)).sum()) > 500


@EACH_ORDER
def test_poses_batches_and_layouts_give_the_same(order: AxisOrder) -> None:
    rotations = drawn(order, 64)[:64]
    found, distance = angles_and_distance(order, rotations)
    assert np.array_equal(angles_of(order, rotations), found)
    assert np.array_equal(distance_from_gimbal_lock(order, rotations), distance)
    posed = pose(rotations, np.random.default_rng(1).normal(size=(64, 3)))
    turned_layout = np.ascontiguousarray(posed.transpose(2, 1, 0)).transpose(2, 1, 0)
    posed.flags.writeable = False
    for given in (posed, turned_layout, posed[:, :3, :3], posed.reshape(4, 16, 4, 4)):
        angles, from_lock = angles_and_distance(order, given)
        assert angles.shape == (*given.shape[:-2], 3)
        assert np.array_equal(angles.reshape(64, 3), found)
        assert np.array_equal(from_lock.reshape(64), distance)
    alone = [angles_and_distance(order, rotation) for rotation in rotations]
    assert np.array_equal([angles for angles, _ in alone], found)
    assert np.array_equal([from_lock for _, from_lock in alone], distance)


@EACH_ORDER
def test_no_rotations_and_no_numbers(order: AxisOrder) -> None:
    angles, distance = angles_and_distance(order, np.empty((0, 3, 3)))
    assert (angles.shape, distance.shape) == ((0, 3), (0,))
    angles, distance = angles_and_distance(order, np.full((2, 3, 3), np.nan))
    assert np.isnan(angles).all()
    assert np.isnan(distance).all()
