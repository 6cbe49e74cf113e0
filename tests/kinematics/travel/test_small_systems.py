"""Small systems of equations against LAPACK: many equations, few, square, dependent ones damped."""

import numpy as np
import pytest

from kinematics.travel.small_systems import least_norm, least_squares, triangle
from tests.kinematics.inverse.seeds import fresh

SHAPES = [(1, 1), (3, 3), (6, 6), (6, 5), (7, 6), (9, 2), (12, 6)]


@pytest.mark.parametrize("shape", SHAPES)
def test_least_squares_and_least_norm_are_those_of_lapack(shape: tuple[int, int]) -> None:
    random = fresh()
    for _ in range(30):
        matrix, (p, q) = random.normal(size=shape), shape
        tall, diagonal = matrix.copy(), np.empty(q)
        sign = triangle(tall, diagonal)
        if p == q:
            assert sign == np.sign(np.linalg.det(matrix))
        many, few = random.normal(size=p), random.normal(size=q)
        met, shortest = np.empty(q), np.empty(p)
        least_squares(tall, diagonal, many.copy(), met)
        least_norm(tall, diagonal, few, shortest)
        condition = np.linalg.cond(matrix)
        expected = np.linalg.lstsq(matrix, many, rcond=None)[0]
        assert np.abs(met - expected).max() < 1e-13 * condition**2
        expected = np.linalg.lstsq(matrix.T, few, rcond=None)[0]
        assert np.abs(shortest - expected).max() < 1e-13 * condition**2


def test_a_column_of_zeros_and_one_already_reduced() -> None:
    """Nothing is divided by zero, and a reflection that turns nothing changes no sign."""
    tall, diagonal, met = np.array([[2.0, 1.0], [0.0, -3.0]]), np.empty(2), np.empty(2)
    assert triangle(tall, diagonal) == -1.0
    least_squares(tall, diagonal, np.array([4.0, 3.0]), met)
    assert met == pytest.approx([2.5, -1.0])
    nothing = np.zeros((3, 2))
    assert abs(triangle(nothing, diagonal)) == 1.0
    assert np.isfinite(nothing).all()
