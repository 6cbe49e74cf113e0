"""Arms that move level and others up and down, and rings, each against all postures laid out."""

import numpy as np
import pytest

from kinematics.arm import Arm, CombinedTravel
from kinematics.envelope.envelope import envelope_of
from kinematics.envelope.inquiry import inquiry_of
from kinematics.envelope.measures import Measure
from kinematics.envelope.plan_axes import PlanAxes
from kinematics.envelope.proved_radii import ProvedRadii
from kinematics.envelope.ring import ring_view
from kinematics.envelope.sampled_views import Fineness
from kinematics.envelope.searched import searched
from kinematics.envelope.shapes import Envelope
from kinematics.reach.sample_summary import first_axis
from kinematics.reach.samples import JointSamples, tool_positions
from kinematics.table import Coupling, Travel
from tests.benchmarks.travels import demo_arms
from tests.kinematics.envelope.test_envelope import away, inside
from tests.kinematics.example_arms import AT_FLANGE, QUARTER, arm_of, prismatic, revolute
from tests.kinematics.inverse.seeds import fresh

WHOLE = (-np.pi, np.pi)
LIFT = Travel(0.05, 0.45)

RINGS, SECTORS = 320, 1440
"""Cells in which places are counted: some 3 mm, with a place each 2 mm."""


def four_axes(
    lengths: tuple[float, float, float],
    turn: tuple[float, float],
    elbow: tuple[float, float],
    wrist: tuple[float, float],
) -> Arm:
    """Return three links that turn level, the last about a slide that lifts it."""
    upper, fore, hand = lengths
    return arm_of(
        revolute(a=upper, d=0.3, travel=Travel(*turn)),
        revolute(a=fore, alpha=np.pi, travel=Travel(*elbow)),
        prismatic(travel=LIFT),
        revolute(a=hand, travel=Travel(*wrist)),
    )


def drawn(random: np.random.Generator, turn: tuple[float, float]) -> tuple[Arm, dict[str, object]]:
    lengths = tuple(random.uniform(0.1, 0.5, 3).tolist())
    elbow, wrist = (tuple(np.sort(random.uniform(-2.8, 2.8, 2)).tolist()) for _ in range(2))
    return four_axes(lengths, turn, elbow, wrist), {
        "lengths": lengths,
        "elbow": elbow,
        "wrist": wrist,
    }


def by_all_postures(told: dict[str, object], turn: float) -> tuple[float, float, float]:
    """Return the least and greatest radius and the area of the plan, by counting cells of it.

    Each cell is a step of radius and of bearing; the places at joint 1 = 0 are laid out and then
    turned, which is a sum over bearings.
    """
    (upper, fore, hand), elbow, wrist = told["lengths"], told["elbow"], told["wrist"]  # type: ignore[misc]
    bends, twists = np.linspace(*elbow, 1201), np.linspace(*wrist, 1201)  # type: ignore[misc]
    # The last joint's axis points down.
    turned = bends[:, None] - twists
    places = upper + fore * np.exp(1j * bends)[:, None] + hand * np.exp(1j * turned)
    radii, bearings = np.abs(places).ravel(), np.angle(places).ravel()
    size, step = radii.max() * (1.0 + 1e-12) / RINGS, 2.0 * np.pi / SECTORS
    swept = np.zeros((RINGS, SECTORS), bool)
    swept[(radii / size).astype(int), ((bearings + np.pi) / step).astype(int) % SECTORS] = True
    turns, done = round(turn / step) + 1, 1
    while done < turns:
        by = min(done, turns - done)
        swept |= np.roll(swept, by, axis=1)
        done += by
    areas = size * (np.arange(RINGS) + 0.5) * size * step
    return float(radii.min()), float(radii.max()), float(swept.sum(axis=1) @ areas)


def extremes(envelope: Envelope) -> list[float]:
    return [one.value for one in envelope.extremes]


