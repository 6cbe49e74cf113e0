"""Answers that come late, never, or of another question: what they are not of, they do not touch.

Idea: between a page and its server answers are held until the test lets them go, and it is noted
when the page has read them: nothing here depends on how long anything takes. Left out: streams.
"""

import json
from collections.abc import Iterator
from typing import Any

import httpx
import pytest

from tests.browser.chromium import Look, Screen
from tests.browser.hall import PATTERN, UPRIGHT, feed
from tests.browser.test_every_page import READY
from tests.browser.test_reach_page import ANSWERED, ENVELOPE, PLACES, lines, paste, verdicts
from tests.browser.test_sheet_drawing import FRAME, READINGS
from tests.browser.test_sheet_page import PICTURE
from tests.conftest import ServerProcess

# `late` and `silent`: the paths whose answers are held, or never come; kept for the next page of
# the tab under the same names. Envelopes are told at once, and noted of which revision they are.
BETWEEN = """
const kept = (name) => sessionStorage.getItem(name);
Object.assign(window, { late: kept("late"), silent: kept("silent") });
Object.assign(window, { held: [], open: 0, envelopes: [] });
const ask = window.fetch, fits = (pattern, path) => pattern && new RegExp(pattern).test(path);
const answer = async (path, how) => {
  if (fits(window.silent, path)) throw new TypeError("no answer");
  if (path === "/v1/reach/envelope") {
    window.envelopes.push(JSON.parse(how.body).arm.revision);
    const headers = { "Content-Type": "application/json" };
    return new Response(JSON.stringify(ENVELOPE), { headers });
  }
  return ask(path, how);
};
window.fetch = async (path, how = {}) => {
  if (/stream|progress/.test(path)) return ask(path, how);
  const isLate = fits(window.late, path);
  window.open += 1;
  try {
    const { ok, status, headers, ...told } = await answer(path, how).then(async (found) => (
      { ok: found.ok, status: found.status, headers: found.headers, body: await found.text() }));
    if (isLate) await new Promise((go) => window.held.push({ path, go }));
    return { ok, status, headers, async text() { window.open -= 1; return told.body; } };
  } catch (error) {
    window.open -= 1;
    throw error;
  }
};
window.letGo = (part) => {
  for (const one of window.held.filter(({ path }) => path.includes(part))) one.go();
  window.held = window.held.filter(({ path }) => !path.includes(part));
};
"""
READ = "window.open === window.held.length"
HOLD = "window.late = arguments[0]"
CHOOSE = """
const field = document.getElementById(arguments[0]);
field.value = arguments[1];
field.dispatchEvent(new Event("change", { bubbles: true }));
"""
SURVEY = """
const keys = [...document.querySelectorAll("#outcome button")];
keys.find((one) => /survey/i.test(one.innerText)).click();
"""
ENDED = "document.querySelector('#survey a[href$=report]')"
OTHER = "/list above is another/.test(document.getElementById('survey').innerText)"
KEEP = "sessionStorage.setItem(arguments[0], arguments[1])"


@pytest.fixture
def between(screen: Screen) -> Iterator[Screen]:
    """The tab, for whose pages answers can be held."""
    source = BETWEEN.replace("ENVELOPE", str(ENVELOPE).replace("True", "true"))
    script = screen.tell("Page.addScriptToEvaluateOnNewDocument", source=source)
    yield screen
    screen.run("sessionStorage.clear()")
    screen.tell("Page.removeScriptToEvaluateOnNewDocument", **script)


@pytest.fixture
def arm(demo: ServerProcess) -> Iterator[str]:
    """An arm of its own, which a test can change."""
    with httpx.Client(base_url=demo.url) as client:
        client.post("/v1/arms", json={**PATTERN, "name": "late"}).raise_for_status()
        yield "late"
        client.delete("/v1/arms/late", headers={"If-Match": "*"}).raise_for_status()


def judged(demo: ServerProcess, arm: str, names: list[str]) -> list[str]:
    """Return the verdicts of the interface for an arm as it stands."""
    form = "xyz-fixed"
    targets: list[dict[str, Any]] = [
        {"pose": {"position": place[:3], "orientation": {"form": form, "values": place[3:]}}}
        for place in (PLACES[name] for name in names)
    ]
    body = {"arm": arm, "tool": "gripper", "targets": targets}
    answer = httpx.post(f"{demo.url}/v1/reach/checks", json=body, timeout=300)
    return [one["verdict"] for one in answer.json()["results"]]


def reach(screen: Screen, demo: ServerProcess, arm: str, query: str = "") -> None:
    """Open a reach page; what the tab kept is left to it."""
    address = f"{demo.url}/arms/{arm}/reach{query}"
    screen.open(address, Look(1280, 800), ready=READY, fresh=False)


def test_a_survey_of_a_list_that_was_changed_since_stands_beside_no_other(
    between: Screen, demo: ServerProcess, arm: str
) -> None:
    names = [*PLACES]
    changed = [*names[1:], names[0]]
    expected = judged(demo, arm, changed)
    assert expected != judged(demo, arm, names)
    reach(between, demo, arm)
    paste(between, lines(PLACES))
    between.until(ANSWERED)
    between.run(HOLD, "^/v1/surveys$")
    between.run(SURVEY)
    between.until("held.length")
    paste(between, lines({name: PLACES[name] for name in changed}))
    between.until(ANSWERED)
    assert verdicts(between) == expected
    between.run("letGo('/v1/surveys')")
    between.until(ENDED, 180)
    between.until(READ)
    assert verdicts(between) == expected
    assert between.run(f"return {OTHER}")


