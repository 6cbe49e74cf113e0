"""Whether a 3 x 3 matrix is a rotation, how far it is from one, and what is done about it.

Left out: pose matrices with their last row (transforms) and all other forms (orientation_forms).
"""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from kinematics.errors import NotFinite
from kinematics.findings import Finding
from kinematics.number_checks import FloatArray
from kinematics.orientation_findings import matrix_replaced, not_rigid
from kinematics.tolerances import RIGID_REPAIRED, RIGID_SILENT

BoolArray = NDArray[np.bool_]


def defect(matrix: ArrayLike) -> FloatArray:
    """Return how far a matrix is from being orthonormal: the largest entry of |R^T R - I|.

    A mirrored matrix has defect 0 too; look at the determinant for that.

    Parameters
    ----------
    matrix : (..., 3, 3), pure numbers.

    Returns
    -------
    defect : (...), pure number; infinite where squares leave the range of doubles.

    Source
    ------
    Definition of O(3).

    Examples
    --------
    >>> float(defect(np.diag([1.0, 1.0, 1.5])))
    1.25
    """
    columns = _columns(matrix)
    with np.errstate(over="ignore", invalid="ignore"):
        entries = [
            np.abs(sum(a * b for a, b in zip(columns[i], columns[j], strict=True)) - float(i == j))
            for i in range(3)
            for j in range(i, 3)
        ]
        return np.asarray(np.max(entries, axis=0))


def is_mirrored(matrix: ArrayLike) -> BoolArray:
    """Return whether the determinant is negative.

    Parameters
    ----------
    matrix : (..., 3, 3), pure numbers, not far from orthonormal.

    Returns
    -------
    mirrored : (...).

    Source
    ------
    The determinant as the triple product of the columns.

    Examples
    --------
    >>> bool(is_mirrored(np.diag([1.0, -1.0, 1.0])))
    True
    """
    (a, b, c), (d, e, f), (g, h, i) = _columns(matrix)
    with np.errstate(over="ignore", invalid="ignore"):
        return np.asarray(a * (e * i - f * h) - b * (d * i - f * g) + c * (d * h - e * g) < 0.0)


def nearest_rotation(matrix: ArrayLike) -> FloatArray:
    """Return the rotation with the least squared difference from a matrix.

    A multiple of a rotation gives that rotation. For a matrix of rank below 2 the nearest rotation
    is not unique, and one of them is returned.

    Parameters
    ----------
    matrix : (..., 3, 3), finite.

    Returns
    -------
    rotation : (..., 3, 3), determinant +1.

    Raises
    ------
    NotFinite : NaN or infinity.

    Source
    ------
    Polar factor by singular values; Schoenemann, Psychometrika 31(1), 1966, with the determinant
    held at +1 as in Wahba's problem.

    Examples
    --------
    >>> nearest_rotation(1.001 * np.eye(3)).tolist()
    [[1.0, 0.0, 0.0], [0.0, 1.0, 0.0], [0.0, 0.0, 1.0]]
    """
    matrices = np.asarray(matrix, dtype=np.float64)
    if not np.isfinite(matrices).all():
        raise NotFinite("a matrix holds NaN or infinity", way_out="give finite numbers")
    largest = np.abs(matrices).max(axis=(-1, -2), keepdims=True)
    scaled = matrices / np.where(largest == 0.0, 1.0, largest)
    left, _, right = np.linalg.svd(scaled)
    left[..., :, 2] *= np.sign(np.linalg.det(left @ right))[..., None]
    return np.asarray(left @ right + 0.0)


def checked_rotation_matrix(matrix: FloatArray) -> tuple[FloatArray, tuple[Finding, ...]]:
    """Return one matrix from outside as a rotation: as it is, repaired with a finding, or refused.

    Parameters
    ----------
    matrix : (3, 3), finite, as checked_numbers returns it.

    Returns
    -------
    rotation : (3, 3); the matrix itself up to a defect of RIGID_SILENT, else the nearest rotation.
    findings : code 6 with the defect as measure where it was replaced; else empty.

    Raises
    ------
    NotRigid : a defect above RIGID_REPAIRED, or a negative determinant (mirrored).

    Source
    ------
    Definition of SO(3): R^T R = I and det R = +1.

    Examples
    --------
    >>> rotation, findings = checked_rotation_matrix(1.001 * np.eye(3))
    >>> findings[0].code, round(findings[0].measure, 6)
    (6, 0.002001)
    """
    size = float(defect(matrix))
    mirrored = bool(is_mirrored(matrix))
    if mirrored or size > RIGID_REPAIRED:
        raise not_rigid(matrix, size, mirrored=mirrored)
    if size <= RIGID_SILENT:
        return matrix, ()
    return nearest_rotation(matrix), (matrix_replaced(size),)


def _columns(matrix: ArrayLike) -> list[tuple[FloatArray, ...]]:
    """The entries of each column, each in one piece of memory: three times as fast for many."""
    matrices = np.asarray(matrix, dtype=np.float64)
    return [tuple(np.ascontiguousarray(np.moveaxis(matrices[..., j], -1, 0))) for j in range(3)]
