"""Singular values and vectors of blocks of small matrices against LAPACK, through numpy."""

import numpy as np
import pytest

from kinematics.kernels.decomposition import BLOCK, decompose

EPS = float(np.finfo(float).eps)
SHAPES = [(6, 6), (6, 5), (6, 7), (6, 12), (6, 32), (3, 3), (2, 3), (3, 2), (1, 6), (6, 1), (1, 1)]
COUNTS = [1, 3, BLOCK, BLOCK + 1]


def decomposed(
    matrices: np.ndarray, row_map: np.ndarray, scale: np.ndarray
) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    count, fewer = len(matrices), min(len(row_map), len(scale))
    left, values = np.empty((count, len(row_map), fewer)), np.empty((count, fewer))
    right = np.empty((count, len(scale), len(scale)))
    decompose(matrices, row_map, scale, left, values, right)
    return left, values, right


def assert_decomposes(matrices: np.ndarray, row_map: np.ndarray, scale: np.ndarray) -> None:
    """Require orthonormal factors that give the matrices back, and LAPACK's singular values."""
    left, values, right = decomposed(matrices, row_map, scale)
    whole = (row_map @ matrices) * scale
    reference = np.linalg.svd(whole, compute_uv=False)
    largest = reference.max(axis=-1, initial=1e-300)[:, None]
    # 4 eps of the largest is what one-sided Jacobi promises; LAPACK itself is off by as much.
    assert (np.abs(values - reference) <= 8 * EPS * largest).all()
    fewer, columns = values.shape[1], whole.shape[2]
    turned = np.swapaxes(left, -1, -2) @ left
    np.testing.assert_allclose(turned, np.broadcast_to(np.eye(fewer), turned.shape), atol=1e-14)
    turned = np.swapaxes(right, -1, -2) @ right
    np.testing.assert_allclose(turned, np.broadcast_to(np.eye(columns), turned.shape), atol=1e-14)
    again = (left * values[:, None, :]) @ np.swapaxes(right[:, :, :fewer], -1, -2)
    assert (np.abs(again - whole) <= 16 * EPS * largest[:, None]).all()
    alone = np.empty_like(values)
    none_left, none_right = np.empty((0, *left.shape[1:])), np.empty((0, *right.shape[1:]))
    decompose(matrices, row_map, scale, none_left, alone, none_right)
    assert (np.abs(alone - reference) <= 8 * EPS * largest).all()


@pytest.mark.parametrize("count", COUNTS)
@pytest.mark.parametrize("shape", SHAPES)
def test_random_matrices(shape: tuple[int, int], count: int) -> None:
    random = np.random.default_rng(shape[0] * 100 + shape[1])
    rows, columns = shape
    matrices = random.normal(size=(count, 6, columns))
    row_map = np.eye(6)[:rows] + 0.3 * random.normal(size=(rows, 6))
    assert_decomposes(matrices, row_map, random.uniform(0.2, 3.0, columns))


@pytest.mark.parametrize("shape", [(6, 6), (6, 5), (6, 7), (3, 3)])
@pytest.mark.parametrize("lost", ["equal columns", "zero column", "zero row", "all zero"])
def test_matrices_of_lower_rank(shape: tuple[int, int], lost: str) -> None:
    random = np.random.default_rng(11)
    rows, columns = shape
    matrices = random.normal(size=(BLOCK + 5, 6, columns))
    if lost == "equal columns":
        matrices[:, :, 0] = -2.0 * matrices[:, :, 1]
    elif lost == "zero column":
        matrices[:, :, 0] = 0.0
    elif lost == "zero row":
        matrices[:, 0, :] = 0.0
    else:
        matrices[:] = 0.0
    assert_decomposes(matrices, np.eye(6)[:rows], np.ones(columns))


@pytest.mark.parametrize("smallest", [1e-3, 1e-6, 1e-9, 1e-12, 1e-15])
def test_a_small_singular_value_keeps_its_vectors(smallest: float) -> None:
    """Built from known factors, so that the exact answer is known without a reference."""
    random = np.random.default_rng(5)
    exact_left = np.linalg.qr(random.normal(size=(6, 6)))[0]
    exact_right = np.linalg.qr(random.normal(size=(6, 6)))[0]
    exact = np.array([1.0, 0.8, 0.5, 0.3, 0.2, smallest])
    left, values, right = decomposed(
        ((exact_left * exact) @ exact_right.T)[None], np.eye(6), np.ones(6)
    )
    assert abs(values[0, -1] - smallest) <= 4 * EPS
    # The vector of the smallest value turns by at most rounding over the gap to the next.
    assert abs(abs(left[0, :, -1] @ exact_left[:, -1]) - 1.0) < 1e-14
    assert abs(abs(right[0, :, -1] @ exact_right[:, -1]) - 1.0) < 1e-14


def test_neighbours_in_a_block_do_not_matter() -> None:
    random = np.random.default_rng(9)
    matrices = random.normal(size=(BLOCK, 6, 6))
    matrices[1] = 0.0
    matrices[2] *= 1e9
    together = decomposed(matrices, np.eye(6), np.ones(6))[1]
    for place in (0, 1, 2, BLOCK - 1):
        alone = decomposed(matrices[place : place + 1].copy(), np.eye(6), np.ones(6))[1][0]
        np.testing.assert_allclose(alone, together[place], rtol=8 * EPS, atol=1e-14)


def test_no_matrices() -> None:
    assert decomposed(np.empty((0, 6, 6)), np.eye(6), np.ones(6))[1].shape == (0, 6)
