"""Sixteen eigenvalues of equations of first and second degree, with none made up."""

import numpy as np
import pytest

from kinematics.inverse.elimination_companion import DOUBLED, ROOTS, write_companion
from tests.kinematics.inverse.seeds import fresh


@pytest.mark.parametrize("still", [0, 1, 2])
def test_at_each_eigenvalue_the_equations_have_a_solution(still: int) -> None:
    rng = fresh()
    lines, squares = 8 - 4 * still, 4 + 2 * still
    n = lines + squares
    forms = np.zeros((5, DOUBLED, DOUBLED))
    forms[:2, :lines, :n] = rng.normal(size=(2, lines, n))
    forms[2:, :squares, :n] = rng.normal(size=(3, squares, n))
    given, companion = forms.copy(), np.empty((ROOTS, ROOTS))
    work = np.empty((DOUBLED, 48)), np.empty(16, np.int64), np.empty(48)
    worst = write_companion(still, forms, work[0], companion, work[1], work[2])
    assert 0.0 < worst <= 1.0
    roots = np.linalg.eigvals(companion)
    assert len(roots) == ROOTS
    for x in roots:
        of_first = given[0, :lines, :n] + x * given[1, :lines, :n]
        of_second = given[2, :squares, :n] + x * given[3, :squares, :n]
        of_second = of_second + x * x * given[4, :squares, :n]
        values = np.linalg.svd(np.vstack([of_first, of_second]), compute_uv=False)
        assert values[-1] < 1e-8 * values[0] / worst


def test_equations_that_cannot_be_divided_are_told() -> None:
    forms, companion = np.zeros((5, DOUBLED, DOUBLED)), np.empty((ROOTS, ROOTS))
    work = np.empty((DOUBLED, 48)), np.empty(16, np.int64), np.empty(48)
    assert write_companion(0, forms, work[0], companion, work[1], work[2]) < 1e-12
    assert np.isfinite(companion).all()
