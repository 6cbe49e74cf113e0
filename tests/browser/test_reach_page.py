"""The reach page as a planner uses it: a pasted list, its verdicts, one chosen, a long one, faults.

Verdicts are those the interface gives to the same places. Left out: looks (test_every_page.py).
"""

import json
import math
import re
from collections.abc import Iterator
from typing import Any

import httpx
import pytest

from tests.browser.chromium import Look, Screen
from tests.browser.test_every_page import READY
from tests.conftest import ServerProcess

ARM = "housing-loader"
ROWS = "document.querySelectorAll('#table tbody tr')"
ANSWERED = f"{ROWS}.length && ![...{ROWS}].some((row) => row.dataset.verdict === 'open')"
LIST = "const list = document.getElementById('list'); list.value = values[0];"
PASTE = LIST + "list.dispatchEvent(new Event('input', { bubbles: true }));"
PLACES = {
    "bench": [900, 300, 700, 180, 0, 90],
    "shelf": [1600, 0, 700, 180, 0, 90],
    "behind": [-700, 0, 700, 180, 0, 90],
}


# Between the page and its server: an envelope waits until the test lets it go, and then is as said;
# the question about a single place can be refused. What was asked is counted.
BETWEEN = """
window.envelopes = { asked: 0, left: 0, answer: new Promise((done) => { window.letGo = done; }) };
window.singles = null;
const ask = window.fetch;
const told = ([status, body]) => new Response(JSON.stringify(body),
  { status, headers: { "Content-Type": "application/json" } });
window.fetch = (path, how) => {
  if (path.startsWith("/v1/reach/checks") && window.singles && /"solutions":"all"/.test(how.body))
    return Promise.resolve(told(window.singles));
  if (path !== "/v1/reach/envelope") return ask(path, how);
  window.envelopes.asked += 1;
  return new Promise((done, failed) => {
    how.signal.addEventListener("abort", () => {
      window.envelopes.left += 1;
      failed(new DOMException("left", "AbortError"));
    });
    window.envelopes.answer.then((answer) => done(told(answer)));
  });
};
"""
SQUARE = [[0, -900], [900, -900], [900, 900], [0, 900]]
FLAT = {"curves": [{"outer": True, "points": SQUARE}]}
ENVELOPE = {
    "axis": {"point": [0, 0, 0], "direction": [0, 0, 1]},
    "travel": {
        "section": {"kind": "section", "directions": [[1, 0, 0], [0, 0, 1]], **FLAT},
        "plan": {"kind": "plan", "directions": [[1, 0, 0], [0, 1, 0]], **FLAT},
    },
}


def opened(screen: Screen, demo: ServerProcess, query: str = "") -> Screen:
    """Return the reach page of a demonstration arm; no list is left over from before."""
    screen.driver.get(f"{demo.url}/livez")
    screen.run("sessionStorage.clear()")
    screen.open(f"{demo.url}/arms/{ARM}/reach{query}", Look(1280, 800), ready=READY)
    return screen


@pytest.fixture
def page(screen: Screen, demo: ServerProcess) -> Screen:
    """The reach page of a demonstration arm, nothing asked yet."""
    return opened(screen, demo)


@pytest.fixture
def held(screen: Screen, demo: ServerProcess) -> Iterator[Screen]:
    """The same page, for which envelopes wait."""
    script = screen.tell("Page.addScriptToEvaluateOnNewDocument", source=BETWEEN)["identifier"]
    try:
        yield opened(screen, demo)
    finally:
        screen.tell("Page.removeScriptToEvaluateOnNewDocument", identifier=script)


def paste(page: Screen, text: str) -> None:
    page.run(PASTE.replace("values", "arguments"), text)


def lines(places: dict[str, list[int]], separator: str = ",") -> str:
    """Return places as a table without a head line."""
    return "\n".join(separator.join(map(str, [name, *rest])) for name, rest in places.items())


def verdicts(page: Screen) -> list[str]:
    found: list[str] = page.run(f"return [...{ROWS}].map((row) => row.dataset.verdict)")
    return found


