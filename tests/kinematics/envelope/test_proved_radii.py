"""Radii proved: never passed by any posture, near the best where it is known, else honest."""

import numpy as np
import pytest
from scipy.optimize import minimize

from kinematics.arm import Arm, CombinedTravel
from kinematics.envelope.level_links import LevelLinks
from kinematics.envelope.pair_of_arm import point_motion
from kinematics.envelope.proved_radii import ProvedRadii, proved_radii
from kinematics.reach.sample_summary import first_axis
from kinematics.reach.samples import JointSamples, tool_positions
from kinematics.reach.travel_region import travel_region
from kinematics.table import Coupling, Travel
from tests.kinematics.example_arms import (
    AT_FLANGE,
    QUARTER,
    SEVEN,
    SIX,
    arm_of,
    prismatic,
    random_arm,
    revolute,
)
from tests.kinematics.inverse.seeds import fresh


def proved(arm: Arm, reached: tuple[float, float], boxes: int = 2**14) -> ProvedRadii:
    axis = first_axis(arm)
    assert axis is not None
    return proved_radii(point_motion(arm, AT_FLANGE), axis, reached, 1e-9, boxes)


def of_samples(arm: Arm, count: int = 20000) -> tuple[float, float]:
    axis = first_axis(arm)
    assert axis is not None
    places = tool_positions(JointSamples(arm, count, 7), AT_FLANGE, 0, count)
    radii = axis.radius_and_height(places)[:, 0]
    return float(radii.min()), float(radii.max())


def polished(arm: Arm) -> tuple[float, float]:
    """Return the least and the greatest radius that scipy finds from many samples."""
    axis, region, found = first_axis(arm), travel_region(arm), []
    assert axis is not None
    samples = JointSamples(arm, 256, 3).piece(0, 256)
    for sign in (1.0, -1.0):

        def squared(joint_values: np.ndarray, sign: float = sign) -> float:
            place = point_motion(arm, AT_FLANGE).at(joint_values[None]).places
            return sign * float(axis.radius_and_height(place)[0, 0]) ** 2

        values = np.array([squared(one) for one in samples])
        bounds = list(zip(region.lower, region.upper, strict=True))
        best = min(
            minimize(squared, samples[start], bounds=bounds).fun for start in values.argsort()[:3]
        )
        found.append(float(np.sqrt(max(sign * best, 0.0))))
    return found[0], found[1]


@pytest.mark.parametrize("count", [2, 3, 4, 5, 6])
def test_no_posture_passes_what_is_proved(count: int) -> None:
    """Whatever the table, and also where what is known is far from the best: only the gap grows."""
    random = fresh()
    for _ in range(6):
        drawn = random_arm(random, count, coupled=True)
        rows = tuple(
            revolute(row.a, row.alpha, row.d, row.theta, travel=Travel(*sorted(ends)))
            if row.is_revolute
            else prismatic(row.a, row.alpha, row.d, row.theta, travel=Travel(-0.2, 0.3))
            for row, ends in zip(
                drawn.table.rows, random.uniform(-3.0, 3.0, (count, 2)).tolist(), strict=True
            )
        )
        arm = arm_of(revolute(a=0.1, alpha=0.3), *rows)
        low, high = of_samples(arm)
        for boxes in (1, 300, 2**13):
            found = proved(arm, (low, high), boxes)
            assert found.below <= low
            assert high <= found.above
            assert found.gap >= 0.0
        middle = 0.5 * (low + high)
        unaware = proved(arm, (middle, middle), 2**13)
        assert unaware.below <= low
        assert high <= unaware.above


def test_radii_of_level_links_are_proved_to_the_slack() -> None:
    random = fresh()
    for _ in range(8):
        ends = np.sort(random.uniform(-3.0, 3.0, (2, 2)), axis=1)
        sides = random.uniform(0.1, 0.6, 3)
        travel = [Travel(*pair) for pair in ends.tolist()]
        arm = arm_of(
            revolute(a=sides[0]),
            *(revolute(a=side, travel=one) for side, one in zip(sides[1:], travel, strict=True)),
        )
        links = LevelLinks(np.stack([sides, np.zeros(3)], axis=1), ends[:, 0], ends[:, 1])
        least, greatest = links.radii(links.nearest_and_farthest()).tolist()
        found = proved(arm, (least, greatest), 2**16)
        assert found.gap <= 1.001e-9


def test_arms_that_stretch_out_are_proved_with_a_box() -> None:
    assert proved(arm_of(*SEVEN), (0.0, 0.9), 1).gap <= 1.001e-9
    stretched = 0.06 + 0.43 + float(np.hypot(0.41, 0.05)) + 0.09
    assert proved(arm_of(*SIX), (0.0, stretched), 1).gap <= 1.001e-9


def test_limits_slides_and_combined_travel_hold_back() -> None:
    """What they leave is found by scipy, and proved within a thousandth."""
    tied = CombinedTravel({2: 1.0, 3: 1.0}, Travel(0.9, 1.2))
    links = (
        revolute(a=0.1, alpha=QUARTER),
        revolute(a=0.5, travel=Travel(-1.0, 1.0)),
        revolute(a=0.3, travel=Travel(-1.0, 1.0)),
    )
    combined = arm_of(*links, combined_travel=(tied,))
    # The forearm leans by their sum, 0.9 at least; the upper arm lies level.
    greatest = 0.1 + 0.5 + 0.3 * np.cos(0.9)
    least = 0.1 + 0.5 * np.cos(1.0) + 0.3 * np.cos(1.2)
    found = proved(combined, (least, greatest), 2**15)
    # Boxes lie askew to what cuts them.
    assert found.gap <= 1e-6
    sliding = arm_of(
        revolute(a=0.2),
        revolute(alpha=QUARTER, theta=QUARTER, travel=Travel(-0.5, 1.0)),
        prismatic(travel=Travel(0.1, 0.6)),
    )
    found = proved(sliding, polished(sliding), 2**15)
    assert found.gap <= 1e-3
    linked = arm_of(
        revolute(a=0.2),
        revolute(a=0.4, travel=Travel(0.3, 2.0)),
        revolute(a=0.3, travel=Travel(-1.0, 0.5), couplings=(Coupling(2, -0.5),)),
    )
    assert proved(linked, polished(linked), 2**15).gap <= 1e-3
