"""Sine and cosine of a block against mpmath, at the places where argument reduction fails first."""

import math

import mpmath
import numpy as np
import pytest

from kinematics.kernels.sine_cosine import COSINE_TERMS, SINE_TERMS, sine_cosine
from kinematics.kernels.workspace import BLOCK, COSINE, SINE, SIZE

# One ulp of a number below 1 is 1.1e-16; the offset's angle sum adds two roundings.
TOLERANCE = 2.3e-16


def both(angles: np.ndarray, offset: float = 0.0) -> tuple[np.ndarray, np.ndarray]:
    """Return cosine and sine of up to one block of angles."""
    work = np.zeros(SIZE)
    work[COSINE : COSINE + len(angles)] = angles
    largest = float(np.abs(angles).max())
    sine_cosine(work, len(angles), largest, math.cos(offset), math.sin(offset))
    return work[COSINE : COSINE + len(angles)], work[SINE : SINE + len(angles)]


def exact(angles: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return cosine and sine at 60 digits, rounded once (mpmath)."""
    with mpmath.workdps(60):
        cosines = [float(mpmath.cos(mpmath.mpf(float(angle)))) for angle in angles]
        sines = [float(mpmath.sin(mpmath.mpf(float(angle)))) for angle in angles]
    return np.array(cosines), np.array(sines)


def close_to_quarter_turns() -> np.ndarray:
    """Return doubles next to multiples of a quarter turn: there the reduction cancels most."""
    quarters = np.array([1, 2, 3, 4, 7, 100, 6366, 25_000, 600_000]) * (np.pi / 2)
    beside = [quarters, np.nextafter(quarters, 0.0), np.nextafter(quarters, np.inf)]
    return np.concatenate([*beside, -quarters])


@pytest.mark.parametrize(
    "angles",
    [
        np.linspace(-4.0, 4.0, BLOCK),
        np.random.default_rng(3).uniform(-1e4, 1e4, BLOCK),
        np.random.default_rng(4).uniform(-9e5, 9e5, BLOCK),
        np.array([0.0, 1e-300, 1e-9, np.pi / 4, -np.pi / 4, 1e6]),
        close_to_quarter_turns(),
        np.array([1e6, 1e7, 1e9, -1e9, 0.5]),  # beyond the reduction: the C library's
    ],
    ids=["two turns", "1e4", "9e5", "special", "quarter turns", "huge"],
)
def test_against_sixty_digits(angles: np.ndarray) -> None:
    cosines, sines = both(angles)
    exact_cosines, exact_sines = exact(angles)
    np.testing.assert_allclose(cosines, exact_cosines, rtol=0, atol=TOLERANCE)
    np.testing.assert_allclose(sines, exact_sines, rtol=0, atol=TOLERANCE)


def test_an_offset_is_not_rounded_against_a_large_angle() -> None:
    offset, angle = 0.1, 123_456.789
    cosines, sines = both(np.array([angle]), offset)
    with mpmath.workdps(60):
        total = mpmath.mpf(angle) + mpmath.mpf(offset)
        exactly = float(mpmath.cos(total)), float(mpmath.sin(total))
    # angle + offset in doubles is off by up to 7e-12, which a rounded sum would show.
    np.testing.assert_allclose([cosines[0], sines[0]], exactly, rtol=0, atol=2 * TOLERANCE)


def test_only_the_block_s_own_part_is_touched() -> None:
    work = np.full(SIZE, 7.0)
    sine_cosine(work, 3, 1.0, 1.0, 0.0)
    untouched = np.ones(SIZE, dtype=bool)
    untouched[COSINE : COSINE + 3] = untouched[SINE : SINE + 3] = False
    assert (work[untouched] == 7.0).all()


def test_the_polynomials_meet_sine_and_cosine_at_the_chebyshev_points() -> None:
    """Interpolation at Chebyshev points, worked out with 60 digits (mpmath)."""
    with mpmath.workdps(60):
        top = (mpmath.pi / 4) ** 2 * mpmath.mpf("1.0001")
        count = len(SINE_TERMS)
        places = [
            top / 2 * (1 + mpmath.cos((2 * k + 1) * mpmath.pi / (2 * count))) for k in range(count)
        ]
        powers = mpmath.matrix([[z**k for k in range(count)] for z in places])
        of_sine = [(mpmath.sin(mpmath.sqrt(z)) / mpmath.sqrt(z) - 1) / z for z in places]
        of_cosine = [(mpmath.cos(mpmath.sqrt(z)) - 1 + z / 2) / z**2 for z in places]
        sine, cosine = (
            [float(term) for term in mpmath.lu_solve(powers, mpmath.matrix(values))]
            for values in (of_sine, of_cosine)
        )
    assert sine == list(SINE_TERMS)
    assert cosine == list(COSINE_TERMS)