def choose(page: Screen, name: str, value: str) -> None:
    """Make a choice of the question, as a person at the field does."""
    page.run(
        "const field = document.querySelector(`#question [name=${arguments[0]}]`);"
        "field.value = arguments[1];"
        "field.dispatchEvent(new Event('change', { bubbles: true }));",
        name,
        value,
    )


def of(module: str, body: str, page: Screen) -> Any:
    """Return what the body of an async function returns, given a module of the pages."""
    script = (
        "const done = arguments[0]; import('/pages/%s').then(async (all) => { %s })"
        ".then((value) => done({ value }), (error) => done({ error: String(error) }));"
    )
    told = page.driver.execute_async_script(script % (module, body))
    assert "error" not in told, told
    return told["value"]


@pytest.fixture(scope="module", autouse=True)
def judged(demo: ServerProcess) -> list[str]:
    """What the interface says of the same places: asked first, for the first question of a server
    waits until the kernels for reach are loaded, and no page is to be waited for so long.
    """
    targets = [
        {
            "name": name,
            "pose": {
                "position": numbers[:3],
                "orientation": {"form": "xyz-fixed", "values": numbers[3:]},
            },
        }
        for name, numbers in PLACES.items()
    ]
    body = {"arm": ARM, "tool": "gripper", "targets": targets}
    answer = httpx.post(f"{demo.url}/v1/reach/checks", json=body, timeout=300).json()
    return [one["verdict"] for one in answer["results"]]


def test_a_pasted_list_is_judged_as_the_interface_does(page: Screen, judged: list[str]) -> None:
    assert len(set(judged)) > 1
    for separator in (",", "\t", ";"):
        paste(page, lines(PLACES, separator))
        page.until(ANSWERED)
        assert verdicts(page) == judged


def test_decimal_commas_of_a_spreadsheet(page: Screen) -> None:
    paste(page, "bench\t900,5\t300,25\t700\t180\t0\t90")
    page.until(ANSWERED)
    assert page.run("return document.querySelector('#table .place.figures').innerText").split() == [
        "900.5",
        "300.3",
        "700.0",
    ]


def test_a_line_that_cannot_be_read_is_told_and_harms_no_other(page: Screen) -> None:
    paste(page, "bench,900,300,700,180,0,90\nnonsense,here\nshelf,1600,0,700,180,0,90")
    page.until(ANSWERED)
    assert verdicts(page) == ["reachable", "unread", "unreachable"]
    names = page.run(f"return [...{ROWS}].map((row) => row.querySelector('.choice').innerText)")
    assert names == ["bench", "nonsense", "shelf"]


def test_a_place_that_cannot_be_come_to_straight_is_no_far_one(page: Screen) -> None:
    head = "name,x,y,z,r1,r2,r3,approach"
    paste(page, f"{head}\nbench,900,300,700,180,0,90,1500\nshelf,1600,0,700,180,0,90,")
    page.until(ANSWERED)
    words = page.run(f"return [...{ROWS}].map((row) => row.querySelector('.verdict b').innerText)")
    assert words == ["no straight approach", "unreachable"]
    page.until("/no straight approach: .*not from 1500 mm/.test(document.body.innerText)")


def test_names_with_markup_stay_words(page: Screen) -> None:
    name = "<img src=x onerror=document.title='taken'>"
    paste(page, f"{name},900,300,700,180,0,90")
    page.until(ANSWERED)
    assert name in page.text()
    assert page.run("return document.title") != "taken"
    assert page.run("return document.querySelectorAll('#table img').length") == 0


def test_another_place_is_chosen_by_the_arrow_key_and_drawn(page: Screen) -> None:
    paste(page, lines(PLACES))
    page.until(ANSWERED)
    drawn = "document.getElementById('drawing').getAttribute('aria-label')"
    page.until(f"{drawn}.includes('bench')")
    page.run("document.querySelector('#table button.choice[aria-pressed=true]').focus()")
    page.press("ArrowDown")
    page.until(f"{drawn}.includes('shelf')")
    # Minus signs are true ones, in sentences of the service too.
    assert "\u2212700.0" in page.text()
    shown = page.run("return document.querySelector('main').innerText")
    assert re.findall(r"(?<![\w.])-\d", shown) == []
    edge = page.run(
        "const sheet = document.getElementById('drawing');"
        "const { data } = sheet.getContext('2d').getImageData(0, 0, 4, sheet.height);"
        "return data.some((one) => one);"
    )
    assert not edge, "something is cut at the edge of the drawing"


