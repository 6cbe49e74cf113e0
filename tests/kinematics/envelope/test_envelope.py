"""Whole envelopes: closed forms, the sampled way held to the exact one, scipy, awkward arms."""

import numpy as np
import pytest
from scipy.optimize import least_squares

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.envelope.envelope import envelope_of
from kinematics.envelope.inquiry import inquiry_of
from kinematics.envelope.sampled_views import Fineness
from kinematics.envelope.searched import searched
from kinematics.envelope.shapes import SIDE, WRIST, View, Views
from kinematics.errors import KinematicsError
from kinematics.reach.sample_summary import first_axis
from kinematics.reach.samples import JointSamples, tool_positions
from kinematics.reach.travel_region import travel_region
from kinematics.table import Coupling, Travel
from tests.benchmarks.travels import demo_arms
from tests.kinematics.envelope.test_outlines import crossings
from tests.kinematics.example_arms import (
    AT_FLANGE,
    QUARTER,
    SEVEN,
    SIX,
    arm_of,
    prismatic,
    revolute,
)
from tests.kinematics.inverse.seeds import fresh

DEMO = demo_arms()
TOOL_AHEAD = np.eye(4)
TOOL_AHEAD[0, 3] = 0.2


def inside(view: View, places: np.ndarray) -> np.ndarray:
    """Return which places (count, 2) are within the curves, by the winding number."""
    turns = np.zeros(len(places))
    for curve in view.curves:
        arms = curve.points - places[:, None]
        onward = np.roll(arms, -1, axis=1)
        cross = arms[..., 0] * onward[..., 1] - arms[..., 1] * onward[..., 0]
        turns += np.arctan2(cross, (arms * onward).sum(axis=-1)).sum(axis=1)
    return turns > np.pi


def away(view: View, places: np.ndarray) -> np.ndarray:
    """Return how far places (count, 2) are from the nearest curve."""
    nearest = np.full(len(places), np.inf)
    for curve in view.curves:
        begin = curve.points
        step = np.roll(begin, -1, axis=0) - begin
        size = np.maximum((step * step).sum(axis=1), 1e-300)
        share = np.clip(((places[:, None] - begin) * step).sum(axis=-1) / size, 0.0, 1.0)
        off = places[:, None] - begin - share[..., None] * step
        nearest = np.minimum(nearest, np.sqrt((off * off).sum(axis=-1)).min(axis=1))
    return nearest


def by_search(arm: Arm, tool: np.ndarray, resolution: float | None = None) -> Views:
    """Return the envelope by the way that knows no structure."""
    return searched(inquiry_of(arm, tool, fineness=Fineness(resolution)))


def random_upright(random: np.random.Generator) -> Arm:
    def travel() -> Travel:
        return Travel(*(np.sort(random.uniform(-3.0, 3.0, 2)) + np.array([-0.2, 0.2])).tolist())

    turn = Travel(-random.uniform(0.5, 3.1), random.uniform(0.5, 3.1))
    return arm_of(
        revolute(a=random.uniform(0.0, 0.3), alpha=QUARTER, travel=turn),
        revolute(a=0.5, d=random.choice([0.0, 0.08]), travel=travel()),
        revolute(a=random.uniform(0.2, 0.6), travel=travel()),
    )


def test_the_sampled_way_keeps_its_bounds_on_arms_known_exactly() -> None:
    random = fresh()
    arms = [random_upright(random) for _ in range(2)]
    arms.append(DEMO["seal-setter"])

    for arm in arms:
        tool = arm.tool_in_flange(None)
        exact, found = envelope_of(arm, tool), by_search(arm, tool)
        assert exact.exact
        assert not found.section.exact
        for known, sampled in (
            (exact.section.area, found.section.area),
            (exact.plan.area, found.plan.area),
            (exact.volume, found.volume),
        ):
            assert known.value > 0.0
            off = abs(known.value - sampled.value)
            assert off <= known.error_bound + sampled.error_bound
        assert found.section.area.error_bound < 0.15 * exact.section.area.value


