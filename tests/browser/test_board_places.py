"""Which arm stands where on the board, and what is left of an arm that is stored no more.

Left out: what a card says (test_board.py).
"""

import httpx

from tests.browser.chromium import Look, Screen
from tests.browser.hall import PATTERN
from tests.browser.test_every_page import READY
from tests.conftest import ServerProcess

PLACES = (
    "return [...document.querySelectorAll('#cards > li')].map((one) =>"
    " one.querySelector('[data-arm]')?.dataset.arm ?? '-')"
)


def test_the_address_says_who_stands_where(screen: Screen, hall: ServerProcess) -> None:
    places = ["stale", "-", "regular", "nobody"]
    screen.open(f"{hall.url}/?arms={','.join(places)}&columns=4", Look(1280, 800), ready=READY)
    assert screen.run(PLACES) == places
    nobody = screen.run("return document.querySelector('[data-arm=nobody]').dataset.state")
    assert nobody == "bad"
    assert "no such arm" in screen.run(
        "return document.querySelector('[data-arm=nobody]').innerText"
    )
    left = "[...document.querySelectorAll('[data-arm]')].map((x) => x.getBoundingClientRect().left)"
    stale, regular, _ = screen.run(f"return {left}")
    # One place between them stays empty.
    width = screen.run("return document.querySelector('[data-arm]').getBoundingClientRect().width")
    assert regular - stale > 1.9 * width


def test_new_arms_come_last_and_removed_ones_leave_a_gap(
    screen: Screen, empty: ServerProcess
) -> None:
    server = empty
    with httpx.Client(base_url=server.url) as client:
        for name in ("b-arm", "d-arm"):
            client.post("/v1/arms", json={**PATTERN, "name": name}).raise_for_status()
        screen.open(f"{server.url}/", Look(1280, 800), ready=READY)
        assert screen.run(PLACES) == ["b-arm", "d-arm"]
        client.delete("/v1/arms/b-arm", headers={"if-match": "*"}).raise_for_status()
        client.post("/v1/arms", json={**PATTERN, "name": "a-arm"}).raise_for_status()
        # Values of an arm that has no place yet have the list read again at once.
        body = {"joints": [10, -80, 80, 20, -40, 15], "period_ms": 3_600_000}
        client.put("/v1/arms/a-arm/joints", json=body).raise_for_status()
        screen.until("document.querySelectorAll('#cards > li').length === 3")
        assert screen.run(PLACES) == ["-", "d-arm", "a-arm"]
        # Of an arm that told where it is, its end is told too.
        client.delete("/v1/arms/a-arm", headers={"if-match": "*"}).raise_for_status()
        screen.until("!document.querySelector('[data-arm=a-arm]')")
        assert screen.run(PLACES) == ["-", "d-arm", "-"]
        client.post("/v1/arms", json={**PATTERN, "name": "a-arm"}).raise_for_status()
        screen.open(f"{server.url}/", Look(1280, 800), ready=READY)
        assert screen.run(PLACES) == ["a-arm", "d-arm"]
        for name in ("a-arm", "d-arm"):
            client.delete(f"/v1/arms/{name}", headers={"if-match": "*"}).raise_for_status()