def test_paper_is_white_also_where_the_screen_is_dark(page: Screen) -> None:
    page.look(Look(1280, 800, theme="dark"))
    dark = [{"name": "prefers-color-scheme", "value": "dark"}]
    ink = "return getComputedStyle(%s).getPropertyValue('--ink')"
    on_screen = page.run(ink % "document.documentElement")
    assert page.run(ink % "document.getElementById('drawing')") == on_screen
    # A canvas is drawn before the page is laid out for print.
    page.run("dispatchEvent(new Event('beforeprint'))")
    assert page.run(ink % "document.getElementById('drawing')") == "#000"
    page.tell("Emulation.setEmulatedMedia", media="print", features=dark)
    assert page.run(ink % "document.documentElement") == "#000"
    page.tell("Emulation.setEmulatedMedia", media="", features=dark)
    page.run("dispatchEvent(new Event('afterprint'))")
    assert page.run(ink % "document.getElementById('drawing')") == on_screen


def test_what_is_reachable_with_reserve_is_plainly_another_thing(page: Screen) -> None:
    paste(page, "bench,900,300,700,180,0,90\nlined-up,900,0,1000,0,90,0")
    page.until(ANSWERED)
    assert verdicts(page) == ["reachable", "reachable"]
    good, near = page.run(
        f"return [...{ROWS}].map((row) => [row.querySelector('.verdict').innerText,"
        "row.querySelector('.verdict path').getAttribute('d'),"
        "getComputedStyle(row.querySelector('.verdict')).outlineStyle,"
        "row.querySelector('.why').innerText])"
    )
    assert good[0] != near[0]
    assert good[1] != near[1]
    assert (good[2], near[2]) == ("none", "dashed")
    assert near[3].startswith("Near singular (wrist)")


def test_verdicts_never_wait_for_an_envelope(held: Screen) -> None:
    """It waits for ever here; the page is ready, gives it up for verdicts, and asks again."""
    held.until("envelopes.asked === 1")
    paste(held, lines(PLACES))
    held.until(ANSWERED)
    assert held.run("return envelopes.left") >= 1
    held.until("envelopes.asked > envelopes.left")
    held.run("letGo([200, arguments[0]])", ENVELOPE)
    held.until("document.getElementById('legend').dataset.envelope === 'here'")


def test_an_envelope_goes_with_its_question_and_a_refusal_is_said(held: Screen) -> None:
    state = "return document.getElementById('legend').dataset.envelope"
    held.run("letGo([200, arguments[0]])", ENVELOPE)
    held.until("document.getElementById('legend').dataset.envelope === 'here'")
    held.run("envelopes.answer = new Promise((done) => { window.letGo = done; })")
    choose(held, "units", "m-rad")
    assert held.run(state) == "waits", "at once, and not when the next is there"
    refused = {"code": "unusable-value", "detail": "joint 2 slides at -0.5 m"}
    held.run("letGo([422, arguments[0]])", refused)
    held.until("document.getElementById('legend').dataset.envelope === 'refused'")
    assert "joint 2 slides at \u22120.5 m" in held.text()
    choose(held, "units", "mm-deg")
    assert held.run(state) == "here", "what was told is not asked again"
    assert held.run("return envelopes.asked") == 2


def test_a_single_place_that_cannot_be_asked_about_says_so(held: Screen) -> None:
    held.run("window.singles = [503, { code: 'not-available', detail: 'too much at once' }]")
    paste(held, lines(PLACES))
    held.until("document.querySelector('#target .refused')")
    assert "too much at once" in held.text()
    assert verdicts(held)[0] == "reachable"


