"""Volumes drawn, against a ball's shell, a box and a corner cut off by a combined travel."""

import numpy as np
import pytest

from kinematics.arm import Arm, CombinedTravel
from kinematics.envelope.draws import AskedVolume, between
from kinematics.envelope.measures import Measure
from kinematics.envelope.search import search_of
from kinematics.table import Travel
from tests.kinematics.example_arms import AT_FLANGE, QUARTER, arm_of, prismatic, revolute

SLIDES = (
    prismatic(alpha=-QUARTER, travel=Travel(0.0, 1.0)),
    prismatic(alpha=-QUARTER, theta=-QUARTER, travel=Travel(0.0, 0.5)),
    prismatic(travel=Travel(0.0, 0.8)),
)
KNOWN = {
    "box": (arm_of(*SLIDES), 0.4),
    # Two of the slides share 0.6 m: their square loses a corner of 0.9 x 0.9 / 2 less two of it.
    "cut box": (
        arm_of(*SLIDES, combined_travel=(CombinedTravel({1: 1.0, 2: 1.0}, Travel(0.0, 0.6)),)),
        0.8 * (0.5 * 0.6 * 0.6 - 0.5 * 0.1 * 0.1),
    ),
    "shell": (
        arm_of(
            revolute(alpha=-QUARTER),
            revolute(alpha=QUARTER, travel=Travel(0.0, np.pi)),
            prismatic(travel=Travel(0.3, 0.9)),
        ),
        4.0 / 3.0 * np.pi * (0.9**3 - 0.3**3),
    ),
}


@pytest.mark.parametrize("case", KNOWN)
@pytest.mark.parametrize("count", [1000, 4000, 6000, 30_000])  # two usual ones, one slab, several
def test_volumes_are_within_their_bounds(case: str, count: int) -> None:
    arm, expected = KNOWN[case]
    found = drawn(arm, count)
    assert abs(found.value - expected) <= found.error_bound < 0.3 * expected


def drawn(arm: Arm, count: int) -> Measure:
    search = search_of(arm, AT_FLANGE)
    view, seeker = search.along(np.eye(3))
    asked = AskedVolume(seeker, search.samples(view), count)
    return asked.told([asked.piece(number) for number in range(asked.pieces)])


def test_more_places_tell_more_and_the_same_each_time() -> None:
    arm, _ = KNOWN["box"]
    assert drawn(arm, 4000).error_bound < 0.8 * drawn(arm, 1000).error_bound
    assert drawn(arm, 1000) == drawn(arm, 1000)


def test_what_contradicts_leaves_what_was_drawn() -> None:
    assert between(Measure(3.0, 1.0), 5.0, 6.0) == (3.0, 1.0)
