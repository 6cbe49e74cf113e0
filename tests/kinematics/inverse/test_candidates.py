"""Candidates brought down: each solution once, and what is nearest where there is none."""

import numpy as np

from kinematics.inverse.candidates import (
    found_of,
    in_metres,
    land_candidates,
    nearest_motions,
)
from kinematics.inverse.screws import screws_of
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.inverse.six_rows import drawn_motions, targets_of
from tests.kinematics.inverse.triple_arms import _rows, arm_of


def test_what_lands_is_told_once_and_what_is_far_is_not() -> None:
    random = fresh()
    screws = screws_of(arm_of(_rows(random), "RRPRRR"), np.eye(4))
    motions = drawn_motions(random, screws, 20)
    scaled = np.ascontiguousarray(screws.scaled(targets_of(screws, motions)))
    own = motions / np.where(screws.prismatic, screws.length, 1.0)
    tried = np.repeat(own, 3, axis=0)
    tried[1::3] += random.uniform(-1e-6, 1e-6, (20, 6))
    tried[2::3] += 1.0
    landed = land_candidates(screws, scaled, tried, np.repeat(np.arange(20), 3))
    assert landed.kept.reshape(20, 3)[:, :2].sum(axis=1).tolist() == [1] * 20
    found = found_of(screws, landed, np.zeros(20, bool))
    assert found.position_error.max() < 1e-12
    first = np.searchsorted(found.target, np.arange(20))
    np.testing.assert_allclose(found.motions[first], motions, atol=1e-6)


def test_nearest_motions_meet_what_can_be_met() -> None:
    random = fresh()
    screws = screws_of(arm_of(_rows(random)), np.eye(4))
    targets = targets_of(screws, drawn_motions(random, screws, 5))
    nearest = in_metres(
        screws, nearest_motions(screws, np.ascontiguousarray(screws.scaled(targets)))
    )
    off = np.abs(targets_of(screws, nearest) - targets).max(axis=(1, 2))
    assert np.median(off) < 1e-6
