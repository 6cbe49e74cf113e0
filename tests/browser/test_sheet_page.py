"""The sheet of an arm as who commissions it uses it: by hand, turned, other words, texts, table.

Numbers are those the interface gives. Left out: looks (test_every_page.py), live states (board).
"""

import httpx
import numpy as np
import pytest

from tests.browser.chromium import Look, Screen
from tests.browser.hall import PATTERN
from tests.browser.test_every_page import READY
from tests.conftest import ServerProcess

ARM = "housing-loader"
JOINTS = [25, -70, 95, 30, -40, 15]
PICTURE = "return document.querySelector('canvas[data-view={}]').toDataURL()"


@pytest.fixture
def sheet(screen: Screen, demo: ServerProcess) -> Screen:
    """The sheet at joint values that were typed: nothing moves."""
    q = ",".join(map(str, JOINTS))
    address = f"{demo.url}/arms/{ARM}?q={q}&tool=gripper&frame=base&form=xyz-fixed&units=mm-deg"
    screen.open(address, Look(1280, 800), ready=READY)
    return screen


def readings(sheet: Screen) -> list[float]:
    text = sheet.run("return document.getElementById('readings').innerText")
    words = text.replace("\u2212", "-").split()
    return [float(word) for word in words if word.lstrip("-").replace(".", "", 1).isdigit()]


def asked(server: ServerProcess, **said: object) -> list[float]:
    query = {"q": ",".join(map(str, JOINTS)), "tool": "gripper", "form": "xyz-fixed", **said}
    told = httpx.get(f"{server.url}/v1/arms/{ARM}/pose", params=query).json()["poses"][0]
    return [*told["position"], *told["orientation"]["values"]]


def test_typed_joint_values_show_the_pose_of_the_interface(
    sheet: Screen, demo: ServerProcess
) -> None:
    # As printed: a tenth of a millimetre, a hundredth of a degree.
    assert readings(sheet) == pytest.approx(asked(demo), abs=0.0501)


def test_a_nudge_moves_one_joint_by_a_step(sheet: Screen, demo: ServerProcess) -> None:
    sheet.run("document.querySelectorAll('#travel button')[1].click()")
    sheet.until("new URLSearchParams(location.search).get('q')?.startsWith('26,')")
    expected = asked(demo, q=",".join(map(str, [26, *JOINTS[1:]])))
    shown = f"{expected[1]:.1f}".replace("-", "\u2212")
    sheet.until(f"document.getElementById('readings').innerText.includes('{shown}')")
    assert readings(sheet) == pytest.approx(expected, abs=0.0501)


def test_the_free_view_turns_by_arrow_keys_and_the_others_stay(sheet: Screen) -> None:
    free, plan = sheet.run(PICTURE.format("free")), sheet.run(PICTURE.format("plan"))
    sheet.run("document.querySelector('canvas[data-view=free]').focus()")
    sheet.press("ArrowRight", "ArrowRight")
    sheet.run("return new Promise((done) => requestAnimationFrame(() => setTimeout(done)))")
    assert sheet.run(PICTURE.format("free")) != free
    assert sheet.run(PICTURE.format("plan")) == plan


def test_what_is_chosen_stands_in_the_address(sheet: Screen, demo: ServerProcess) -> None:
    sheet.run(
        "const one = document.getElementById('frame'); one.value = 'fixture-a';"
        "one.dispatchEvent(new Event('change', { bubbles: true }))"
    )
    sheet.until("new URLSearchParams(location.search).get('frame') === 'fixture-a'")
    expected = asked(demo, frame="fixture-a")
    shown = f"{expected[0]:.1f}".replace("-", "\u2212")
    sheet.until(f"document.getElementById('readings').innerText.includes('{shown}')")
    assert readings(sheet) == pytest.approx(expected, abs=0.0501)


def test_typed_joint_values_stay_where_they_are_in_other_units(
    sheet: Screen, demo: ServerProcess
) -> None:
    choose = (
        "const one = document.getElementById('units'); one.value = arguments[0];"
        "one.dispatchEvent(new Event('change', { bubbles: true }))"
    )
    sheet.run(choose, "m-rad")
    expected = asked(demo, q=",".join(map(str, np.radians(JOINTS))), units="m-rad")
    shown = f"{expected[0]:.4f}".replace("-", "\u2212")
    sheet.until(f"document.getElementById('readings').innerText.includes('{shown}')")
    assert readings(sheet) == pytest.approx(expected, abs=0.000051)
    q = sheet.run("return new URLSearchParams(location.search).get('q')")
    assert [float(one) for one in q.split(",")] == pytest.approx(np.radians(JOINTS), rel=1e-15)
    sheet.run(choose, "mm-deg")
    sheet.until(f"new URLSearchParams(location.search).get('q') === '{','.join(map(str, JOINTS))}'")


