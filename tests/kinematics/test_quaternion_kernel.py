"""The compiled quaternions against the same quotients written out one rotation at a time."""

import math

import numpy as np

from kinematics.number_checks import FloatArray
from kinematics.rotations import quaternion_wxyz_of, rotation_from_quaternion
from kinematics.tolerances import HALF_TURN_NOISE, RIGID_SILENT


def plainly(r: FloatArray) -> list[float]:
    """Return Shepperd's quotient with the largest denominator, its sign as documented."""
    table = [
        [1 + r[0, 0] + r[1, 1] + r[2, 2], r[2, 1] - r[1, 2], r[0, 2] - r[2, 0], r[1, 0] - r[0, 1]],
        [r[2, 1] - r[1, 2], 1 + r[0, 0] - r[1, 1] - r[2, 2], r[0, 1] + r[1, 0], r[0, 2] + r[2, 0]],
        [r[0, 2] - r[2, 0], r[0, 1] + r[1, 0], 1 - r[0, 0] + r[1, 1] - r[2, 2], r[1, 2] + r[2, 1]],
        [r[1, 0] - r[0, 1], r[0, 2] + r[2, 0], r[1, 2] + r[2, 1], 1 - r[0, 0] - r[1, 1] + r[2, 2]],
    ]
    best = max(range(4), key=lambda place: table[place][place])
    norm = math.hypot(*table[best])
    w, *vector = (entry / norm for entry in table[best])
    leading = w
    if abs(w) <= 0.5 * HALF_TURN_NOISE:
        w = 0.0
        leading = next((entry for entry in vector if abs(entry) > RIGID_SILENT), vector[0])
    sign = -1.0 if leading < 0.0 else 1.0
    return [sign * w, *(sign * entry for entry in vector)]


def drawn(count: int) -> FloatArray:
    """Return rotations of any kind, many of them half turns or within a hair of one."""
    generator = np.random.default_rng(20_261_201)
    quaternions = generator.normal(size=(count, 4))
    quaternions[: count // 4, 0] = 0.0
    quaternions[count // 4 : count // 2, 0] *= 10.0 ** generator.uniform(-18, -8, count // 4)
    quaternions[: count // 8, 1] *= 10.0 ** generator.uniform(-15, -9, count // 8)
    quaternions[count // 8 : count // 4] = generator.integers(-1, 2, (count // 8, 4))
    quaternions[~quaternions.any(axis=1)] = 1.0
    return rotation_from_quaternion(quaternions)


def test_the_kernel_does_what_the_formulas_say() -> None:
    rotations = drawn(8000)
    expected = np.array([plainly(rotation) for rotation in rotations])
    found = quaternion_wxyz_of(rotations)
    assert np.abs(found - expected).max() <= 1e-15
    assert not np.signbit(found[found == 0.0]).any()
    assert ((found[:, 0] == 0.0).sum(), (found[:, 0] > 0.5).sum()) > (1000, 1000)


def test_one_rotation_and_any_layout_give_the_same() -> None:
    rotations = drawn(64)
    found = quaternion_wxyz_of(rotations)
    assert np.array_equal(found, [quaternion_wxyz_of(rotation) for rotation in rotations])
    turned_layout = np.ascontiguousarray(rotations.transpose(2, 1, 0)).transpose(2, 1, 0)
    assert np.array_equal(quaternion_wxyz_of(turned_layout), found)
    rotations.flags.writeable = False
    assert np.array_equal(quaternion_wxyz_of(rotations.reshape(8, 8, 3, 3)).reshape(64, 4), found)
