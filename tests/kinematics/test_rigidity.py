"""Defects known by hand, nearest rotations against scipy, and the borders of what is repaired."""

import numpy as np
import pytest
from scipy.linalg import polar

from kinematics.errors import NotFinite, NotRigid
from kinematics.rigidity import checked_rotation_matrix, defect, nearest_rotation
from kinematics.rotations import rotation_about
from kinematics.tolerances import RIGID_REPAIRED, RIGID_SILENT

ROTATION = rotation_about([2, -3, 6], 0.9)


def scaled(size: float) -> np.ndarray:
    """The rotation scaled so that its defect is ``size``: (1 + s)^2 - 1 = size."""
    return np.sqrt(1.0 + size) * ROTATION


def test_defect_by_hand() -> None:
    assert float(defect(np.eye(3))) == 0.0
    assert float(defect(np.diag([1.0, 1.0, -1.0]))) == 0.0
    assert float(defect([[1, 0.05, 0], [0, 1, 0], [0, 0, 1]])) == 0.05
    assert float(defect(np.zeros((3, 3)))) == 1.0
    assert float(defect(2.0 * np.eye(3))) == 3.0


def test_defect_of_huge_entries_is_infinite_without_a_warning() -> None:
    assert np.isinf(defect(np.full((3, 3), 1e308)))


def test_nearest_rotation_against_scipy() -> None:
    noise = np.random.default_rng(7).normal(scale=0.1, size=(100, 3, 3))
    for matrix in ROTATION + noise:
        assert np.linalg.det(matrix) > 0.0
        np.testing.assert_allclose(nearest_rotation(matrix), polar(matrix)[0], rtol=0.0, atol=1e-14)


def test_nearest_rotation_of_a_mirrored_matrix_is_a_rotation_and_none_is_nearer() -> None:
    mirrored = np.diag([1.0, 0.9, -0.5])  # by hand: giving up the sign of the least is cheapest
    np.testing.assert_allclose(nearest_rotation(mirrored), np.eye(3), rtol=0.0, atol=1e-15)


def test_nearest_rotation_of_any_size() -> None:
    for factor in (1e-300, 1e-5, 1e300):
        np.testing.assert_allclose(
            nearest_rotation(factor * ROTATION), ROTATION, rtol=0.0, atol=2e-15
        )


def test_nearest_rotation_of_zero_is_some_rotation() -> None:
    rotation = nearest_rotation(np.zeros((3, 3)))
    assert float(defect(rotation)) < 1e-15
    assert np.linalg.det(rotation) > 0.0


def test_nearest_rotation_in_batches() -> None:
    assert nearest_rotation(np.zeros((0, 3, 3))).shape == (0, 3, 3)
    assert nearest_rotation(np.ones((2, 4, 3, 3))).shape == (2, 4, 3, 3)
    with pytest.raises(NotFinite):
        nearest_rotation([np.eye(3), np.full((3, 3), np.nan)])


def test_up_to_the_silent_defect_the_matrix_is_kept() -> None:
    for matrix in (ROTATION, scaled(0.99 * RIGID_SILENT)):
        rotation, findings = checked_rotation_matrix(matrix)
        assert findings == ()
        assert (rotation == matrix).all()


@pytest.mark.parametrize("size", [1.01 * RIGID_SILENT, 1e-6, 0.999 * RIGID_REPAIRED])
def test_between_the_borders_it_is_repaired_and_said(size: float) -> None:
    rotation, (finding,) = checked_rotation_matrix(scaled(size))
    np.testing.assert_allclose(rotation, ROTATION, rtol=0.0, atol=2e-15)
    assert (finding.code, finding.name) == (6, "input-repaired")
    assert finding.measure == pytest.approx(size, abs=1e-15)
    assert finding.threshold == RIGID_SILENT


@pytest.mark.parametrize("size", [1.001 * RIGID_REPAIRED, 0.1, 3.0])
def test_beyond_it_is_refused(size: float) -> None:
    with pytest.raises(NotRigid, match="no rotation") as caught:
        checked_rotation_matrix(scaled(size))
    assert caught.value.defect == pytest.approx(size)
    assert caught.value.code == "not-rigid"
    assert f"{size:.6g}" in str(caught.value)
    assert caught.value.way_out


@pytest.mark.parametrize("column", [0, 1, 2])
def test_mirrored_matrices_are_refused_as_such(column: int) -> None:
    signs = np.ones(3)
    signs[column] = -1.0
    with pytest.raises(NotRigid, match="mirrored") as caught:
        checked_rotation_matrix(ROTATION * signs)
    assert caught.value.defect < 1e-15
    with pytest.raises(NotRigid, match=r"no rotation.*mirrored"):
        checked_rotation_matrix(1.5 * ROTATION * signs)