def test_the_last_question_waits_for_all_others(page: Screen) -> None:
    """The envelope's turn, by itself: never while something is open, again after a break."""
    body = """
      const turn = all.turns(), seen = [];
      let open, answered;
      const begun = new Promise((done) => { open = done; });
      const first = turn.first(() => new Promise((done) => { answered = done; }));
      turn.last((signal) => {
        seen.push("last");
        return new Promise((done) => {
          signal.addEventListener("abort", () => { seen.push("left"); done(); });
          open();
        });
      });
      await Promise.resolve();
      seen.push("answered");
      answered();
      await first;
      await begun;
      await turn.first(async () => seen.push("first"));
      await new Promise((done) => {
        turn.last(async () => { seen.push("other"); done(); });
      });
      return seen;
    """
    assert of("reach_turns.js", body, page) == ["answered", "last", "left", "first", "other"]


def test_a_cone_is_asked_in_the_units_of_the_question(page: Screen) -> None:
    body = """
      const place = { line: 1, name: "a", position: [1, 2, 3], turns: [0, 0, 0], freedom: null };
      return ["mm-deg", "m-rad"].map((units) => all.targetsOf([place],
        { form: "xyz-fixed", units, freedom: "cone:30", approach: 0 })[0].freedom.cone);
    """
    assert of("reach_asking.js", body, page) == [30, pytest.approx(math.pi / 6)]


def test_a_survey_with_its_report(page: Screen, demo: ServerProcess, judged: list[str]) -> None:
    many = "\n".join(f"p{k},{700 + k % 300},{k % 400},700,180,0,90" for k in range(600))
    paste(page, many)
    assert page.until(f"{ROWS}.length") == 100
    assert set(verdicts(page)) == {"open"}, "a long list waits for a key"
    paste(page, lines(PLACES))
    solutions = "/of [2-9]/.test(document.querySelector('#target output')?.innerText)"
    page.until(solutions)
    keys = "[...document.querySelectorAll('#outcome button')]"
    page.run(f"{keys}.find((key) => /survey/i.test(key.innerText)).click()")
    page.until("document.querySelector('#survey a[href$=report]')", 180)
    page.until(ANSWERED)
    page.until(solutions)
    found = page.run("return location.search")
    assert "survey=" in found
    places = f"return [...{ROWS}].map((row) => row.querySelector('.place').innerText)"
    typed = page.run(places)
    link = page.run("return document.querySelector('#survey a[href$=report]').href")
    assert httpx.get(link).headers["content-type"].startswith("text/html")
    # Who has the address but not the list sees names and places all the same, and a posture.
    opened(page, demo, found)
    page.until(f"{ROWS}.length === {len(PLACES)}")
    assert verdicts(page) == judged
    names = page.run(f"return [...{ROWS}].map((row) => row.querySelector('.choice').innerText)")
    assert names == list(PLACES)
    assert page.run(places) == typed
    assert "900.0" in typed[0]
    page.until("document.querySelector('#target table.joints')")
    assert re.search(r"The best of [2-9]; a survey keeps no others", page.text())
    # All that is known of them is known: none is asked about again.
    asked = [httpx.URL(one).path for one in page.requests()]
    assert "/v1/reach/checks" not in asked[asked.index(f"/arms/{ARM}/reach") :]
    assert "Method:" not in page.text(), "a survey kept none"

    # Below another arm's name it would be taken for that one's.
    page.open(f"{demo.url}/arms/line-runner/reach{found}", Look(1280, 800), ready=READY)
    page.until("document.querySelector('#survey .refused')")
    link = page.run("return document.querySelector('#survey .refused a').href")
    assert link.endswith(f"/arms/{ARM}/reach{found}")
    assert verdicts(page) == []


def test_what_would_come_nearest_is_told_for_what_it_is(page: Screen) -> None:
    paste(page, lines(PLACES))
    page.until(ANSWERED)
    near = "document.querySelector('#target').innerText.includes('Nearest')"
    told = {}
    for number, name in enumerate(PLACES):
        page.run(f"document.querySelectorAll('#table .choice')[{number}].click()")
        page.until(f"document.querySelector('#target h2').innerText.includes('{name}')")
        told[name] = page.run(f"return {near}")
    # Where travel alone is in the way the nearest place is the place itself.
    assert told == {"bench": False, "shelf": True, "behind": False}
    page.run("document.querySelectorAll('#table .choice')[1].click()")
    page.until("/links allow, travel not looked at:.*xyz-fixed/.test(document.body.innerText)")


