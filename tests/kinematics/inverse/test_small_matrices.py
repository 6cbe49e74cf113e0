"""Reflections and elimination in compiled code, against numpy."""

import numpy as np

from kinematics.inverse.small_matrices import reflect_columns, solve_rows
from tests.kinematics.inverse.seeds import fresh


def test_below_the_triangle_stands_what_is_orthogonal_to_the_columns() -> None:
    matrix = fresh().normal(size=(14, 8))
    table, order = np.hstack([matrix, np.eye(14)]), np.empty(8, np.int64)
    told = reflect_columns(table, 14, 8, 8, 22, order, np.empty(22))
    turned = table[:, 8:]
    np.testing.assert_allclose(turned @ turned.T, np.eye(14), atol=1e-13)
    np.testing.assert_allclose(turned[8:] @ matrix, 0.0, atol=1e-13)
    np.testing.assert_allclose(turned[:8] @ matrix[:, order], table[:8, :8], atol=1e-13)
    assert np.abs(np.tril(table[:8, :8], -1)).max() == 0.0
    values = np.linalg.svd(matrix, compute_uv=False)
    # The last diagonal entry is no further from the smallest singular value than this, as a rule.
    assert values[-1] / values[0] / 3 < told < 20 * values[-1] / values[0]


def test_columns_that_span_less_are_told() -> None:
    rng = fresh()
    table = rng.normal(size=(6, 3)) @ rng.normal(size=(3, 5))
    assert reflect_columns(table, 6, 5, 4, 5, np.empty(5, np.int64), np.empty(5)) < 1e-14
    assert reflect_columns(np.zeros((3, 2)), 3, 2, 2, 2, np.empty(2, np.int64), np.empty(2)) == 0.0


def test_rows_are_solved_and_singular_ones_told() -> None:
    rng = fresh()
    matrix, right = rng.normal(size=(8, 8)), rng.normal(size=(8, 3))
    table = np.hstack([matrix, right])
    assert 1e-4 < solve_rows(table, 8, 11) <= 1.0
    np.testing.assert_allclose(table[:, 8:], np.linalg.solve(matrix, right), rtol=1e-8)
    matrix[3] = matrix[1] + matrix[2]
    table = np.hstack([matrix, right])
    assert solve_rows(table, 8, 11) < 1e-14
    assert np.isfinite(table).all()
    assert solve_rows(table, 0, 3) == 1.0
