"""Plane mechanisms against their own motions multiplied out, and against dense sampling."""

from itertools import product

import numpy as np
import pytest

from kinematics.inverse.planar import MOST, degenerate, three_joints
from kinematics.inverse.tolerances import NEARLY_FREE
from tests.kinematics.inverse.seeds import fresh

# Slides and turns of unit size; lines that cross at a small angle lose the digits of its sine.
ROUNDING = 1e-11
KINDS = [kinds for kinds in product([False, True], repeat=3) if not all(kinds)]


def moved(slides: np.ndarray, places: np.ndarray, motions: np.ndarray, point: complex) -> complex:
    """Return where a plane mechanism brings a point, joint by joint from the last one."""
    for slide, place, motion in reversed(list(zip(slides, places, motions, strict=True))):
        turned = place + np.exp(1j * motion) * (point - place)
        point = point + motion * place if slide else turned
    return point


def places_of(random: np.random.Generator, slides: np.ndarray) -> np.ndarray:
    directions = np.exp(1j * random.uniform(-np.pi, np.pi, 3))
    return np.where(slides, directions, random.normal(size=3) + 1j * random.normal(size=3))


def solved(
    slides: np.ndarray, places: np.ndarray, turn: float, shift: complex, samples: int = 0
) -> tuple[np.ndarray, float, bool]:
    found = np.full((MOST, 3), np.nan)
    around = np.linspace(-np.pi, np.pi, samples, endpoint=False)
    count, short, free = three_joints(slides, places, turn, shift, 0.0, around, found)
    return found[:count], short, free


@pytest.mark.parametrize("kinds", KINDS)
def test_all_ways_lead_there_and_the_given_one_is_among_them(kinds: tuple[bool, ...]) -> None:
    random, slides = fresh(), np.array(kinds)
    for _ in range(100):
        places, motions = places_of(random, slides), random.uniform(-3.0, 3.0, 3)
        turn, shift = motions[~slides].sum(), moved(slides, places, motions, 0j)
        found, short, free = solved(slides, places, turn, shift)
        assert short < ROUNDING
        assert not free
        for way in found:
            for point in (0j, 1.0 + 0j):
                wanted = moved(slides, places, motions, point)
                assert abs(moved(slides, places, way, point) - wanted) < ROUNDING
        off = np.where(slides, found - motions, (found - motions + np.pi) % (2 * np.pi) - np.pi)
        # At a fold a way is good to the root of rounding.
        assert np.abs(off).max(axis=1).min() < 1e-6


@pytest.mark.parametrize("kinds", [kinds for kinds in KINDS if sum(kinds) < 2])
def test_out_of_reach_the_shortfall_is_the_distance_and_the_ways_are_nearest(
    kinds: tuple[bool, ...],
) -> None:
    random, slides = fresh(), np.array(kinds)
    missed = 0
    for _ in range(100):
        places, turn = places_of(random, slides), float(random.uniform(-3.0, 3.0))
        shift = complex(*random.normal(scale=random.choice([0.5, 3.0]), size=2))
        found, short, _ = solved(slides, places, turn, shift)
        for way in found:
            wanted, there = shift, moved(slides, places, way, 0j)
            assert way[~slides].sum() == pytest.approx(turn, abs=ROUNDING) or short == 0.0
            assert abs(there - wanted) == pytest.approx(short, abs=ROUNDING)
        missed += short > 0.0
        # Nothing found by trying is nearer: the turns add up, the rest is free.
        tried = random.uniform(-4.0, 4.0, size=(200, 3))
        last = int(np.flatnonzero(~slides)[-1])
        others = ~slides & (np.arange(3) != last)
        tried[:, last] = turn - tried[:, others].sum(axis=1)
        nearest = min(abs(moved(slides, places, motions, 0j) - shift) for motions in tried)
        assert nearest > short - ROUNDING
    assert missed


def test_links_stretched_and_folded_have_one_way() -> None:
    places = np.array([0.0, 0.5, 0.75], dtype=complex)
    for reach in (0.75, 0.25):
        goal = reach * np.exp(0.3j)
        found, short, _ = solved(np.zeros(3, bool), places, 0.0, goal - 0.75)
        assert short < 1e-15
        assert np.abs(found[0] - found[1]).max() % (2 * np.pi) == pytest.approx(0.0, abs=1e-7)


def test_a_hair_beyond_reach_falls_short_by_the_hair() -> None:
    places = np.array([0.0, 0.5, 0.75], dtype=complex)
    found, short, _ = solved(np.zeros(3, bool), places, 0.0, 0.75 + 1e-9 - 0.75)
    assert short == pytest.approx(1e-9, rel=1e-6)
    assert len(found) == 2


@pytest.mark.parametrize("off", [0.0, 1e-12, 0.9 * NEARLY_FREE])
def test_a_point_on_the_first_axis_leaves_it_free(off: float) -> None:
    """Two links of one length, folded; and a slide through the first axis."""
    folded = np.zeros(3, bool), np.array([0.0, 0.5, 1.0], dtype=complex)
    through = np.array([False, True, False]), np.array([0.0, 1.0, 0.5], dtype=complex)
    for slides, places in (folded, through):
        found, short, free = solved(slides, places, 0.0, off - places[2], samples=12)
        assert free
        assert short == 0.0
        assert len(found) == 14
        assert np.unique(found[2:, 0].round(6)).size == 12
        for way in found:
            assert abs(moved(slides, places, way, places[2]) - off) <= 2.0 * off + 1e-15


def test_lines_along_each_other_are_free_or_miss() -> None:
    slides, places = np.array([True, False, True]), np.array([1.0, 0.3, 1.0], dtype=complex)
    assert solved(slides, places, 0.0, 0.7)[1:] == (0.0, True)
    assert solved(slides, places, 0.0, 0.7 + 0.2j)[1:] == (pytest.approx(0.2), True)


def test_mechanisms_with_a_freedom_for_every_target_are_told() -> None:
    one_point = np.array([0.0, 1.0, 1.0], dtype=complex)
    assert degenerate(np.zeros(3, bool), one_point, 1e-9)
    assert not degenerate(np.zeros(3, bool), np.array([0.0, 1.0, 2.0], dtype=complex), 1e-9)
    one_way = np.array([1.0, -1.0, 0.0], dtype=complex)
    assert degenerate(np.array([True, True, False]), one_way, 1e-9)
    assert not degenerate(np.array([True, False, True]), one_way, 1e-9)
    assert degenerate(np.ones(3, bool), np.array([1.0, 1j, 1.0]), 1e-9)
