"""The sheet as a drawing: all that is written or filled is on the paper, and nothing ever moves.

Idea: the canvas' own calls are noted from before the page begins, with the place on the paper of
each text and each filled outline. Left out: numbers (test_sheet_page.py).
"""

import base64
import re
from collections.abc import Iterator

import httpx
import pytest

from tests.browser.chromium import Look, Screen
from tests.browser.hall import PATTERN, feed
from tests.browser.test_every_page import READY
from tests.conftest import ServerProcess

# Of each canvas: what was drawn since it was wiped; boxes in CSS pixels, the paper's size last.
NOTED = """
window.noted = new Map();
const pen = CanvasRenderingContext2D.prototype;
const on = (context, points) => {
  const m = context.getTransform();
  return points.map(([x, y]) => [m.a * x + m.c * y + m.e, m.b * x + m.d * y + m.f]);
};
const note = (context, what, points) => {
  const list = window.noted.get(context.canvas) ?? [];
  window.noted.set(context.canvas, [...list, [what, on(context, points)]]);
};
const wrap = (name, before) => {
  const drawn = pen[name];
  pen[name] = function (...values) { before(this, ...values); return drawn.apply(this, values); };
};
wrap("clearRect", (context) => { window.noted.set(context.canvas, []); context.trail = []; });
wrap("beginPath", (context) => { context.trail = []; });
for (const name of ["moveTo", "lineTo"]) wrap(name, (context, x, y) => context.trail.push([x, y]));
wrap("fill", (context) => { if (context.trail.length) note(context, "filled", context.trail); });
wrap("fillText", (context, text, x, y) => {
  const size = context.measureText(text);
  const [left, right] = [x - size.actualBoundingBoxLeft, x + size.actualBoundingBoxRight];
  const [top, bottom] = [y - size.actualBoundingBoxAscent, y + size.actualBoundingBoxDescent];
  note(context, text, [[left, top], [right, top], [right, bottom], [left, bottom]]);
});
window.outside = () => [...window.noted].flatMap(([canvas, list]) => list
  .filter(([, points]) => points.some(([x, y]) =>
    x < 0 || y < 0 || x > canvas.width || y > canvas.height))
  .map(([what, points]) => `${canvas.dataset.view}: ${what} at ${JSON.stringify(points)} of ${
    canvas.width} x ${canvas.height}`));
window.drawnTexts = () =>
  [...window.noted.values()].flat().filter(([what]) => what !== "filled").length;
"""
FRAME = "return new Promise((done) => requestAnimationFrame(() => setTimeout(done, 0)))"
PLACES = """
return [...document.querySelectorAll("main button, main input, main select, main summary, main a")]
  .filter((one) => one.checkVisibility()).map((one) => Math.round(one.getBoundingClientRect().top
  + scrollY)).join(" ")
"""
READINGS = "document.getElementById('readings').innerText"
TYPED = """
const fields = document.querySelectorAll("#travel input"), said = arguments[0].split(",");
fields.forEach((one, i) => { one.value = said[i]; });
fields[0].dispatchEvent(new Event("input", { bubbles: true }));
"""
# Notes may scroll; nothing else that has a size of its own may be too small for what it says.
OVERFLOWING = """
return [...document.querySelectorAll("#state, .paper section:not(.view)")]
  .filter((one) => one.scrollHeight > one.clientHeight + 1 || one.scrollWidth > one.clientWidth + 1)
  .map((one) => `${one.id || one.className}: ${one.innerText}`)
"""
POSTURES = {
    "wrist singular": "10,-80,80,20,0,15",
    "upright, singular": "0,-90,0,0,0,0",
    "stretched forward": "0,0,-90,0,20,0",
    "beyond travel": "172,-80,80,20,-40,15",
    "behind": "165,-30,60,-90,90,100",
}


@pytest.fixture
def noted(screen: Screen) -> Iterator[Screen]:
    """The tab, with each call of a canvas noted."""
    script = screen.tell("Page.addScriptToEvaluateOnNewDocument", source=NOTED)
    yield screen
    screen.tell("Page.removeScriptToEvaluateOnNewDocument", **script)


