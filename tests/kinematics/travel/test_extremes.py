"""Extremes between postures of a track, against cubics by scipy at many places."""

import numpy as np
import pytest
from scipy.interpolate import CubicHermiteSpline

from kinematics.travel.extremes import Bounds, largest_rates, least_room
from kinematics.travel.tracking import Track
from tests.kinematics.inverse.seeds import fresh

PLACES = np.linspace(0.0, 1.0, 40_001)


def random_track(random: np.random.Generator, count: int, joints: int) -> Track:
    shares = np.concatenate([[0.0], np.sort(random.uniform(size=count - 2)), [1.0]])
    values = np.cumsum(random.normal(scale=0.2, size=(count, joints)), axis=0)
    return Track(shares, values, random.normal(size=(count, joints)), np.zeros((count, 2)))


def test_room_and_rates_between_postures() -> None:
    random = fresh()
    for _ in range(20):
        track = random_track(random, int(random.integers(2, 9)), 3)
        spline = CubicHermiteSpline(track.shares, track.values, track.rates)
        weights = np.array([[1.0, 0, 0], [0, 1, 0], [0, -1, 2.0], [0, 0, 1.0]])
        most = random.uniform(1.0, 3.0, size=4)
        bounds = Bounds(weights, np.full(4, 0.1), -most, most, np.array([False] * 3 + [True]))
        smallest, of = np.empty(2), np.empty(1, np.int64)
        least_room(bounds, track, len(track.shares), smallest, of)
        sums = spline(PLACES) @ weights[:3].T + 0.1
        room = (most[:3] - np.abs(sums)) / (2.0 * most[:3])
        # Places may step over the bottom of a narrow step; what is found is on the curve.
        assert smallest[0] <= room.min() + 1e-12
        limit = int(of[0])
        there = float(spline(smallest[1]) @ weights[limit] + 0.1)
        assert smallest[0] == pytest.approx((most[limit] - abs(there)) / (2.0 * most[limit]))
        largest, where = np.empty(3), np.empty(3)
        largest_rates(track, len(track.shares), largest, where)
        rates = np.abs(spline(PLACES, 1))
        # Places may step over the top of a narrow step; what is found is on the curve.
        assert (largest >= rates.max(axis=0) * (1.0 - 1e-12)).all()
        assert np.abs(spline(where, 1)).diagonal() == pytest.approx(largest, rel=1e-9)


def test_one_posture_alone_and_no_limits() -> None:
    track = Track(np.zeros(1), np.array([[0.5]]), np.array([[-2.0]]), np.zeros((1, 2)))
    one, none = np.ones(1), np.empty(0)
    smallest, of = np.empty(2), np.empty(1, np.int64)
    bounds = Bounds(np.eye(1), np.zeros(1), -one, one, np.array([False]))
    least_room(bounds, track, 1, smallest, of)
    assert (smallest[0], of[0]) == (0.25, 0)
    unbounded = Bounds(np.empty((0, 1)), none, none, none, np.empty(0, bool))
    least_room(unbounded, track, 1, smallest, of)
    assert of[0] == -1
    largest, where = np.empty(1), np.empty(1)
    largest_rates(track, 1, largest, where)
    assert (largest[0], where[0]) == (2.0, 0.0)


def test_an_even_rate_is_largest_where_it_begins() -> None:
    shares = np.linspace(0.0, 1.0, 5)
    values = 0.3 * shares[:, None] * (1.0 + 1e-15)
    track = Track(shares, values, np.full((5, 1), 0.3), np.zeros((5, 2)))
    largest, where = np.empty(1), np.empty(1)
    largest_rates(track, 5, largest, where)
    assert (largest[0], where[0]) == (pytest.approx(0.3), 0.0)
