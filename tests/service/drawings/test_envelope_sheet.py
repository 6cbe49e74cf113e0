"""The sheet of an envelope: true to scale, all on the page, no words over others, nothing live."""

import re
import xml.etree.ElementTree as ElementTree

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from kinematics.envelope.measures import Measure
from kinematics.envelope.shapes import SECTION, SIDE, Curve, Envelope, Extreme, Turn, View
from kinematics.number_checks import FloatArray
from kinematics.reach.sample_summary import FirstAxis
from service.convert import UNITS
from service.drawings.envelope_sheet import envelope_sheet
from service.drawings.envelope_words import SheetLabels
from service.drawings.scales import SCALES
from tests.service.drawings.sheets import (
    LABELS,
    ROWS,
    SVG,
    Words,
    drawn,
    envelopes,
    mm_per_metre,
    points_of,
    sheet,
    words_of,
)

HOSTILE = '<script>alert(1)</script>&"\']]>\x00\x1b\u2028 <image href="http://192.0.2.1/x"/>'


def assert_fit(svg: ElementTree.Element) -> None:
    """Assert that all is on the page and no words stand over others."""
    assert (svg.get("width"), svg.get("height")) == ("297mm", "210mm")
    assert svg.get("viewBox") == "0 0 297 210"
    clipped = {path for clip in svg.iter(f"{SVG}clipPath") for path in clip}
    for path in svg.iter(f"{SVG}path"):
        if path.get("clip-path") is None and path not in clipped:
            points = points_of(path.attrib["d"])
            assert (points >= (10.0, 10.0)).all(), path.attrib
            assert (points <= (287.0, 206.1)).all(), path.attrib
    words = words_of(svg)
    assert len(words) > 30
    for number, one in enumerate(words):
        left, top, right, bottom = one.box
        assert left >= 20.0, one
        assert top >= 10.0, one
        assert right <= 287.0, one
        assert bottom <= 207.0, one
        for other in words[:number]:
            assert not one.meets(other), (one, other)


@pytest.mark.parametrize("name", ROWS)
def test_everything_has_its_place(name: str) -> None:
    assert_fit(sheet(envelopes(name)))


@pytest.mark.parametrize("name", ["metre", "long gantry"])
@pytest.mark.parametrize("which", [0, 1], ids=["travel", "working travel"])
def test_one_travel_alone_has_its_place(name: str, which: int) -> None:
    assert_fit(sheet([envelopes(name)[which]]))


@pytest.mark.parametrize("name", ["millimetre", "metre", "hundred metres", "long gantry", "level"])
def test_a_measure_of_the_drawing_is_the_measure_of_the_arm(name: str) -> None:
    svg = sheet(envelopes(name))
    scale = mm_per_metre(svg)
    views = {"section": "section", "side": "side"}
    for envelope, travel in zip(envelopes(name), ("travel", "working travel"), strict=True):
        for view in (envelope.section, envelope.plan):
            kind = views.get(view.kind, "plan")
            size = np.ptp(drawn(svg, f"{kind} {travel}"), axis=0)
            # Points are told to a thousandth of a millimetre of paper.
            assert size == pytest.approx((view.box[1] - view.box[0]) * scale, abs=2.1e-3)


@pytest.mark.parametrize("units", UNITS)
def test_a_dimension_says_how_long_it_is(units: str) -> None:
    svg = sheet(envelopes("metre"), units=units)
    scale = mm_per_metre(svg)
    per_metre = {"mm": 1000.0, "m": 1.0, "in": 1.0 / 0.0254}[UNITS[units].length]
    told = [
        (float(found[1]), np.ptp(points_of(path.attrib["d"]), axis=0).max())
        for path in svg.iter(f"{SVG}path")
        if (found := re.match(r"dimension ([\d.]+)", path.get("data-about", "")))
    ]
    assert len(told) >= 4
    inside = [(value, length) for value, length in told if value / per_metre * scale > 25.0]
    assert len(inside) >= 3
    for value, length in inside:
        assert length / scale * per_metre == pytest.approx(value, rel=2e-4)