@pytest.mark.parametrize("width", [390, 1280])
def test_all_that_is_written_is_on_the_paper(
    noted: Screen, hall: ServerProcess, demo: ServerProcess, width: int
) -> None:
    look = Look(width, 900)
    noted.open(f"{hall.url}/arms/never", look, ready=READY)
    for name, joints in POSTURES.items():
        before = noted.run(f"return {READINGS}")
        noted.run(TYPED, joints)
        noted.until(f"{READINGS} !== `{before}`")
        noted.run(FRAME)
        assert noted.run("return outside()") == [], name
        assert noted.run("return drawnTexts()") > 30
        noted.picture(f"sheet-{name.replace(' ', '-')}-{width}", whole=True)
    for address in (f"{demo.url}/arms/wash-gantry", f"{hall.url}/arms/stale"):
        noted.open(address, look, ready=READY)
        noted.run(FRAME)
        assert noted.run("return outside()") == []
        assert noted.run("return drawnTexts()") > 15


STANDING = "#state .word"
# Joint 5 goes so little that its top speed is kept. What the page says, and a part of its notes.
STATES: list[tuple[str, str, tuple[float, ...], dict[str, object]]] = [
    ("Live", "Regular", (10.0, -80.0, 80.0, 20.0, 12.0, 15.0), {}),
    ("Live", "Near singular (wrist", (10.0, -80.0, 80.0, 20.0, 2.0, 15.0), {}),
    ("Live", "Singular (wrist", (10.0, -80.0, 80.0, 20.0, 0.0, 15.0), {}),
    ("Uncertain", "beyond its travel limit", (170.0, -80.0, 80.0, 20.0, 0.0, 15.0), {}),
    ("Stale", "stopped", (10.0, -80.0, 80.0, 20.0, 0.0, 15.0), {"period_ms": 20}),
]


@pytest.mark.parametrize("look", [Look(390, 844), Look(1280, 800), Look(1920, 1080)], ids=str)
def test_nothing_moves_whatever_comes(screen: Screen, demo: ServerProcess, look: Look) -> None:
    """What is to be pressed stays where it is: notes, states and sentences have their room."""
    with httpx.Client(base_url=demo.url) as client:
        client.post("/v1/arms", json={**PATTERN, "name": "placed"}).raise_for_status()
        try:
            screen.open(f"{demo.url}/arms/placed", look, ready=READY)
            places = screen.run(PLACES)
            for word, said, joints, further in STATES:
                feed(client, "placed", joints, simulated=True, **further)
                screen.until(f"document.querySelector('{STANDING}').textContent === '{word}'")
                screen.until(f"document.getElementById('says').textContent.includes('{said}')")
                assert screen.run(PLACES) == places, (word, said)
                assert screen.run(OVERFLOWING) == [], (word, said)
            for joints in ("10,-80,80,20,-40,15", "none,-80,80,20,-40,15"):
                screen.run(TYPED, joints)
                screen.until(f"document.querySelector('{STANDING}').textContent === 'By hand'")
                assert screen.run(PLACES) == places, joints
            assert screen.run("return document.getElementById('problem').textContent") != ""
        finally:
            client.delete("/v1/arms/placed", headers={"If-Match": "*"}).raise_for_status()


def test_a_sheet_is_printed_on_one_side_in_ink(noted: Screen, hall: ServerProcess) -> None:
    """A4 across, whatever the screen: drawn anew for that paper, dark on light, and then back."""
    noted.open(f"{hall.url}/arms/near", Look(1280, 800, "dark"), ready=READY)
    ink = "getComputedStyle(document.documentElement).getPropertyValue('--ink').trim()"
    wide = "document.querySelector('[data-view=plan]').clientWidth"
    noted.run(
        "window.inks = []; matchMedia('print').addEventListener('change', () =>"
        f" window.inks.push([{ink}, {wide}, outside()]))"
    )
    pdf = base64.b64decode(noted.tell("Page.printToPDF", preferCSSPageSize=True)["data"])
    assert len(re.findall(rb"/Type /Page\b", pdf)) == 1
    assert re.search(rb"/MediaBox \[0 0 841\.\d+ 59[45]", pdf)
    noted.run(FRAME)
    (printed, width, outside), (shown, *_) = noted.run("return window.inks")
    assert (printed, outside) == ("#000", [])
    assert shown != printed
    assert width < noted.run(f"return {wide}")