@pytest.mark.parametrize("name", ["housing-loader", "pallet-stacker", "wash-gantry"])
def test_samples_lie_within_the_curves_and_extremes_beyond_all(name: str) -> None:
    arm = DEMO[name]
    tool = arm.tool_in_flange(None)
    envelope = envelope_of(arm, tool)
    positions = tool_positions(JointSamples(arm, 400, 77), tool, 0, 400)
    places = positions @ envelope.section.directions.T
    if envelope.axis is not None:
        places = envelope.axis.radius_and_height(positions)
    for view, seen in (
        (envelope.section, places),
        (envelope.plan, positions @ envelope.plan.directions.T),
    ):
        slack = view.chord + (view.resolution or 0.0)
        assert (inside(view, seen) | (away(view, seen) <= slack)).all()
        assert inside(view, seen).mean() > 0.98
        for curve in view.curves:
            assert not crossings(curve)
    region = travel_region(arm)
    columns = {"radius": 0, "height": 1}
    for extreme in envelope.extremes:
        values = extreme.joint_values
        assert (region.lower <= values).all()
        assert (values <= region.upper).all()
        reached = tool_in_base(arm, values, tool)[:3, 3]
        np.testing.assert_allclose(reached, extreme.position, atol=1e-12)
        if extreme.measure in columns and envelope.axis is not None:
            column = columns[extreme.measure]
            shown = envelope.axis.radius_and_height(reached)[column]
            told = places[:, column]
            drawn = envelope.section.box[int(extreme.greatest), column]
            # The curve is drawn through places reached, the extreme is the last of them.
            assert abs(drawn - extreme.value) <= envelope.section.chord + 1e-2 * (
                envelope.section.resolution or 0.0
            )
        else:
            column = "xyz".index(extreme.measure)
            shown, told = reached[column], positions[:, column]
        assert shown == pytest.approx(extreme.value, abs=1e-12)
        assert (told <= shown).all() if extreme.greatest else (told >= shown).all()


@pytest.mark.parametrize(("name", "tool"), [("housing-loader", "probe"), ("wash-arm", "lance")])
def test_places_beside_the_curves_against_scipy(name: str, tool: str) -> None:
    """Within them a general solver gets to every place asked; beyond them to none."""
    arm, random = DEMO[name], fresh()
    tool_in_flange = arm.tool_in_flange(tool)
    section = envelope_of(arm, tool_in_flange).section
    region, axis = travel_region(arm), first_axis(arm)
    assert axis is not None
    assert section.resolution is not None
    span = section.box
    places = random.uniform(span[0] - 0.1, span[1] + 0.1, (2000, 2))
    places = places[places[:, 0] > 0.0]
    off = away(section, places)
    near = (off > section.resolution) & (off < 4.0 * section.resolution)
    for reached in (True, False):
        for place in places[near & (inside(section, places) == reached)][:5]:

            def missed(joint_values: np.ndarray, place: np.ndarray = place) -> np.ndarray:
                at = tool_in_base(arm, joint_values, tool_in_flange)[:3, 3]
                return axis.radius_and_height(at) - place

            left = []
            for start in JointSamples(arm, 12, int(random.integers(1, 1000))).piece(0, 12):
                bounds = (region.lower, region.upper)
                left.append(np.sqrt(2.0 * least_squares(missed, start, bounds=bounds).cost))
                if left[-1] < 1e-7:
                    break
            assert (min(left) < 1e-7) == reached


def test_a_finer_grid_is_nearer_and_says_so() -> None:
    arm = arm_of(revolute(alpha=QUARTER), revolute(a=0.5), revolute(a=0.37))
    exact = 0.5 * np.pi * (0.87**2 - 0.13**2)
    coarse, fine = (by_search(arm, AT_FLANGE, step).section for step in (0.05, 0.02))
    assert coarse.resolution == 0.05
    assert fine.resolution == 0.02
    assert fine.area.error_bound < 0.5 * coarse.area.error_bound
    assert abs(fine.area.value - exact) < min(1e-3, fine.area.error_bound)


