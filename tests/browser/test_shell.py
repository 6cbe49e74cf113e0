"""What surrounds the pages: paper, connection, frames of other programs, wrong names, the keyboard.

Left out: what a page shows of an arm (the modules named after the pages).
"""

import re

import httpx
import pytest

from tests.browser.chromium import Look, Screen
from tests.browser.hall import HALL, fill
from tests.browser.test_every_page import READY
from tests.browser.wire import wire_to
from tests.conftest import ServerProcess

GROUND = "getComputedStyle(document.documentElement).backgroundColor"
CONNECTION = "document.querySelector('#connection').textContent"
PAGES = ("/", "/arms/regular", "/arms/regular/reach")


@pytest.mark.parametrize("path", PAGES)
def test_cautions_stand_below_and_paper_is_chosen_kept_and_given_back(
    screen: Screen, hall: ServerProcess, path: str
) -> None:
    """By hand it is the other one, also on the next page; ``auto`` follows the screen again."""
    screen.open(hall.url + path, Look(theme="dark"), ready=READY)
    footer = screen.run("return document.querySelector('footer').innerText")
    assert "Not a safety function" in footer
    assert re.search(r"Armspan \d", footer)
    dark = screen.run(f"return {GROUND}")
    choose = "const choice = document.querySelector('#theme-choice'); choice.value = '{}'; "
    choose += "choice.dispatchEvent(new Event('change', {{ bubbles: true }}))"
    screen.run(choose.format("light"))
    light = screen.until(f"{GROUND} !== '{dark}' && {GROUND}")
    screen.open(f"{hall.url}/arms/near", Look(theme="dark"), ready=READY, fresh=False)
    assert screen.run(f"return {GROUND}") == light
    screen.run(choose.format("auto"))
    assert screen.until(f"{GROUND} === '{dark}'")
    screen.look(Look(theme="light"))
    assert screen.until(f"{GROUND} === '{light}'")


def test_the_first_stop_leads_past_the_header(screen: Screen, hall: ServerProcess) -> None:
    screen.open(f"{hall.url}/", ready=READY)
    screen.press("Tab")
    assert screen.run("return document.activeElement.getAttribute('href')") == "#content"
    screen.press("Enter", "Tab")
    assert screen.run("return document.querySelector('main').contains(document.activeElement)")


@pytest.mark.parametrize("path", PAGES)
def test_a_bare_page_keeps_one_caution(screen: Screen, hall: ServerProcess, path: str) -> None:
    screen.open(f"{hall.url}{path}?bare", ready=READY)
    text = screen.text()
    assert "Not a safety function" in text, "one caution stays, however small the frame"
    assert "Local codes" not in text
    assert not screen.run("return document.querySelector('nav')?.checkVisibility() ?? false")


def test_a_wrong_name_shows_the_nearest(screen: Screen, hall: ServerProcess) -> None:
    address = f"{hall.url}/arms/singulr"
    answer = httpx.get(address)
    assert answer.status_code == 404
    assert answer.headers["content-type"].startswith("text/html")
    screen.open(address)
    links = screen.run(
        "return [...document.querySelectorAll('main a')].map((one) => one.getAttribute('href'))"
    )
    assert "/arms/singular" in links
    assert "singulr" in screen.text()


@pytest.mark.parametrize(
    "name", ["<script>document.title='taken'<%2fscript>", "%22%3E%3Csvg%20onload=x%3E", "..", "%00"]
)
def test_a_hostile_name_is_only_words(screen: Screen, hall: ServerProcess, name: str) -> None:
    screen.open(f"{hall.url}/arms/{name}")
    assert screen.run("return document.title") != "taken"
    assert (
        screen.run("return document.querySelectorAll('main script, main svg, main img').length")
        == 0
    )


def test_a_server_started_anew_is_taken_up(
    screen: Screen, hall: ServerProcess, empty: ServerProcess
) -> None:
    """It counts afresh, and knows nothing of arms that were told before."""
    near = "document.querySelector('[data-arm=\"near\"]')"
    with wire_to(hall.port) as wire, httpx.Client(base_url=empty.url) as client:
        screen.open(wire.url, Look(1280, 800), ready=READY)
        assert screen.run(f"return {CONNECTION}") == ""
        assert screen.run(f"return {near}.dataset.state") == "good"
        wire.cut()
        screen.until(f"/gone since \\d\\d:\\d\\d/.test({CONNECTION})")
        assert screen.run(f"return {near}.dataset.state") == "stale"
        screen.picture("gone")
        fill(empty.url, {"near": HALL["near"]})
        wire.mend(empty.port)
        screen.until(f"{near}.dataset.state === 'good'")
        screen.until("document.querySelectorAll('[data-arm]').length === 1")
        assert "gone since" not in screen.run(f"return {CONNECTION}")
        client.delete("/v1/arms/near", headers={"if-match": "*"}).raise_for_status()


@pytest.mark.parametrize("path", PAGES[1:])
def test_a_server_that_goes_is_missed_and_one_that_comes_back_is_taken_up(
    screen: Screen, hall: ServerProcess, path: str
) -> None:
    with wire_to(hall.port) as wire:
        screen.open(wire.url + path, Look(1280, 800), ready=READY)
        assert screen.run(f"return {CONNECTION}") == ""
        top = "document.querySelector('main').getBoundingClientRect().top"
        before = screen.run(f"return {top}")
        wire.cut()
        screen.until(f"/gone since \\d\\d:\\d\\d/.test({CONNECTION})")
        assert screen.run(f"return {top}") == before, "what is below the line does not move"
        screen.picture(f"gone{path.replace('/', '-').rstrip('-')}")
        told = [one for one in screen.told() if one.role == "status"]
        assert told, "the line is told to a screen reader"
        wire.mend()
        screen.until(f"!/gone since/.test({CONNECTION})")
