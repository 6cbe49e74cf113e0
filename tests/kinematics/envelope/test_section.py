"""Sections read off whole arms: published volumes, and samples that must lie within."""

import numpy as np
import pytest

from kinematics.envelope.section import section_of
from kinematics.reach.sample_summary import first_axis
from kinematics.reach.samples import JointSamples, tool_positions
from kinematics.table import Coupling, Travel
from tests.kinematics.example_arms import arm_of, prismatic, revolute

HALF = np.pi / 2
WIDE = Travel(-np.pi, np.pi)
PUBLISHED = {
    "rch-21": (
        arm_of(
            revolute(alpha=-HALF, travel=WIDE),
            revolute(alpha=HALF, travel=Travel(0.0, np.pi)),
            prismatic(travel=Travel(0.3, 0.9)),
        ),
        4.0 / 3.0 * np.pi * (0.9**3 - 0.3**3),
    ),
    "rch-22": (
        arm_of(
            revolute(alpha=-HALF, travel=Travel(-1.2, 0.8)),
            revolute(alpha=HALF, travel=Travel(0.4, 1.7)),
            prismatic(travel=Travel(0.3, 0.9)),
        ),
        2.0 * (np.cos(0.4) - np.cos(1.7)) * (0.9**3 - 0.3**3) / 3.0,
    ),
    "rch-25": (
        arm_of(
            revolute(d=0.3, travel=Travel(-2.5, 2.5)),
            prismatic(alpha=-HALF, travel=Travel(0.0, 0.5)),
            prismatic(travel=Travel(0.2, 0.7)),
        ),
        5.0 / 2.0 * (0.7**2 - 0.2**2) * 0.5,
    ),
    "rch-26": (
        arm_of(revolute(alpha=HALF), revolute(a=0.5), revolute(a=0.37)),
        4.0 / 3.0 * np.pi * (0.87**3 - 0.13**3),
    ),
}


@pytest.mark.parametrize("case", PUBLISHED)
def test_published_volumes(case: str) -> None:
    arm, expected = PUBLISHED[case]
    section = section_of(arm, np.eye(4))
    assert section is not None
    volume = section.volume
    assert volume is not None
    assert abs(volume.value - expected) <= volume.error_bound <= 1e-9 * expected


def test_samples_lie_within_the_section() -> None:
    arm = arm_of(
        revolute(a=0.15, alpha=HALF, d=0.4),
        revolute(a=0.5, travel=Travel(-0.4, 1.9)),
        revolute(a=0.42, travel=Travel(-2.4, 1.1)),
    )
    section = section_of(arm, np.eye(4))
    axis = first_axis(arm)
    assert section is not None
    assert axis is not None
    places = axis.radius_and_height(tool_positions(JointSamples(arm, 300, 8), np.eye(4), 0, 300))
    found = section.region.stretches(places[:, 1])
    for (radius, _), ends, counts in zip(places, found.places, found.counts, strict=True):
        inside = [
            low - 1e-9 <= side * radius <= high + 1e-9
            for low, high, count in zip(ends, ends[1:], counts, strict=False)
            if count > 0
            for side in (1.0, -1.0)
        ]
        assert any(inside)


def test_a_plane_beside_the_axis_makes_radii_hypotenuses() -> None:
    """The same volume as without the distance: where it is greater, the section is narrower."""
    aside = arm_of(revolute(alpha=HALF), revolute(a=0.5, d=0.1), revolute(a=0.37))
    section = section_of(aside, np.eye(4))
    assert section is not None
    assert abs(section.aside - 0.1) < 1e-15
    assert section.volume is not None
    assert abs(section.volume.value - PUBLISHED["rch-26"][1]) <= 1e-9
    # Half a ring with each place moved out: the integral of x / sqrt(x^2 + 0.01) over it.
    x = (np.arange(4000) + 0.5) / 4000 * 0.87
    inner = np.sqrt(np.maximum(0.13**2 - x**2, 0.0))
    tall = 2.0 * (np.sqrt(0.87**2 - x**2) - inner)
    expected = (x / np.hypot(x, 0.1) * tall).sum() * 0.87 / 4000
    assert abs(section.area.value - expected) < 1e-4


def test_what_more_joints_make_has_no_such_section() -> None:
    tool = np.eye(4)
    tool[0, 3] = 0.1
    assert section_of(arm_of(*[revolute(a=0.3, alpha=0.4)] * 4), tool) is None
    bent = arm_of(revolute(alpha=HALF), revolute(a=0.5, alpha=0.3), revolute(a=0.37))
    assert section_of(bent, np.eye(4)) is None


def test_a_linkage_that_folds_off_level_lines_is_no_pair() -> None:
    """A third link turned by half of the first joint: its folds are no level lines."""
    third = revolute(a=0.3, passive=True, couplings=(Coupling(2, 0.5),))
    arm = arm_of(revolute(alpha=HALF), revolute(a=0.5), revolute(a=0.37), third)
    assert section_of(arm, np.eye(4)) is None