@pytest.mark.parametrize("turn", [WHOLE, (-1.2, 1.0), (-3.0, 2.9), (-0.05, 0.05)])
def test_four_axes_about_one_direction(turn: tuple[float, float]) -> None:
    random = fresh()
    for _ in range(3):
        arm, told = drawn(random, turn)
        envelope = envelope_of(arm, AT_FLANGE, resolution=0.04)
        near, far, area = by_all_postures(told, turn[1] - turn[0])
        least, greatest, low, high = extremes(envelope)
        # A grid of postures comes short of the farthest by a square of its step, of what closes by
        # the step itself.
        assert near - 5e-3 < least < near + 1e-12
        assert far - 1e-12 < greatest < far + 1e-4
        # The lift points down.
        np.testing.assert_allclose([low, high], [0.3 - 0.45, 0.3 - 0.05], atol=1e-15)
        stroke = LIFT.upper - LIFT.lower
        section, plan, volume = envelope.section.area, envelope.plan.area, envelope.volume
        assert abs(section.value - stroke * (greatest - least)) <= section.error_bound < 1e-9
        assert envelope.section.exact
        # Cells at the rim are counted whole, and its length is some circles and spokes.
        rim = 2.0 * np.pi * far / RINGS + (far - near) * 8.0 * np.pi / SECTORS
        assert abs(plan.value - area) <= plan.error_bound + 3.0 * far * rim
        assert volume.value == pytest.approx(plan.value * stroke, rel=1e-12)
        assert volume.error_bound >= plan.error_bound * stroke
        assert volume.error_bound <= plan.error_bound * stroke + 1e-9
        places = tool_positions(JointSamples(arm, 500, 5), AT_FLANGE, 0, 500)
        seen = places @ envelope.plan.directions.T
        slack = envelope.plan.chord + (envelope.plan.resolution or 0.0)
        assert (inside(envelope.plan, seen) | (away(envelope.plan, seen) <= slack)).all()
        if turn == WHOLE:
            assert envelope.exact
            ring = np.pi * (greatest**2 - least**2)
            assert abs(plan.value - ring) <= plan.error_bound < 1e-9


def test_a_search_that_missed_the_farthest_would_be_noticed() -> None:
    """Of many arms the closed form is never beaten by what searches find, to the last digits."""
    random = fresh()
    for _ in range(20):
        arm, _ = drawn(random, WHOLE)
        inquiry = inquiry_of(arm, AT_FLANGE)
        near, far, low, high = extremes(envelope_of(arm, AT_FLANGE))
        found = [one.value for one in inquiry.searched_extremes]
        assert near <= found[0] + 1e-12
        assert far >= found[1] - 1e-12
        np.testing.assert_allclose([low, high], found[2:], atol=1e-9)


def test_level_slides_and_tied_joints_are_proved_instead() -> None:
    """No closed form: the radii are searched, and how far they are proved is told."""
    sliding = arm_of(
        revolute(a=0.2, travel=Travel(-1.0, 1.0)),
        revolute(a=0.3, alpha=QUARTER, travel=Travel(0.3, 1.4)),
        prismatic(alpha=-QUARTER, travel=Travel(0.1, 0.5)),
        prismatic(travel=LIFT),
    )
    tied = arm_of(
        revolute(a=0.3),
        revolute(a=0.3, travel=Travel(-2.0, 2.0)),
        revolute(a=0.2, travel=Travel(-2.0, 2.0)),
        prismatic(travel=LIFT),
        combined_travel=(CombinedTravel({2: 1.0, 3: 1.0}, Travel(0.5, 1.5)),),
    )
    coupled = arm_of(
        revolute(a=0.3),
        revolute(a=0.3, travel=Travel(-2.0, 2.0)),
        revolute(a=0.2, travel=Travel(-2.0, 2.0), couplings=(Coupling(2, 0.5),)),
        prismatic(travel=LIFT),
    )
    for arm in (sliding, tied, coupled):
        envelope, axis = envelope_of(arm, AT_FLANGE), first_axis(arm)
        assert axis is not None
        places = tool_positions(JointSamples(arm, 50000, 3), AT_FLANGE, 0, 50000)
        radii, heights = axis.radius_and_height(places).T
        least, greatest, low, high = extremes(envelope)
        gap = envelope.section.resolution or 1e-9
        assert gap < 1e-5
        assert radii.min() >= least - gap
        assert radii.max() <= greatest + gap
        assert radii.min() - least < 2e-2
        assert greatest - radii.max() < 2e-2
        np.testing.assert_allclose([low, high], [heights.min(), heights.max()], atol=1e-3)
        area = envelope.section.area
        assert area.error_bound >= 2.0 * 1e-12 * (high - low)
        assert abs(area.value - (greatest - least) * (high - low)) <= area.error_bound


def test_lifts_bounded_together_are_as_high_as_both_allow() -> None:
    arm = arm_of(
        revolute(a=0.3),
        prismatic(travel=Travel(0.0, 1.0)),
        prismatic(a=0.2, travel=Travel(0.0, 1.0)),
        combined_travel=(CombinedTravel({2: 1.0, 3: 2.0}, Travel(0.5, 1.5)),),
    )
    _, _, low, high = extremes(envelope_of(arm, AT_FLANGE))
    # The sum of both is least at (0, 0.25) and greatest at (1, 0.25).
    assert low == pytest.approx(0.25, abs=1e-9)
    assert high == pytest.approx(1.25, abs=1e-9)


# --- rings -----------------------------------------------------------------------------------


