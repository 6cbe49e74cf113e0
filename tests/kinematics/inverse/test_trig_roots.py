"""Roots of sums of squares against those of polynomials and 40 digits, and made double roots."""

from functools import partial

import mpmath
import numpy as np
import pytest

from kinematics.inverse.trig_roots import (
    AMPLITUDE,
    CONSTANT,
    COSINE,
    MOST_ROOTS_FOUND,
    SINE,
    SLACK,
    TERMS,
    WEIGHT,
    linear_roots,
    roots_of_squares,
)
from tests.kinematics.inverse.seeds import fresh

FEW = 3000
NO_SLACK = 1e-15


def roots(squares: np.ndarray) -> np.ndarray:
    found = np.zeros(MOST_ROOTS_FOUND)
    count = roots_of_squares(squares, found)
    return np.sort(found[:count])


def by_polynomial(squares: np.ndarray) -> np.ndarray:
    """Return the roots by the eigenvalues of a polynomial in exp(i c), to some 1e-9."""
    total = np.zeros(5, dtype=complex)
    for weight, constant, cosine, sine in squares[:, WEIGHT : SINE + 1]:
        term = np.array([0.5 * (cosine - 1j * sine), constant, 0.5 * (cosine + 1j * sine)])
        total += weight * np.convolve(term, term)
    found = np.roots(total)
    return np.sort(np.angle(found[np.abs(np.abs(found) - 1.0) < 1e-7]))


def drawn(random: np.random.Generator) -> np.ndarray:
    squares = random.normal(size=(TERMS, AMPLITUDE + 1))
    squares[:, WEIGHT] = np.abs(squares[:, WEIGHT]) * [1.0, 1.0, -1.0, -1.0]
    squares[:, SLACK] = NO_SLACK
    return squares


def test_all_roots_are_those_of_the_polynomial() -> None:
    seed = np.random.SeedSequence().entropy
    random = fresh()
    counts = np.zeros(5, int)
    for _ in range(FEW):
        squares = drawn(random)
        expected, got = by_polynomial(squares), roots(squares)
        assert len(got) == len(expected), seed
        assert np.abs(got - expected).max(initial=0.0) < 1e-6, seed
        counts[len(got)] += 1
    assert (counts[[0, 2, 4]] > FEW / 50).all()


def in_forty_digits(squares: np.ndarray, angle: mpmath.mpf) -> mpmath.mpf:
    total = mpmath.mpf(0)
    for row in squares:
        weight, constant, cosine, sine = (mpmath.mpf(float(value)) for value in row[: SINE + 1])
        term = constant + cosine * mpmath.cos(angle) + sine * mpmath.sin(angle)
        total += weight * term**2
    return total


def test_roots_are_good_to_the_last_digits() -> None:
    random = np.random.default_rng(7)
    with mpmath.workdps(40):
        tried = 0
        while tried < 20:
            squares = drawn(random)
            for root in roots(squares):
                better = mpmath.findroot(partial(in_forty_digits, squares), root)
                slope = abs(mpmath.diff(partial(in_forty_digits, squares), better))
                assert abs(better - root) < 1e-15 * (1.0 + 40.0 / slope)
                tried += 1


@pytest.mark.parametrize("apart", [1e-3, 1e-5, 1e-7, 1e-9])
def test_both_of_two_close_roots_survive(apart: float) -> None:
    """(c - a)(c - b), as |e^ic - e^im|^2 = (2 sin(apart / 2))^2 about the middle m of a and b."""
    random = np.random.default_rng(3)
    for _ in range(500):
        middle = random.uniform(-np.pi, np.pi)
        squares = np.zeros((TERMS, AMPLITUDE + 1))
        squares[:, SLACK] = NO_SLACK
        squares[0, [WEIGHT, CONSTANT, COSINE]] = 1.0, -np.cos(middle), 1.0
        squares[1, [WEIGHT, CONSTANT, SINE]] = 1.0, -np.sin(middle), 1.0
        squares[2, [WEIGHT, CONSTANT]] = -1.0, 2.0 * np.sin(0.25 * apart)
        got = roots(squares)
        off = np.sort((got - middle + np.pi) % (2.0 * np.pi) - np.pi)
        wanted = np.array([-0.5, 0.5]) * apart
        # The terms are small together, so that the roots keep their digits: 1e-16 of the terms.
        assert np.abs(off[[0, -1]] - wanted).max() < 1e-15 + 1e-9 * apart