def test_the_texts_name_the_address_to_ask(sheet: Screen) -> None:
    sheet.run("document.getElementById('texts').open = true")
    # Addresses stand at once, the texts when they were answered.
    for part in (f"/v1/arms/{ARM}/pose?", "e994bb33"):
        sheet.until(f"document.getElementById('text-blocks').innerText.includes('{part}')")


def test_the_table_is_that_of_the_stored_arm(sheet: Screen, demo: ServerProcess) -> None:
    arm = httpx.get(f"{demo.url}/v1/arms/{ARM}").json()["arm"]
    read = (
        "return [...document.querySelectorAll('#table table')].map((table) =>"
        " [...table.querySelectorAll('tbody tr')].map((row) =>"
        " [...row.children].map((one) => one.textContent)))"
    )
    rows, standing = sheet.run(read)
    assert [row[0] for row in rows] == [str(i + 1) for i in range(len(arm["rows"]))]
    # Where a joint value comes in, and with which sign: axis 3 turns against row 3.
    assert rows[2][2:6] == ["0", "90", "0", "90 \u2212 q3"]
    assert [row[0] for row in standing] == ["base", *arm["tools"], *arm["frames"]]
    assert standing[1][:4] == ["gripper", "1", "flange", "0, 0, 148"]


def test_what_changed_between_two_revisions(screen: Screen, demo: ServerProcess) -> None:
    document = {**PATTERN, "name": "changed"}
    rows = [dict(row) for row in document["rows"]]
    rows[1]["theta"] = -0.35
    tool = {"position": [0, 0, 500], "orientation": {"form": "xyz-fixed", "values": [0, 0, 0]}}
    after = {**document, "rows": rows, "tools": {**document["tools"], "long": tool}}
    with httpx.Client(base_url=demo.url) as client:
        client.post("/v1/arms", json=document).raise_for_status()
        client.put("/v1/arms/changed", json=after, headers={"If-Match": "*"}).raise_for_status()
        screen.open(f"{demo.url}/arms/changed", ready=READY)
        screen.run("document.querySelectorAll('details').forEach((one) => { one.open = true; })")
        told = screen.until("document.querySelector('.changes tbody')?.innerText")
        client.delete("/v1/arms/changed", headers={"If-Match": "*"}).raise_for_status()
    assert [line.split("\t") for line in told.splitlines()] == [
        ["rows 2 theta", "0", "\u22120.35"],
        ["tools long position", "not there", "0, 0, 500"],
        ["tools long orientation form", "not there", "xyz-fixed"],
        ["tools long orientation values", "not there", "0, 0, 0"],
    ]


def test_a_revision_stored_meanwhile_is_shown_whole(screen: Screen, demo: ServerProcess) -> None:
    name = "measured-anew"
    stored = httpx.post(f"{demo.url}/v1/arms", json={**PATTERN, "name": name})
    assert stored.status_code == 201
    q = ",".join(map(str, JOINTS))
    screen.open(f"{demo.url}/arms/{name}?q={q}", Look(1280, 800), ready=READY)
    table = "document.getElementById('table').textContent"
    assert "123.456" not in screen.run(f"return {table}")
    first, *others = PATTERN["rows"]
    tools = {"probe-tip": {**next(iter(PATTERN["tools"].values())), "number": 77}}
    document = {**PATTERN, "name": name, "rows": [{**first, "a": 123.456}, *others]}
    document["tools"] = {**PATTERN["tools"], **tools}
    headers = {"If-Match": stored.headers["etag"]}
    assert httpx.put(f"{demo.url}/v1/arms/{name}", json=document, headers=headers).is_success
    screen.requests()
    screen.run("document.querySelectorAll('#travel button')[1].click()")
    screen.until(f"{table}.includes('123.456') && {table}.includes('probe-tip')")
    screen.until("document.querySelectorAll('#revisions tbody th').length >= 2")
    assert screen.run("return document.querySelector('#tool option[value=probe-tip]') !== null")
    assert screen.run("return document.getElementById('revision').innerText") == "2"
    # What stands round the arm may have moved with it.
    assert [one for one in screen.requests() if one.endswith("/v1/frames")]
    # What was chosen asks once, not once for each time the choices were filled.
    screen.requests()
    screen.run(
        "const tool = document.getElementById('tool'); tool.value = 'probe-tip';"
        "tool.dispatchEvent(new Event('change'))"
    )
    screen.until("location.search.includes('tool=probe-tip')")
    asked = [one for one in screen.requests() if "/live/stream" in one]
    assert len(asked) <= 1, asked