def test_the_wrist_centre_is_told_exactly_whatever_the_tool() -> None:
    arm = DEMO["housing-loader"]
    envelope = envelope_of(arm, arm.tool_in_flange("probe"), point=WRIST)
    assert envelope.exact
    np.testing.assert_allclose(envelope.point_in_flange, [0.0, 0.0, -0.094], atol=1e-15)
    # Upper arm 565 mm and forearm 612 mm, straight out: within travel, at the shoulder's height.
    farthest = max(one.value for one in envelope.extremes if one.measure == "radius")
    assert farthest == pytest.approx(0.565 + 0.612, abs=1e-9)
    assert envelope.turn is not None
    assert envelope.turn.dead_from is not None
    assert envelope.turn.dead_to is not None
    dead = np.degrees([envelope.turn.dead_from, envelope.turn.dead_to])
    np.testing.assert_allclose(dead, [168.0, 192.0], atol=1e-9)


def test_working_travel_reaches_less() -> None:
    arm = DEMO["pallet-stacker"]
    tool = arm.tool_in_flange("vacuum-frame")
    lathe = DEMO["housing-loader"]
    travel, working = (envelope_of(lathe, AT_FLANGE, point=WRIST, working=w) for w in (False, True))
    assert working.volume.value < 0.9 * travel.volume.value
    assert working.working
    same = [envelope_of(arm, tool, working=w).section.area for w in (False, True)]
    assert same[0] == same[1]  # its working travel bounds the last joint alone


def test_a_leaning_axis_is_seen_along_itself() -> None:
    def told(lean: float) -> tuple[float, float, float]:
        rows = (
            revolute(alpha=lean, a=0.1, travel=Travel(-1.0, 1.5)),
            revolute(alpha=QUARTER, travel=Travel(-2.0, 2.0)),
            revolute(a=0.5, travel=Travel(-2.0, 2.0)),
        )
        envelope = envelope_of(arm_of(*rows, convention="modified"), TOOL_AHEAD)
        return envelope.section.area.value, envelope.plan.area.value, envelope.volume.value

    assert min(told(0.0)) > 0.0
    np.testing.assert_allclose(told(0.7), told(0.0), rtol=1e-9)


NO_SIZE = {
    "one joint": (revolute(a=0.4),),
    "one slide": (prismatic(travel=Travel(0.0, 1.0)),),
    "no lengths": (revolute(), revolute(), revolute()),
    "on axis 1": (revolute(d=0.5), prismatic(travel=Travel(0.0, 0.5))),
    "twice about one axis": (
        revolute(travel=Travel(-1.0, 1.0)),
        revolute(a=0.5, travel=Travel(-1.0, 1.0)),
    ),
}


@pytest.mark.parametrize("case", NO_SIZE)
def test_what_has_no_size_says_so(case: str) -> None:
    envelope = envelope_of(arm_of(*NO_SIZE[case]), AT_FLANGE)
    for view in (envelope.section, envelope.plan):
        assert view.flat
        assert view.area == (0.0, 0.0)
        assert np.isfinite(view.box).all()
    assert envelope.volume == (0.0, 0.0)
    assert any("has no size" in note for note in envelope.notes)


@pytest.mark.parametrize("lean", [1e-6, 1e-4, 1e-2])
def test_what_is_thinner_than_the_grid_is_boxed(lean: float) -> None:
    """Three links that a typed angle tilts out of one plane, by up to 0.5 m times the angle."""
    links = [revolute(a=length, travel=Travel(-2.0, 2.0)) for length in (0.3, 0.2)]
    first = revolute(a=0.4, alpha=lean, travel=Travel(-2.0, 2.0))
    arm = arm_of(first, *links)
    envelope = envelope_of(arm, AT_FLANGE)
    area, volume = envelope.section.area, envelope.volume
    assert area.value - area.error_bound <= 0.9 * lean
    assert area.value + area.error_bound >= 0.2 * lean
    assert 0.0 < area.value < 2.0 * lean
    assert volume.value <= 4.0 * lean
    places = tool_positions(JointSamples(arm, 300, 9), AT_FLANGE, 0, 300)
    assert envelope.axis is not None
    seen = envelope.axis.radius_and_height(places)
    box, slack = envelope.section.box, 1e-3 * lean
    assert (box[0] - slack <= seen).all()
    assert (seen <= box[1] + slack).all()