def test_the_largest_scale_with_room_is_taken() -> None:
    """A tenth of the size is drawn as large at ten times the scale."""
    large, small = (mm_per_metre(sheet(envelopes(name))) for name in ("metre", "millimetre"))
    assert small == pytest.approx(1000.0 * large)
    section = drawn(sheet(envelopes("metre")), "section travel")
    assert np.ptp(section, axis=0).max() > 40.0


def test_scales_are_those_of_the_standard() -> None:
    words = [scale.words for scale in SCALES]
    assert {"1:1", "1:2", "1:5", "1:10", "1:20", "1:50", "1:100", "2:1", "5:1", "10:1"} < set(words)
    sizes = [scale.mm_per_metre for scale in SCALES]
    assert sizes == sorted(sizes, reverse=True)
    assert len(set(sizes)) == len(sizes)


def test_lines_tell_travel_from_working_travel_without_colour() -> None:
    text = envelope_sheet(envelopes("metre"), LABELS, UNITS["mm-deg"]).decode()
    assert set(re.findall(r"#[0-9a-f]{3,6}\b", text)) == {"#000", "#fff"}
    svg = sheet(envelopes("metre"))
    paths = {path.get("data-about"): path for path in svg.iter(f"{SVG}path")}
    assert paths["section travel"].get("stroke-dasharray") is None
    assert paths["section working travel"].get("stroke-dasharray") is not None


def test_the_title_block_says_what_it_is_of() -> None:
    said = [words.said for words in words_of(sheet(envelopes("metre")))]
    for words in ("any", "An arm", "3", "0f" * 32, "gripper", "standard", "first angle", "mm"):
        assert words in said
    assert "exact curves" in said
    assert CAUTION in said
    assert not any(re.search(r"\b20\d\d\b|\d\d:\d\d:\d\d", words) for words in said)


CAUTION = "Not a safety function."


def test_the_same_arm_gives_the_same_sheet() -> None:
    first, second = (envelope_sheet(envelopes("metre"), LABELS, UNITS["mm-deg"]) for _ in range(2))
    assert first == second


def test_views_above_one_another_share_their_zero() -> None:
    """First-angle projection: what is seen from above stands below, its places under theirs."""
    svg = sheet(envelopes("long gantry"))
    front, above = (drawn(svg, f"{kind} travel") for kind in ("side", "plan"))
    assert front[:, 0].min() == pytest.approx(above[:, 0].min(), abs=1e-3)
    assert front[:, 0].max() == pytest.approx(above[:, 0].max(), abs=1e-3)
    assert front[:, 1].max() < above[:, 1].min()


@pytest.mark.parametrize("name", ROWS)
def test_a_plan_beside_the_section_has_the_letter_of_an_arrow(name: str) -> None:
    svg = sheet(envelopes(name))
    said = [words.said for words in words_of(svg)]
    arrows = [one for one in svg.iter(f"{SVG}path") if one.get("data-about") == "arrow B"]
    front = np.concatenate([drawn_points(svg, kind) for kind in ("section", "side")])
    plan = drawn_points(svg, "plan")
    if "VIEW FROM ABOVE" in said:  # below: first-angle projection says it
        assert not arrows
        assert "B" not in said
        assert not len(front) or not len(plan) or front[:, 1].max() <= plan[:, 1].min()
        return
    assert (said.count("VIEW B"), said.count("B")) == (1, 1)
    assert any(words.startswith("from above, ") for words in said)
    (shaft,) = (points_of(arrow.attrib["d"]) for arrow in arrows)
    assert front[:, 1].min() > shaft[:, 1].max()
    assert front[:, 0].min() - 15.0 < shaft[0, 0] < front[:, 0].max() + 15.0
    assert shaft[0, 0] < plan[:, 0].min()
    assert_nothing_is_written_over(svg, shaft)


def drawn_points(svg: ElementTree.Element, kind: str) -> FloatArray:
    """Return the points of the lines of a view, (count, 2)."""
    paths = [one for one in svg.iter(f"{SVG}path") if one.get("data-about") == f"{kind} travel"]
    return np.concatenate([np.empty((0, 2)), *(points_of(path.attrib["d"]) for path in paths)])