def test_an_extremum_that_just_misses_gives_both_roots_it_stands_for() -> None:
    """sin^2 (c - 1) + 1e-10, which a second term off by 1e-5 may bring to 0 at 1 and at 1 - pi."""
    squares = np.zeros((TERMS, AMPLITUDE + 1))
    squares[0, [WEIGHT, COSINE, SINE]] = 1.0, -np.sin(1.0), np.cos(1.0)
    squares[1, [WEIGHT, CONSTANT, SLACK]] = 1.0, 1e-5, 1e-5
    wanted = 1.0 + np.array([-1e-5, 1e-5])
    assert np.abs(roots(squares) - [*wanted - np.pi, *wanted]).max() < 1e-12
    squares[1, SLACK] = 1e-9
    assert len(roots(squares)) == 0


def test_weights_of_very_different_size() -> None:
    """cos^2 c = u^2 (1 - sin^2 c / 4): near 90 degrees by u, for u down to the rounding."""
    for u in (1e-3, 1e-6, 1e-9, 1e-12):
        squares = np.zeros((TERMS, AMPLITUDE + 1))
        squares[0, [WEIGHT, COSINE]] = 1.0, 1.0
        squares[1, [WEIGHT, CONSTANT]] = -u * u, 1.0
        squares[2, [WEIGHT, SINE]] = u * u, 0.5
        got = roots(squares)
        assert len(got) == 4
        exact = np.arccos(np.sqrt(0.75 * u * u / (1.0 - 0.25 * u * u)))
        wanted = np.sort([exact, -exact, np.pi - exact, exact - np.pi])
        assert np.abs(got - wanted).max() < 1e-15


def test_what_vanishes_everywhere_comes_to_an_end() -> None:
    assert len(roots(np.zeros((TERMS, AMPLITUDE + 1)))) <= MOST_ROOTS_FOUND


@pytest.mark.parametrize(
    ("constant", "expected"), [(-1.0, 0.0), (0.0, np.pi / 2), (1.0, np.pi), (-0.6, np.arccos(0.6))]
)
def test_linear_roots_stand_to_both_sides_of_the_extremum(constant: float, expected: float) -> None:
    found = np.zeros(3)
    for phase in np.linspace(-3.0, 3.0, 7):
        count = linear_roots(constant, np.cos(phase), np.sin(phase), 1e-9, found)
        off = np.abs((found[:2] - phase + np.pi) % (2.0 * np.pi) - np.pi)
        # At the extremum a root is known to half of the digits.
        assert off == pytest.approx(expected, abs=3e-8 if abs(constant) == 1.0 else 1e-15)
        assert count == (3 if abs(constant) == 1.0 else 2)
        if count == 3:
            turn = (found[2] - phase - expected) / (2.0 * np.pi)
            assert turn == pytest.approx(round(turn), abs=1e-15)


def test_linear_roots_beyond_the_extremum() -> None:
    found = np.zeros(3)
    assert linear_roots(1.0 + 1e-8, 1.0, 0.0, 1e-9, found) == 0
    assert linear_roots(1.0 + 1e-8, 1.0, 0.0, 1e-7, found) == 2
    assert np.abs(found[:2]) == pytest.approx(np.pi - np.sqrt(2e-8), rel=1e-8)
    assert linear_roots(1.0 + 1e-16, 1.0, 0.0, 1e-9, found) == 3
    assert np.cos(found) == pytest.approx(-1.0, abs=1e-15)
    assert linear_roots(0.0, 0.0, 0.0, 1e-9, found) == 0
