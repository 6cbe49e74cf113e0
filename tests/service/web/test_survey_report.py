"""Reports of surveys on paper: to scale, told apart by form; nothing in names is markup."""

import re
from typing import Any

import numpy as np
import pytest

from service.web.survey_drawing import two_views
from service.web.survey_report import POLICY, report_html

SURVEY: dict[str, Any] = {
    "id": "0" * 20,
    "kind": "reach-checks",
    "title": "<script>alert(1)</script>",
    "finished_at": "2026-03-04T05:06:07.000Z",
    "created_at": "2026-03-04T05:06:07.000Z",
    "started_at": None,
    "units": "mm-deg",
    "software": "1",
    "arm": {
        "name": "arm",
        "revision": None,
        "digest": "12ab",
        "table_digest": "34cd",
        "setup_digest": "56ef",
    },
    "about": {"tool": "flange", "frame": "base", "method": {"say": "closed form"}},
}
ARM = {
    "name": "arm",
    "convention": "standard",
    "units": "mm-deg",
    "notes": "a<b",
    "rows": [{"joint": "revolute", "a": 400, "travel": [-170, 170]}],
}
POINTS = [
    ((0.0, 0.0, 0.0), "reachable"),
    ((1000.0, 400.0, 600.0), "unreachable"),
    ((500.0, -400.0, 300.0), "outside-travel"),
]


def test_nothing_in_names_is_markup_and_nothing_is_outside() -> None:
    table = ("Not <i>reached</i>", ("target",), [("<img src=x>",)], "& so on")
    page = report_html(SURVEY, ARM, [("targets", 3)], [table], POINTS, [], "1 < 2").decode()
    for raw in ("<script", "<img", "<i>", "a<b", "1 < 2", "href", "url(", "style="):
        assert raw not in page
    assert "style-src 'sha256-" in POLICY
    assert page.count("<thead>") == 2  # repeated by printers on each page a list goes on over
    for digest in ("12ab", "34cd", "56ef"):
        assert digest in page


def test_on_a_phone_it_has_a_margin_and_drawings_no_blank_space() -> None:
    page = report_html(SURVEY, ARM, [], [], POINTS, [], "").decode()
    style = page.partition("<style>")[2].partition("</style>")[0]
    assert '<meta name="viewport" content="width=device-width">' in page
    assert "@media screen{body{padding:" in style
    # What is wider than the screen moves by itself, not the page with it.
    assert "table.list{display:block;overflow-x:auto}" in style
    # Or printers cut the right-hand lines of tables off.
    assert "padding-right:" in style.partition("@media print")[2]
    (drawings,) = re.findall(r"figure svg\{([^}]*)\}", style.partition("@media print")[0])
    # Narrower than it is on paper, a drawing keeps its shape only where its height follows.
    assert {"max-width:100%", "height:auto"} <= set(drawings.split(";"))


def test_views_are_to_the_scale_they_say() -> None:
    figure = two_views(POINTS, "mm", "base")
    (ratio,) = re.findall(r"Scale 1:(\d+)", figure)
    front, above = re.findall(r"<svg viewBox.*?</svg>", figure, re.DOTALL)[:2]
    for view, up in ((front, 2), (above, 1)):
        places = [_mark(view, mark) for mark in ("m-.8 0a", "m-.9-.9l", "m-.8-.8h")]
        for place, (at, _) in zip(places, POINTS, strict=True):
            across = (place[0] - places[0][0]) * float(ratio)
            upward = (places[0][1] - place[1]) * float(ratio)
            assert across == pytest.approx(at[0], abs=0.011 * float(ratio))
            assert upward == pytest.approx(at[up], abs=0.011 * float(ratio))


@pytest.mark.parametrize("spread", [0.0, 1e-9, 1.0, 1e9])
@pytest.mark.parametrize("length", ["mm", "m", "in"])
def test_any_spread_fits_on_a_page(spread: float, length: str) -> None:
    points = [((spread * n, -spread * n, 5.0), "not-found") for n in range(3)]
    figure = two_views(points, length, "base")
    sizes = re.findall(r'width="([\d.]+)mm" height="([\d.]+)mm"', figure)
    assert len(sizes) == 2
    assert all(float(wide) <= 178 for wide, _ in sizes)
    assert sum(float(high) for _, high in sizes) <= 235
    assert figure.count("<text") < 120


def _mark(view: str, mark: str) -> tuple[float, float]:
    ((x, y),) = re.findall(rf"M([-\d.]+) ([-\d.]+){re.escape(mark)}", view)
    return float(x), float(y)


def test_of_many_places_marks_are_smaller_and_where_they_were() -> None:
    """A thousand places on a grid and one that is not reached, beside few of the same spread."""
    span = np.linspace(-700.0, 700.0, 63)
    grid = [((float(x), float(y), 0.0), "reachable") for x in span for y in span]
    corners = [grid[0], grid[62], grid[-63], grid[-1], ((1.0, 2.0, 3.0), "unreachable")]
    few, many = (two_views(points, "mm", "base") for points in (corners, [*corners, *grid]))
    for verdict, size in ((r"m-.8 0a", 0.4), (r"m-.9-.9l", 0.7)):
        place = rf"M([-.0-9]+) ([-.0-9]+){re.escape(verdict)}"
        expected = np.array(re.findall(place, few.split("<figcaption>")[0]), float)
        (above, below) = re.findall(rf'<path transform="scale\({size}\)" d="(.*?)"', many)
        found = np.concatenate([np.array(re.findall(place, d), float) for d in (above, below)])
        shown = {tuple(np.round(at, 1)) for at in found * size}
        assert all(min(np.hypot(*(at - np.array(one))) for one in shown) < 0.1 for at in expected)
        assert len(found) == (2 * (len(grid) + 4) if size == 0.4 else 2)
    assert "transform" not in few


@pytest.mark.parametrize("apart", [0.0, 5e-324, 1e-12, 1e-6, 1e12])
def test_places_however_near_or_far_are_drawn(apart: float) -> None:
    figure = two_views([((0.0, 0.0, 0.0), "reachable"), ((apart,) * 3, "refused")], "in", "base")
    assert figure.count("<path") >= 4
    assert "nan" not in figure