def assert_nothing_is_written_over(svg: ElementTree.Element, shaft: FloatArray) -> None:
    (left, top), (right, bottom) = shaft.min(axis=0), shaft.max(axis=0)
    arrow = Words("", (left - 0.5, top, right + 0.5, bottom))
    assert not [words for words in words_of(svg) if words.meets(arrow)]


def test_hostile_names_are_words() -> None:
    labels = SheetLabels(
        HOSTILE, HOSTILE * 9, HOSTILE, HOSTILE, HOSTILE, HOSTILE, [HOSTILE * 40] * 9
    )
    text = envelope_sheet(envelopes("metre"), labels, UNITS["mm-deg"], name="sheet-2")
    svg = ElementTree.fromstring(text)
    assert_inert(svg)
    assert_fit(svg)
    assert {clip.get("id") for clip in svg.iter(f"{SVG}clipPath")} == {"sheet-2-1", "sheet-2-2"}


def assert_inert(svg: ElementTree.Element) -> None:
    """Assert that a sheet has marks and words only, and refers to nothing outside of it."""
    known = {"svg", "title", "desc", "g", "path", "rect", "circle", "text", "clipPath"}
    for element in svg.iter():
        assert element.tag.removeprefix(SVG) in known
        for name, value in element.attrib.items():
            assert not name.startswith("on")
            assert name not in ("href", "style", "class", "src")
            assert "://" not in value or element.tag == f"{SVG}svg"
            assert "url(" not in value or value.startswith("url(#")


# --- envelopes drawn at random ---------------------------------------------------------------

LENGTHS = st.floats(-3.0, 3.0)
SIZES = st.floats(-4.0, 3.0).map(lambda power: 10.0**power)


@st.composite
def envelopes_drawn(draw: st.DrawFn) -> list[Envelope]:
    """Draw rectangles as envelopes: any size, any place, with axis 1 and without."""
    size, axis = draw(SIZES), draw(st.booleans())
    found = []
    for working in (False, True)[: draw(st.integers(1, 2))]:
        section, plan = draw(_views(size, SECTION if axis else SIDE)), draw(_views(size, "plan"))
        names = ("radius", "height") if axis else ("x", "z")
        extremes = [
            Extreme(names[column], bool(row), float(value), np.zeros(1), np.zeros(3))
            for row, values in enumerate(section.box)
            for column, value in enumerate(values)
        ]
        if not axis:
            extremes += [
                Extreme("y", bool(row), float(plan.box[row, 1]), np.zeros(1), np.zeros(3))
                for row in (0, 1)
            ]
        half = draw(st.floats(0.05, 3.1))
        found.append(
            Envelope(
                "tool",
                np.zeros(3),
                working,
                FirstAxis(np.zeros(3), np.array([0.0, 0.0, 1.0])) if axis else None,
                Turn(-half, half, 2 * half, half, 2 * np.pi - half) if axis else None,
                section,
                plan,
                Measure(size**3, 1e-3 * size**3),
                True,
                tuple(extremes),
                ("a note",),
            )
        )
    return found


@st.composite
def _views(draw: st.DrawFn, size: float, kind: str) -> View:
    """Draw a rectangle; radii of a section are not negative."""
    places = [size * draw(LENGTHS) for _ in range(4)]
    (left, right), (low, high) = sorted(places[:2]), sorted(places[2:])
    if kind == SECTION:
        left, right = sorted((abs(left), abs(right)))
    points = np.array([[left, low], [right, low], [right, high], [left, high]])
    area = Measure(float((right - left) * (high - low)), 0.0)
    return View(kind, (Curve(points, outer=True),), area, None, 0.0, np.eye(3)[:2])


@settings(max_examples=60, deadline=None)
@given(envelopes_drawn(), st.sampled_from(sorted(UNITS)))
def test_any_envelope_fits_its_sheet(found: list[Envelope], units: str) -> None:
    svg = sheet(found, units=units)
    assert_fit(svg)
    for path in svg.iter(f"{SVG}path"):
        if path.get("data-about") == "arrow B":
            assert_nothing_is_written_over(svg, points_of(path.attrib["d"]))