def test_what_lies_beyond_a_drawing_is_pointed_at(page: Screen) -> None:
    body = """
      const frame = { left: 0, top: 0, right: 200, bottom: 100 };
      const places = [[50, 50, 7], [900, 50, 7], [100, -80, 7], [900, 1e9, 7]];
      return places.map((at) => all.seenAt(at, frame));
    """
    inside, right, above, far = of("reach_signs.js", body, page)
    assert inside == {"on": [50, 50], "way": None}
    assert right == {"on": [178, 50], "way": [1, 0]}
    assert above == {"on": [100, 22], "way": [0, -1]}
    assert far["way"] == pytest.approx([0, 1], abs=1e-5)
    assert all(0 < value < most for value, most in zip(far["on"], (200, 100), strict=True))


def test_what_a_survey_keeps_says_why_a_yes_has_a_but(page: Screen) -> None:
    body = """
      const kept = (code, state) => ({ verdict: "reachable", code, solutions: [{ state }] });
      return [kept(1, "near"), kept(2, "singular"), kept(3, "regular"), kept(3, "near"),
        kept(0, "regular")].map((result) => all.said({ result }));
    """
    work = "Outside working travel"
    assert of("reach_list.js", body, page) == [
        "Near singular", "Singular", work, f"Near singular; {work}", ""]  # fmt: skip


def test_the_drawing_is_held_as_one_stands_before_the_arm(page: Screen) -> None:
    """Of a base that lies, hangs or stands: up is up, and nothing is seen from below."""
    body = """
      const envelope = { axis: { point: [0, 0, 0], direction: [0, 0, 1] } };
      const plain = (way) => way.map((one) => one + 0);
      const seen = (slides, vertical) =>
        all.viewsOf({ slides, vertical, envelope: slides ? null : envelope })
          .map(({ title, across, up }) => [title, plain(across), plain(up)]);
      return { stands: seen(false, [0, 0, 1]), hangs: seen(false, [0, 0, -1]),
        rises: seen(true, [1, 0, 0]), flies: seen(true, [0, 1, 0]) };
    """
    x, y, z = [1, 0, 0], [0, 1, 0], [0, 0, 1]
    left, down = [-1, 0, 0], [0, 0, -1]
    assert of("reach_views.js", body, page) == {
        "stands": [["section", x, z], ["plan", x, y]],
        "hangs": [["section", left, down], ["plan", left, y]],
        "rises": [["side", down, x], ["end", [0, -1, 0], x]],
        "flies": [["plan", left, z], ["end", x, y]],
    }


def test_views_are_right_handed_and_upright_however_a_base_lies(page: Screen) -> None:
    body = """
      const { cross, dot, unit } = await import("/pages/projection.js");
      const found = [];
      for (let k = 0; k < 500; k++) {
        // Spread evenly over the sphere.
        const z = 1 - (2 * k + 1) / 500, turn = 2.399963 * k, r = Math.sqrt(1 - z * z);
        const vertical = [r * Math.cos(turn), r * Math.sin(turn), z];
        for (const slides of [true, false]) for (const view of all.viewsOf({ slides, vertical })) {
          const { kind, title, across, up, toward, looks, cut } = view;
          found.push({ kind, title, seen: dot(toward, vertical), up: dot(up, vertical),
            off: Math.hypot(...cross(across, up).map((one, i) => one - toward[i])),
            // The plan's arrows are square to the cut, and level with the plan.
            arrows: looks ? Math.abs(dot(looks, cut)) : 0 });
        }
      }
      return found;
    """
    views = of("reach_views.js", body, page)
    assert len(views) == 2000
    assert all(
        one["title"] != other["title"] for one, other in zip(views[::2], views[1::2], strict=True)
    )
    assert max(view["off"] for view in views) < 1e-9
    assert max(view["arrows"] for view in views) < 1e-9
    elevations = [view for view in views if abs(view["seen"]) <= 0.71]
    assert len(elevations) > 500
    assert min(view["up"] for view in elevations) > 0.5
    flat = [view for view in views if abs(view["seen"]) > 0.71 and view["kind"] != "section"]
    assert len(flat) > 300
    assert min(view["seen"] for view in flat) > 0.7


