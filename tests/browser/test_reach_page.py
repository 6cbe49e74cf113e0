"""The reach page as a planner uses it: a pasted list, its verdicts, one chosen, a long one, faults.

Verdicts are those the interface gives to the same places. Left out: looks (test_every_page.py).
"""

import json

import httpx
import pytest

from tests.browser.chromium import Look, Screen
from tests.browser.test_every_page import READY
from tests.conftest import ServerProcess

ARM = "housing-loader"
ROWS = "document.querySelectorAll('#table tbody tr')"
ANSWERED = f"{ROWS}.length && ![...{ROWS}].some((row) => row.className === 'is-open')"
LIST = "const list = document.getElementById('list'); list.value = values[0];"
PASTE = LIST + "list.dispatchEvent(new Event('input', { bubbles: true }));"
PLACES = {
    "bench": [900, 300, 700, 180, 0, 90],
    "shelf": [1600, 0, 700, 180, 0, 90],
    "behind": [-700, 0, 700, 180, 0, 90],
}


@pytest.fixture
def page(screen: Screen, demo: ServerProcess) -> Screen:
    """The reach page of a demonstration arm, nothing asked yet."""
    screen.open(f"{demo.url}/arms/{ARM}/reach", Look(1280, 800), ready=READY)
    return screen


def paste(page: Screen, text: str) -> None:
    page.run(PASTE.replace("values", "arguments"), text)


def verdicts(page: Screen) -> list[str]:
    found: list[str] = page.run(f"return [...{ROWS}].map((row) => row.className)")
    return [name.removeprefix("is-") for name in found]


def asked(server: ServerProcess) -> list[str]:
    """Return what the interface says of the same places."""
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
    answer = httpx.post(f"{server.url}/v1/reach/checks", json=body).json()
    return [one["verdict"] for one in answer["results"]]


@pytest.mark.parametrize("separator", [",", "\t", ";"])
def test_a_pasted_list_is_judged_as_the_interface_does(
    page: Screen, demo: ServerProcess, separator: str
) -> None:
    lines = [separator.join(map(str, [name, *numbers])) for name, numbers in PLACES.items()]
    paste(page, "\n".join(lines))
    page.until(ANSWERED)
    told = verdicts(page)
    assert told == asked(demo)
    assert len(set(told)) > 1


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


def test_names_with_markup_stay_words(page: Screen) -> None:
    name = "<img src=x onerror=document.title='taken'>"
    paste(page, f"{name},900,300,700,180,0,90")
    page.until(ANSWERED)
    assert name in page.text()
    assert page.run("return document.title") != "taken"
    assert page.run("return document.querySelectorAll('#table img').length") == 0


def test_another_place_is_chosen_by_the_arrow_key_and_drawn(page: Screen) -> None:
    paste(page, "\n".join(",".join(map(str, [k, *v])) for k, v in PLACES.items()))
    page.until(ANSWERED)
    drawn = "document.getElementById('drawing').getAttribute('aria-label')"
    page.until(f"{drawn}.includes('bench')")
    page.run("document.querySelector('#table button.choice[aria-pressed=true]').focus()")
    page.press("ArrowDown")
    page.until(f"{drawn}.includes('shelf')")


def test_a_long_list_runs_as_a_survey_with_its_report(page: Screen) -> None:
    lines = [f"p{k},{700 + k % 300},{k % 400},700,180,0,90" for k in range(600)]
    paste(page, "\n".join(lines))
    page.until(f"{ROWS}.length === 100")
    keys = "[...document.querySelectorAll('#keys button')]"
    page.run(f"{keys}.find((key) => /survey/i.test(key.innerText)).click()")
    page.until("document.querySelector('#survey a[href$=report]')", 60)
    page.until(f"{ROWS}.length === 100 && ![...{ROWS}].some((row) => row.className === 'is-open')")
    assert "survey" in page.run("return location.search")
    link = page.run("return document.querySelector('#survey a[href$=report]').href")
    assert httpx.get(link).headers["content-type"].startswith("text/html")


def test_the_list_asks_for_nothing_else_than_the_interface(page: Screen) -> None:
    page.requests()
    paste(page, "bench,900,300,700,180,0,90")
    page.until(ANSWERED)
    paths = {httpx.URL(address).path for address in page.requests()}
    assert paths, json.dumps(sorted(paths))
    assert all(path.startswith("/v1/") for path in paths)