def test_a_survey_is_of_the_revision_it_was_made_of(
    between: Screen, demo: ServerProcess, arm: str
) -> None:
    """Loaded again with its list it stands beside it no more; alone it is drawn as it was."""
    before = judged(demo, arm, [*PLACES])
    reach(between, demo, arm)
    paste(between, lines(PLACES))
    between.until(ANSWERED)
    between.run(SURVEY)
    between.until(ENDED, 180)
    query = between.run("return location.search")
    rows = [dict(row) for row in PATTERN["rows"]]
    rows[1]["a"] = 100
    document = {**PATTERN, "name": arm, "rows": rows}
    address = f"{demo.url}/v1/arms/{arm}"
    revision = httpx.get(address).json()["revision"]
    httpx.put(address, json=document, headers={"If-Match": "*"}).raise_for_status()
    after = judged(demo, arm, [*PLACES])
    assert after != before
    between.run(KEEP, "late", "/result$")
    reach(between, demo, arm, query)
    between.until(f"{ANSWERED} && held.length")
    between.run("letGo('/result')")
    between.until(READ)
    assert between.run(f"return {OTHER}")
    assert verdicts(between) == after
    between.run("sessionStorage.clear()")
    reach(between, demo, arm, query)
    between.until(f"{ANSWERED} && {ENDED}")
    assert verdicts(between) == before
    between.until(f"envelopes.at(-1) === {revision}")
    between.until("document.getElementById('legend').dataset.envelope === 'here'")
    between.until(READ)
    assert between.run("return envelopes.at(-1)") == revision


def test_a_sheet_whose_first_question_got_no_answer_asks_again(
    between: Screen, hall: ServerProcess
) -> None:
    between.driver.get(f"{hall.url}/livez")
    between.run(KEEP, "silent", "^/v1/arms/[^/]+$")
    between.open(f"{hall.url}/arms/near", Look(1280, 800), fresh=False)
    between.until("/gone since/.test(document.getElementById('connection').innerText)")
    assert not between.run(f"return {READY}")
    between.run("window.silent = null; sessionStorage.clear()")
    between.until(READY)
    between.until(f"{READINGS}.length > 20")
    assert "gone since" not in between.text()


def test_a_pose_that_is_not_of_the_typed_values_is_not_shown_as_theirs(
    between: Screen, hall: ServerProcess
) -> None:
    between.open(f"{hall.url}/arms/near?q=0,-60,90,0,30,0", Look(1280, 800), ready=READY)
    said = "document.getElementById('state').innerText.toLowerCase()"
    between.until(f"{said}.includes('by hand')")
    shown = between.run(f"return {READINGS}")
    between.run("window.silent = '/pose'")
    between.run("document.querySelectorAll('#travel button')[3].click()")
    between.until(f"!{said}.includes('by hand')")
    between.run("window.silent = null")
    # It is asked again until it is answered.
    between.until(f"{said}.includes('by hand') && {READINGS} !== {json.dumps(shown)}")


def test_a_refusal_stays_beside_a_pose_of_other_values(
    between: Screen, hall: ServerProcess
) -> None:
    between.open(f"{hall.url}/arms/near?q=0,-60,90,0,30,0", Look(1280, 800), ready=READY)
    said = "document.getElementById('state').innerText.toLowerCase()"
    between.until(f"{said}.includes('by hand')")
    between.run("""
      const ask = window.fetch, headers = { "Content-Type": "application/problem+json" };
      const problem = { code: "unusable-value", detail: "no such posture", errors: [] };
      const body = JSON.stringify(problem);
      window.fetch = (path, how) => path.includes("/pose?")
        ? Promise.resolve(new Response(body, { status: 422, headers })) : ask(path, how);
    """)
    between.run("document.querySelectorAll('#travel button')[3].click()")
    between.until(f"{said}.includes('not valid')")
    between.run("return new Promise((done) => setTimeout(done, 600))")
    assert between.run("return document.getElementById('problem').innerText") == "no such posture"


def test_what_was_asked_in_units_chosen_before_is_not_drawn(
    between: Screen, demo: ServerProcess, arm: str
) -> None:
    """Frames and the path, told in metres, come when the sheet is in millimetres again."""
    with httpx.Client(base_url=demo.url) as client:
        feed(client, arm, UPRIGHT)
        feed(client, arm, (12.0, *UPRIGHT[1:]))
    between.open(f"{demo.url}/arms/{arm}?units=mm-deg", Look(1280, 800), ready=READY)
    between.run(HOLD, "/v1/frames|/live/history")
    between.run(CHOOSE, "units", "m-rad")
    between.until("held.length === 2")
    between.run("window.late = null")
    between.run(CHOOSE, "units", "mm-deg")
    between.until(f"{READ} && {READINGS}.includes('mm')")
    between.run(FRAME)
    drawn = between.run(PICTURE.format("plan"))
    for part in ("/v1/frames", "/live/history"):
        between.run("letGo(arguments[0])", part)
        between.until(READ)
        between.run(FRAME)
        assert between.run(PICTURE.format("plan")) == drawn, part
