"""The page for controllers: its places, codes and flags are those of the code, its example is so.

Left out: what every page must have (test_pages) and the clients themselves (contract/test_clients).
"""

import re

import httpx
import numpy as np
import pytest
from fastapi import FastAPI

from service.problems import ANSWERS, KINDS
from service.settings import Settings
from service.web.controllers_page import CLIENTS, EXAMPLE_JOINTS, client_text
from service.web.examples import examples_of
from service.wire import reach_flat
from service.wire.fixed_text import WIDTHS, places
from service.wire.flat import FLAGS
from service.wire.reach_lines import joint_keys

pytestmark = pytest.mark.anyio
PAGE = "/docs/controllers"


@pytest.fixture
def settings() -> Settings:
    """The demonstration cell, which the example is taken from."""
    return Settings(database=":memory:", demo=True)


def rows(text: str, kind: str) -> list[tuple[str, list[str]]]:
    found = re.findall(rf'<tr id="{kind}-([^"]*)">(.*?)</tr>', text)
    return [(name, re.findall(r"<td>(.*?)</td>", cells)) for name, cells in found]


async def test_every_field_has_its_place(client: httpx.AsyncClient) -> None:
    text = (await client.get(PAGE)).text
    found = rows(text, "place")
    assert [name for name, _ in found] == list(WIDTHS)
    line = examples_of("pose")["txt"].answer
    for name, (key, first, width, meaning) in found:
        assert (key, (int(first), int(width))) == (name, tuple(places(WIDTHS)[name]))
        assert line[int(first) + int(width) - 1] in ";\r"
        assert len(meaning) >= 10
    assert line.rstrip("\r\n") in text


async def test_every_code_and_every_flag_is_there(client: httpx.AsyncClient) -> None:
    text = (await client.get(PAGE)).text
    codes = {kind.number for kind in KINDS.values()} | set(ANSWERS)
    assert [int(name) for name, _ in rows(text, "code")] == sorted(codes)
    for kind in KINDS.values():
        assert kind.title in text
    flags = {int(name): (int(bit), int(code)) for name, (bit, code, _) in rows(text, "flag")}
    assert flags == {bit: (bit, code) for code, bit in FLAGS.items()}
    assert len(flags) == 8


async def test_the_question_shown_is_answered_as_shown(client: httpx.AsyncClient) -> None:
    text = (await client.get(PAGE)).text.replace("&amp;", "&")
    shown = re.findall(r"<pre>GET (\S+)\n(.*?)</pre>", text)[0]
    answer = (await client.get(shown[0])).text.rstrip("\r\n")
    assert (answer[:12], answer[48:]) == (shown[1][:12], shown[1][48:])


async def test_the_orientation_shown_is_answered_as_shown(client: httpx.AsyncClient) -> None:
    text = (await client.get(PAGE)).text.replace("&amp;", "&")
    shown = re.findall(r'<h2 id="orientation">.*?<pre>GET (\S+)\n(.*?)</pre>(.*?)</p>', text, re.S)
    ((address, line, words),) = shown
    answer = (await client.get(address)).text.rstrip("\r\n")
    assert (answer[:8], answer[48:]) == (line[:8], line[48:])
    assert "<code>form</code> in 15" in words
    assert line[48:].split(";")[-2].ljust(15) == line[-22:-7]


async def test_the_clients_are_there_to_take(client: httpx.AsyncClient) -> None:
    for name in CLIENTS:
        answer = await client.get(f"/docs/files/{name}")
        assert answer.headers["content-type"] == "text/plain; charset=utf-8"
        assert answer.content == client_text(name)


# --- the worked example --------------------------------------------------------------------


async def test_the_rows_of_the_example_are_those_of_the_arm(
    app: FastAPI, client: httpx.AsyncClient
) -> None:
    text = (await client.get(PAGE)).text.replace("&quot;", '"')
    rows_of_arm = (await client.get("/v1/arms/pallet-stacker")).json()["arm"]["rows"]
    second, third = rows_of_arm[1:3]
    assert (second["theta"], second["direction"], second.get("couplings", [])) == (90, -1, [])
    assert (third["theta"], third["direction"]) == (-90, -1)
    assert third["couplings"] == [{"axis": 2, "ratio": 1}]
    assert 'row 2: "theta": 90,  "direction": -1\n' in text
    assert 'row 3: "theta": -90, "direction": -1, "couplings": [{"axis": 2, "ratio": 1}]' in text


async def test_the_numbers_of_the_example_are_the_arm_s(client: httpx.AsyncClient) -> None:
    text = (await client.get(PAGE)).text
    lean, dip = EXAMPLE_JOINTS["lean"], EXAMPLE_JOINTS["dip"]
    told = {name: float(value) for name, value in re.findall(r'<b id="([\w-]+)">(-?\d+)</b>', text)}
    assert told == {"variable-2": 70, "variable-3": -100, "elevation": -dip}

    async def elevations(axis_2: float, axis_3: float) -> list[float]:
        body = {
            "arm": "pallet-stacker",
            "joints": [[0, axis_2, axis_3, 0]],
            "links": True,
            "form": "matrix",
        }
        (pose,) = (await client.post("/v1/poses", json=body)).json()["poses"]
        # At axis 1 = 0 both links lie in the plane of base x and z; x of each is along it.
        turned = [np.array(link["orientation"]["values"]) for link in pose["links"]]
        tilts = [float(np.rad2deg(np.arctan2(each[2, 0], each[0, 0]))) for each in turned]
        return tilts[2:4]  # the base is the first

    upper, fore = await elevations(lean, dip)
    assert upper == pytest.approx(told["variable-2"])
    assert fore == pytest.approx(told["elevation"])
    # The forearm keeps its direction while the upper arm moves.
    assert (await elevations(lean + 15, dip))[1] == pytest.approx(told["elevation"])


# --- reach -----------------------------------------------------------------------------------


async def test_every_field_of_a_reach_line_has_its_place(client: httpx.AsyncClient) -> None:
    text = (await client.get(PAGE)).text
    keys = (*reach_flat.BEGIN, *joint_keys(6), *reach_flat.END)
    found = rows(text, "reach-place")
    assert [name for name, _ in found] == list(keys)
    line = examples_of("reach")["txt"].answer
    for name, (key, first, width, meaning) in found:
        assert (key, (int(first), int(width))) == (name, places(keys, reach_flat.WIDTHS)[name])
        assert line[int(first) + int(width) - 1] in ";\r"
        assert len(meaning) >= 8
    assert line.rstrip("\r\n") in text
    # One joint more or less moves what follows by as much as the page says.
    seven = places((*reach_flat.BEGIN, *joint_keys(7), *reach_flat.END), reach_flat.WIDTHS)
    six = places(keys, reach_flat.WIDTHS)
    assert seven["margin"].first - six["margin"].first == 13
    assert "moves what follows by 13 characters" in text.replace("\n", " ")


async def test_the_target_shown_is_answered_as_shown(client: httpx.AsyncClient) -> None:
    text = (await client.get(PAGE)).text.replace("&amp;", "&")
    ((address, line),) = re.findall(r'<h2 id="reach">.*?<pre>GET (\S+)\n(.*?)</pre>', text, re.S)
    answer = (await client.get(address)).text.rstrip("\r\n")
    assert (answer[:12], answer[48:]) == (line[:12], line[48:])