def test_a_line_section_still_sweeps_a_plan() -> None:
    """Column and beam: the section is an arc, the plan a ring of known radii."""
    arm = arm_of(revolute(alpha=QUARTER), revolute(a=0.5, travel=Travel(0.0, 1.0)))
    envelope = envelope_of(arm, AT_FLANGE)
    assert envelope.section.flat
    points = envelope.section.curves[0].points
    np.testing.assert_allclose(np.hypot(*points.T), 0.5, atol=1e-12)
    assert envelope.plan.area.value == pytest.approx(np.pi * 0.25 * np.sin(1.0) ** 2, rel=1e-8)


def test_joints_tied_to_axis_1_are_told_and_sampled() -> None:
    second = revolute(a=0.5, travel=Travel(-1.0, 2.0), couplings=(Coupling(1, 0.5),))
    first = revolute(a=0.1, alpha=QUARTER, travel=Travel(-1.0, 1.0))
    arm = arm_of(first, second, revolute(a=0.3, travel=Travel(-2.0, 0.0)))
    envelope = envelope_of(arm, AT_FLANGE)
    assert envelope.turn is None
    assert not envelope.same_at_every_bearing
    assert "joint 1 turns other rows too" in envelope.notes[0]
    places = tool_positions(JointSamples(arm, 300, 5), AT_FLANGE, 0, 300)
    plan = places @ envelope.plan.directions.T
    assert (inside(envelope.plan, plan) | (away(envelope.plan, plan) < 1e-2)).all()


def test_seven_joints_reach_a_ball() -> None:
    envelope = envelope_of(arm_of(*SEVEN), AT_FLANGE)
    ball = 4.0 / 3.0 * np.pi * (0.4 + 0.39 + 0.11) ** 3
    assert abs(envelope.volume.value - ball) <= envelope.volume.error_bound


def test_huge_travel_reaches_what_a_turn_does() -> None:
    def arm(most: float) -> Arm:
        open_ = Travel(-most, most)
        return arm_of(
            revolute(alpha=QUARTER, travel=open_),
            revolute(a=0.5, travel=open_),
            revolute(a=0.3, travel=open_),
        )

    told, known = (envelope_of(arm(most), AT_FLANGE) for most in (1e8, np.pi))
    assert told.volume.value == pytest.approx(known.volume.value, rel=1e-9)


def test_what_cannot_be_told_is_refused_with_the_way_out() -> None:
    asked = {
        ("arm", "rows"): lambda: envelope_of(arm_of(), AT_FLANGE),
        ("arm", "rows", 1, "travel"): lambda: envelope_of(
            arm_of(revolute(alpha=QUARTER), prismatic()), AT_FLANGE
        ),
        ("point",): lambda: envelope_of(DEMO["wash-arm"], AT_FLANGE, point=WRIST),
        ("resolution",): lambda: envelope_of(arm_of(*SIX), AT_FLANGE, resolution=1e-7),
    }
    for where, ask in asked.items():
        with pytest.raises(KinematicsError) as refused:
            ask()
        assert refused.value.where == where
        assert refused.value.way_out


def test_a_gantry_has_a_side_view_and_its_box() -> None:
    envelope = envelope_of(DEMO["wash-gantry"], AT_FLANGE, point=WRIST)
    assert envelope.section.kind == SIDE
    assert envelope.axis is None
    assert envelope.exact
    assert envelope.volume.value == pytest.approx(5.2 * 1.85 * 1.15, rel=1e-12)
