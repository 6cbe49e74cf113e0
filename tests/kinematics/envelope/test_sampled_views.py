"""Views found by a grid finer than the usual one, in one stripe and in several, in any order."""

import numpy as np
import pytest

from kinematics.envelope.descents import InView
from kinematics.envelope.grid_reach import Samples
from kinematics.envelope.sampled_views import AskedView, Fineness, SampledView
from kinematics.envelope.shapes import PLAN
from kinematics.number_checks import FloatArray
from kinematics.reach.travel_region import TravelRegion

INNER, OUTER = 0.3, 1.0


def sector(half_angle: float, resolution: float | None) -> AskedView:
    """Return the view from above of a slide on a turn, as much to one side of y as to the other."""
    angles = 0.5 * np.pi + half_angle * np.array([-1.0, 1.0])
    lower, upper = np.array([angles[0], INNER]), np.array([angles[1], OUTER])
    none = np.empty((0, 2)), np.empty(0), np.empty(0)
    seeker = InView(_turned, TravelRegion(lower, upper, *none), np.ones(2), 1e-9)
    turns, radii = np.meshgrid(np.linspace(*angles, 41), np.linspace(INNER, OUTER, 9))
    postures = np.stack([turns.ravel(), radii.ravel()], axis=1)
    samples = Samples(postures, _turned(postures)[0])
    return AskedView(seeker, samples, PLAN, np.eye(3)[:2], Fineness(resolution))


def _turned(postures: FloatArray) -> tuple[FloatArray, FloatArray]:
    angle, radius = postures.T
    along = np.stack([np.cos(angle), np.sin(angle)], axis=1)
    across = np.stack([-np.sin(angle), np.cos(angle)], axis=1)
    return radius[:, None] * along, np.stack([radius[:, None] * across, along], axis=2)


def found(asked: AskedView) -> SampledView:
    return asked.told([asked.piece(number) for number in range(asked.pieces)])


@pytest.mark.parametrize(("half_angle", "has_one"), [(0.05, True), (1.3, False)])
def test_a_finer_grid_is_finer_however_few_its_stripes(half_angle: float, has_one: bool) -> None:
    area = half_angle * (OUTER**2 - INNER**2)  # of a sector of a ring
    usual = found(sector(half_angle, None)).view
    fine_step = 0.4 * usual.resolution
    asked = sector(half_angle, fine_step)
    fine = found(asked).view
    assert (asked.pieces == 1) == has_one
    assert fine.resolution == fine_step
    assert abs(fine.area.value - area) <= fine.area.error_bound < 0.6 * usual.area.error_bound
    counts = [sum(len(curve.points) for curve in view.curves) for view in (usual, fine)]
    assert counts[1] > 1.5 * counts[0]


def test_stripes_are_the_same_in_any_order() -> None:
    there, back = sector(1.3, 0.015), sector(1.3, 0.015)
    assert there.pieces > 2
    backwards = [back.piece(number) for number in reversed(range(back.pieces))][::-1]
    one, other = found(there), back.told(backwards)
    assert one.moment == other.moment
    assert one.view.area == other.view.area
    for first, second in zip(one.view.curves, other.view.curves, strict=True):
        assert np.array_equal(first.points, second.points)
