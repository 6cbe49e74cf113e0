"""Tracks: how following ends, and postures between those that were kept."""

import numpy as np
import pytest
from scipy.interpolate import CubicHermiteSpline

from kinematics.chain import tool_in_base
from kinematics.travel.lines import StraightLine
from kinematics.travel.on_line import bench_for
from kinematics.travel.straight import OnLines
from kinematics.travel.tracking import (
    ARRIVED,
    ENDLESS,
    NOT_THERE,
    OUTSIDE,
    STALLED,
    Track,
    cubic,
    follow,
    postures_at,
    room_for,
)
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.travel.bounded import FLANGE, along, offset_arm

START = np.array([0.4, 0.9, -0.9, 0.5, 0.8, -0.3])
LINES = OnLines(offset_arm(), FLANGE)


def followed(way: StraightLine, start: np.ndarray, room: int = 500) -> tuple[Track, int, float]:
    line, track, outcome = LINES.line_for(way), room_for(room, 6), np.zeros(1)
    bench = bench_for(LINES.for_kernels, line)
    steps = (1e-10, 1e-7, 0.125)
    count = follow(LINES.for_kernels, line, bench, *steps, start.copy(), track, outcome)
    return track, count, float(outcome[0])


def way_of(*shift: float) -> StraightLine:
    return along(tool_in_base(LINES.arm, START, FLANGE), shift)


def test_it_arrives_in_steps_that_are_short_enough() -> None:
    track, count, outcome = followed(way_of(0.05, -0.1, 0.05), START)
    assert outcome == ARRIVED
    assert track.shares[count - 1] == 1.0
    assert np.abs(np.diff(track.values[:count], axis=0)).max() < 0.06
    assert (track.gaps[:count] < 1e-9).all()


def test_other_ends() -> None:
    _, count, outcome = followed(way_of(0.05, -0.1, 0.05), START, room=3)
    assert (count, outcome) == (3, ENDLESS)
    _, count, outcome = followed(way_of(0.05, -0.1, 0.05), START + 0.8)
    assert (count, outcome) == (0, NOT_THERE)
    _, _, outcome = followed(way_of(0.0, 0.0, 2.0), START)
    assert outcome == STALLED
    track, count, outcome = followed(way_of(-2.0, 0.0, 0.0), START)
    assert outcome == OUTSIDE
    upper = LINES.line_for(way_of(1.0, 0.0, 0.0)).upper
    assert (np.abs(track.values[: count - 1]) <= upper).all()
    assert (np.abs(track.values[count - 1]) > upper).any()


def test_postures_between_are_on_the_line_and_cubics_near_them() -> None:
    way = way_of(0.05, -0.1, 0.05)
    track, count, _ = followed(way, START)
    line, shares = LINES.line_for(way), np.sort(fresh().uniform(size=40))
    asked = np.concatenate([[0.0], shares, [track.shares[2], 1.0, 1.5]])
    asked.sort()
    found = room_for(len(asked), 6)
    bench = bench_for(LINES.for_kernels, line)
    postures_at(LINES.for_kernels, line, bench, track, count, asked, found)
    for share, posture in zip(asked, found.values, strict=True):
        tool = tool_in_base(LINES.arm, posture * LINES.scale, FLANGE)
        assert tool == pytest.approx(way.at(min(float(share), 1.0)), abs=1e-9)
    kept = list(asked).index(track.shares[2])
    assert (found.values[kept] == track.values[2]).all()
    spline = CubicHermiteSpline(track.shares[:count], track.values[:count], track.rates[:count])
    assert found.values[:-1] == pytest.approx(spline(asked[:-1]), abs=1e-5)
    q = np.empty(6)
    cubic(track, 1, float(track.shares[1:3].mean()), q)
    assert q == pytest.approx(spline(track.shares[1:3].mean()), abs=1e-12)