def test_views_are_called_what_they_show(page: Screen) -> None:
    body = """
      // An axis 1 that lies, on an upright base; and a base at 45 deg, of a slide.
      const plan = { directions: [[0, 1, 0], [0, 0, 1]], curves: [] };
      const section = { kind: "section", directions: [[0, 1, 0], [1, 0, 0]], curves: [] };
      const axis = { point: [0, 0, 0], direction: [1, 0, 0] };
      const leaning = { vertical: [0, 0, 1], envelope: { axis, travel: { section, plan } } };
      const half = { slides: true, vertical: [0, -Math.SQRT1_2, Math.SQRT1_2] };
      return [leaning, half].map((one) => all.viewsOf(one).map(({ title }) => title));
    """
    leaning, half = of("reach_views.js", body, page)
    assert leaning == ["section", "end_axis"]
    assert len({*half}) == 2


def test_which_way_is_up_is_told_by_the_base(page: Screen) -> None:
    body = """
      const ask = window.fetch, [held] = [new Response("", { status: 503 })];
      window.fetch = () => { window.fetch = ask; return Promise.resolve(held); };
      const late = await all.verticalOf("line-runner");
      const told = await Promise.all(["housing-loader", "line-runner", "none"].map(all.verticalOf));
      return [late, ...told];
    """
    assert of("frames.js", body, page) == [[1, 0, 0], [0, 0, 1], [1, 0, 0], [0, 0, 1]]


def test_frames_are_those_of_the_revision_that_is_looked_at(page: Screen) -> None:
    body = """
      const ask = window.fetch, asked = [];
      window.fetch = (path, how) => { asked.push(path); return ask(path, how); };
      const desk = all.postures({ name: "housing-loader", revision: 1 });
      await desk.frameInBase({ frame: "world", units: "mm-deg", revision: 7 });
      await desk.frameInBase({ frame: "world", units: "mm-deg" });
      window.fetch = ask;
      return asked.map((path) => new URL(path, location).searchParams.get("revision"));
    """
    assert of("reach_postures.js", body, page) == ["7", "1"]


def test_a_no_that_nothing_proves_stays_open_on_the_way_too(page: Screen) -> None:
    body = """
      const told = (verdict, stage) => all.verdictOf({ result: { verdict, reason: { stage } } });
      return [told("not-found", "approach"), told("unreachable", "approach"),
        told("unreachable", "links"), told("outside-travel", "approach")];
    """
    assert of("reach_list.js", body, page) == [
        *("not found, not ruled out", "no straight approach", "unreachable", "outside travel")
    ]


def test_the_scale_on_paper_is_that_of_the_drawing(page: Screen) -> None:
    paste(page, "bench,900,300,700,180,0,90")
    page.until(ANSWERED)
    scales = """
      const drawing = document.getElementById("drawing");
      return [drawing.clientWidth, drawing.dataset.scale,
        [...document.querySelectorAll("#block dd")].at(-1).innerText];
    """
    width, told, block = page.run(scales)
    assert told == block
    page.run("dispatchEvent(new Event('beforeprint'))")
    page.tell("Emulation.setEmulatedMedia", media="print")
    on_paper, printed, block = page.run(scales)
    assert on_paper == pytest.approx(180 / 25.4 * 96, abs=1), "180 mm, and nothing shrinks it"
    assert printed == block
    page.tell("Emulation.setEmulatedMedia", media="")
    page.run("dispatchEvent(new Event('afterprint'))")
    assert page.run(scales) == [width, told, told]


def test_the_list_asks_for_nothing_else_than_the_interface(page: Screen) -> None:
    page.requests()
    paste(page, "bench,900,300,700,180,0,90")
    page.until(ANSWERED)
    paths = {httpx.URL(address).path for address in page.requests()}
    assert paths, json.dumps(sorted(paths))
    assert all(path.startswith("/v1/") for path in paths)