def test_a_ring_is_off_by_what_its_radii_are() -> None:
    axes = PlanAxes(np.eye(3)[:2], np.array([0.5, -0.2]), 1.0)
    for below, least, greatest, above in (
        (0.3, 0.3, 0.7, 0.7),
        (0.2, 0.3, 0.7, 0.9),
        (0.0, 0.0, 0.7, 0.7),
        (0.0, 1e-10, 0.7, 0.7001),
    ):
        ring = ring_view(axes, ProvedRadii(least, greatest, below, above), 1e-9)
        for inner, outer in ((least, greatest), (below, above), (least, above), (below, greatest)):
            truth = np.pi * (outer**2 - inner**2)
            assert abs(ring.area.value - truth) <= ring.area.error_bound + 1e-15
        assert ring.exact == (max(least - below, above - greatest) <= 1e-9)
        assert len(ring.curves) == (2 if least > 1e-9 else 1)
        shown = sum(curve.signed_area for curve in ring.curves)
        assert shown == pytest.approx(ring.area.value, rel=1e-3)
        middle = np.concatenate([curve.points for curve in ring.curves]).mean(axis=0)
        np.testing.assert_allclose(middle, axes.centre, atol=1e-12)


def test_a_circle_has_no_area() -> None:
    axes = PlanAxes(np.eye(3)[:2], np.zeros(2), 1.0)
    ring = ring_view(axes, ProvedRadii(0.4, 0.4, 0.4, 0.4), 1e-9)
    assert ring.flat
    assert ring.area == Measure(0.0, 0.0)


@pytest.mark.parametrize("hollow", [False, True])
def test_a_ring_of_an_arm_of_no_structure(hollow: bool) -> None:
    """An upright arm with a bent third link: its radii by all postures, its bound by proof."""
    elbow = Travel(0.4, 1.6) if hollow else Travel(-2.5, 2.5)
    arm = arm_of(
        revolute(a=0.1, alpha=QUARTER),
        revolute(a=0.4, alpha=0.3, travel=Travel(-1.0, 0.8)),
        revolute(a=0.3, alpha=-0.4, d=0.05, travel=elbow),
        revolute(a=0.1, travel=Travel(-0.5, 0.5)),
    )
    inquiry = inquiry_of(arm, AT_FLANGE, fineness=Fineness(0.05))
    views, axis = searched(inquiry), first_axis(arm)
    assert axis is not None
    ways = [np.linspace(*ends, 61) for ends in ((-1.0, 0.8), (elbow.lower, elbow.upper))]
    ways.append(np.linspace(-0.5, 0.5, 31))
    grid = np.stack(np.meshgrid([0.0], *ways, indexing="ij"), axis=-1).reshape(-1, 4)
    radii = axis.radius_and_height(inquiry.motion.at(grid).places)[:, 0]
    inner = radii.min() if hollow else 0.0
    truth = np.pi * (radii.max() ** 2 - inner**2)
    assert (inner > 0.1) == hollow
    area = views.plan.area
    # The grid comes short of both radii by less than 2e-4.
    assert truth - 1e-12 <= area.value + area.error_bound
    assert area.value - area.error_bound <= truth + 2.0 * np.pi * radii.max() * 4e-4
    assert area.error_bound < 1e-2 * area.value
    assert views.same_at_every_bearing


def test_extremes_of_upright_pairs_are_exact() -> None:
    """A pair behind axis 1, before it, and beside it: against all of its postures."""
    travels = ((-0.5, 1.2), (0.3, 2.4)), ((1.7, 2.6), (0.2, 1.0)), ((-3.0, 3.0), (-2.0, 2.0))
    for shoulder, elbow in travels:
        for offset, aside in ((0.0, 0.0), (0.2, 0.0), (0.2, 0.1)):
            arm = arm_of(
                revolute(a=offset, alpha=QUARTER),
                revolute(a=0.5, d=aside, travel=Travel(*shoulder)),
                revolute(a=0.3, travel=Travel(*elbow)),
            )
            first, second = np.meshgrid(np.linspace(*shoulder, 401), np.linspace(*elbow, 401))
            out = offset + 0.5 * np.cos(first) + 0.3 * np.cos(first + second)
            up = 0.5 * np.sin(first) + 0.3 * np.sin(first + second)
            radii = np.hypot(out, aside)
            nearest = aside if out.min() < 0.0 < out.max() else radii.min()
            told = [nearest, radii.max(), up.min(), up.max()]
            found = extremes(envelope_of(arm, AT_FLANGE))
            np.testing.assert_allclose(found, told, atol=1e-4)
            assert found[0] <= nearest + 1e-12
            assert found[1] >= radii.max() - 1e-12
            assert found[2] <= up.min() + 1e-12
            assert found[3] >= up.max() - 1e-12


def test_the_level_arm_of_the_demo_is_exact_in_radius_and_height() -> None:
    arm = demo_arms()["seal-setter"]
    envelope = envelope_of(arm, arm.tool_in_flange(None))
    assert envelope.exact
    assert envelope.section.area.error_bound < 1e-9
