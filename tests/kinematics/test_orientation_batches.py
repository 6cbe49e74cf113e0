"""Many orientations are judged, repaired and told as each of them alone would be.

Left out: whether that is right, which tests of single orientations hold (test_orientation_forms).
"""

from typing import Any

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from kinematics.errors import KinematicsError
from kinematics.number_checks import FloatArray
from kinematics.orientation_batches import checked_rotations, told_rotations
from kinematics.orientation_forms import (
    FORMS,
    lock_finding,
    rotation_from,
    shape_of,
    values_of,
)
from kinematics.orientation_input import checked_rotation
from kinematics.rigidity import defect, is_mirrored
from kinematics.rotations import lengths
from kinematics.tolerances import LARGEST_MAGNITUDE, QUATERNION_ZERO, RIGID_REPAIRED

RANDOM = Rotation.random(30, rng=8).as_matrix()
BAD = (np.nan, np.inf, -np.inf, 2e9, -1e300)


def good_and_bad(form: str) -> FloatArray:
    """Return orientations of which every second is spoilt, each in another way."""
    values = values_of(form, RANDOM)
    rng = np.random.default_rng(5)
    flat = values.reshape(len(values), -1)
    for place, row in enumerate(range(0, 20, 2)):
        flat[row, rng.integers(flat.shape[1])] = BAD[place % len(BAD)]
    flat[20] = 0.0
    flat[22] *= 1.0005
    flat[24] *= 1.5
    flat[26] *= -1.0
    flat[28] = flat[28].round(3)
    return flat.reshape(values.shape)


def alone(form: str, values: FloatArray) -> Any:
    try:
        return checked_rotation(form, values)
    except KinematicsError as error:
        return error


@pytest.mark.parametrize("form", FORMS)
def test_each_is_judged_as_it_would_be_alone(form: str) -> None:
    values = good_and_bad(form)
    checked = checked_rotations(form, values)
    kinds = set()
    for row, given in enumerate(values):
        one = alone(form, given)
        assert bool(checked.usable[row]) == (not isinstance(one, KinematicsError)), row
        kinds.add(type(one).__name__)
        if isinstance(one, KinematicsError):
            error = checked.refusal(row)
            assert (type(error), error.say, error.where, error.way_out) == (
                *(type(one), one.say, one.where, one.way_out),
            )
            assert np.array_equal(checked.rotation[row], np.eye(3))
            assert not checked.repaired[row]
            continue
        rotation, findings = one
        np.testing.assert_allclose(checked.rotation[row], rotation, rtol=0, atol=4e-15)
        assert [checked.repair(row)] * int(checked.repaired[row]) == list(findings)
    assert len(kinds) >= 3
    assert checked.usable[1::2].all()


@pytest.mark.parametrize("form", FORMS)
def test_angles_are_told_as_they_would_be_alone(form: str) -> None:
    rotations = RANDOM.copy()
    for row, middle in enumerate((0.0, np.pi, np.pi / 2, -np.pi / 2, 1e-8, 1e-6)):
        if len(shape_of(form)) == 1 and "-" in form and form[0] in "xyz":
            rotations[row] = rotation_from(form, [0.3, middle, 0.4])
    told = told_rotations(form, rotations)
    assert np.array_equal(told.values, values_of(form, rotations))
    for row, rotation in enumerate(rotations):
        finding = lock_finding(form, rotation)
        assert bool(told.near_lock[row]) == (finding is not None)
        if finding is not None:
            assert told.lock(row) == finding
    locks = int(np.count_nonzero(told.near_lock))
    assert locks == (0 if form in FORMS[:4] else 3 if form[0] == form[2] else 2)


@pytest.mark.parametrize("form", FORMS)
def test_none_at_all(form: str) -> None:
    checked = checked_rotations(form, np.empty((0, *shape_of(form))))
    assert len(checked.usable) == len(checked.rotation) == 0
    assert told_rotations(form, checked.rotation).values.shape == (0, *shape_of(form))


def test_one_and_many_round_alike_at_the_very_limits() -> None:
    """Else a row could be refused among others and have nothing to say for it."""
    rng = np.random.default_rng(3)
    directions = rng.normal(size=(2000, 4))
    quaternions = directions / lengths(directions)[:, None] * QUATERNION_ZERO
    vectors = directions[:, :3] / lengths(directions[:, :3])[:, None] * LARGEST_MAGNITUDE
    for form, values in (("quaternion-wxyz", quaternions), ("rotation-vector", vectors)):
        usable = checked_rotations(form, values).usable
        assert 0 < np.count_nonzero(usable) < len(usable)
        for row in range(300):
            assert usable[row] == (not isinstance(alone(form, values[row]), KinematicsError))
    stretched = RANDOM.copy()
    stretched[:, :, 0] *= np.sqrt(1.0 + RIGID_REPAIRED)
    assert np.array_equal(defect(stretched), [defect(one) for one in stretched])
    usable = checked_rotations("matrix", stretched).usable
    assert 0 < np.count_nonzero(usable) < len(usable)
    for row, one in enumerate(stretched):
        assert usable[row] == (not isinstance(alone("matrix", one), KinematicsError))


def test_mirrors_are_told_by_the_determinant() -> None:
    matrices = np.random.default_rng(9).normal(size=(500, 3, 3))
    assert np.array_equal(is_mirrored(matrices), np.linalg.det(matrices) < 0)
    assert is_mirrored(np.eye(3)).shape == ()


def test_the_defect_is_the_largest_entry() -> None:
    matrices = np.random.default_rng(10).normal(size=(500, 3, 3))
    gram = np.swapaxes(matrices, 1, 2) @ matrices - np.eye(3)
    np.testing.assert_allclose(defect(matrices), np.abs(gram).max(axis=(1, 2)), rtol=1e-14)
