"""The compiled ways to and from rotation matrices agree with those for one, scipy and mpmath.

Left out: input that cannot be used, which is kept away from them (test_orientation_batches).
"""

import mpmath
import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from kinematics.angle_triples import angles_of, rotation_from_angles
from kinematics.many_rotations import (
    rotations_from_angles,
    rotations_from_quaternions,
    rotations_from_vectors,
)
from kinematics.orientation_forms import ORDERS
from kinematics.rotations import rotation_from_quaternion, rotation_from_vector

COUNT = 300
CLOSE = 2e-15
RANDOM = Rotation.random(COUNT, rng=6)


def near(actual: object, expected: object, within: float = CLOSE) -> None:
    np.testing.assert_allclose(actual, expected, rtol=0, atol=within)


@pytest.mark.parametrize("length", [1e-300, 1e-160, 1e-6, 1.0, 1e150, 1e300])
def test_quaternions_of_any_length(length: float) -> None:
    quaternions = RANDOM.as_quat(scalar_first=True) * length
    near(rotations_from_quaternions(quaternions), RANDOM.as_matrix())
    near(rotations_from_quaternions(quaternions), rotation_from_quaternion(quaternions))


@pytest.mark.parametrize("length", [0.0, 1e-300, 1e-11, 1e-9, 1e-3, 1.0, 3.0, 1e4, 9e8])
def test_vectors_of_any_length(length: float) -> None:
    rng = np.random.default_rng(7)
    vectors = rng.normal(size=(40, 3))
    vectors *= length / np.linalg.norm(vectors, axis=1, keepdims=True)
    found = rotations_from_vectors(vectors)
    near(found, rotation_from_vector(vectors), CLOSE if length < 1e3 else 1e-15 * length)
    # The angle of a large vector is rounded before anything can be computed from it.
    near(found, [by_mpmath(vector) for vector in vectors], max(CLOSE, 3e-16 * length))


def by_mpmath(vector: np.ndarray) -> np.ndarray:
    with mpmath.workdps(50):
        x, y, z = (mpmath.mpf(part) for part in vector)
        angle = mpmath.sqrt(x * x + y * y + z * z)
        cross = mpmath.matrix([[0, -z, y], [z, 0, -x], [-y, x, 0]])
        if angle == 0:
            return np.eye(3)
        turn = mpmath.eye(3) + mpmath.sin(angle) / angle * cross
        turn += (1 - mpmath.cos(angle)) / angle**2 * cross * cross
        return np.array(turn.tolist(), dtype=np.float64)


@pytest.mark.parametrize("form", ORDERS)
def test_angles_of_each_order(form: str) -> None:
    sequence, axes = form.split("-")
    angles = np.random.default_rng(8).uniform(-10, 10, (COUNT, 3))
    angles[:3] = [[0, 0, 0], [np.pi, -np.pi, np.pi / 2], [1e8, 1e-300, -1e-12]]
    found = rotations_from_angles(ORDERS[form], angles)
    near(found, rotation_from_angles(ORDERS[form], angles))
    named = sequence.upper() if axes == "current" else sequence
    near(found, Rotation.from_euler(named, angles).as_matrix(), 1e-14)
    back = angles_of(ORDERS[form], found)
    near(rotations_from_angles(ORDERS[form], back), found, 1e-12)


def test_other_layouts_are_read_alike() -> None:
    angles = np.random.default_rng(9).normal(size=(3, COUNT)).T
    order = ORDERS["zyx-current"]
    copied = np.ascontiguousarray(angles)
    assert np.array_equal(
        rotations_from_angles(order, angles), rotations_from_angles(order, copied)
    )
    frozen = copied.copy()
    frozen.flags.writeable = False
    assert np.array_equal(rotations_from_vectors(frozen), rotations_from_vectors(copied))


@pytest.mark.parametrize("form", ORDERS)
def test_angles_of_what_is_no_rotation_stay_in_their_row(form: str) -> None:
    rotations = RANDOM.as_matrix()[:4]
    rotations[1, 2, 0], rotations[3, 0, 1] = np.nan, np.inf
    angles = angles_of(ORDERS[form], rotations)
    assert np.isnan(angles).all(axis=1).tolist() == [False, True, False, True]
    assert angles_of(ORDERS[form], rotations.reshape(2, 2, 3, 3)).shape == (2, 2, 3)
    assert angles_of(ORDERS[form], np.empty((0, 3, 3))).shape == (0, 3)
