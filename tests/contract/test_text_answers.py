"""txt, csv and scale: the same answer as flat, in lines of fixed width, in a table, in integers.

Left out: the width of each field (service/wire/test_fixed_text) and raw sockets (test_line).
"""

import csv
import io
from typing import Any

import httpx
import pytest

from kinematics.orientation_forms import FORMS, TRIPLES
from tests.contract.test_controller import (
    ADDRESS,
    BENT,
    BEYOND,
    POSE,
    REFUSALS,
    URL,
    flat_keys,
    largest_arm,
    stocked,
)

__all__ = ["stocked"]
pytestmark = pytest.mark.anyio
TXT, CSV = "text/plain; charset=us-ascii", "text/csv; charset=utf-8"
OF_THE_MOMENT = {"seq", "t_ms"}
QUESTION = "q=20,95&tag=42&tool=gripper&frame=tray"


def row_keys(joints: int, row: int) -> list[str]:
    keys = flat_keys(joints)
    return [key for key in keys if key[0] != "j" or key[1] == str(row)]


def line(answer: httpx.Response, keys: list[str]) -> dict[str, str]:
    """Return the fields of a line after holding what makes it one."""
    assert answer.headers["content-type"] == TXT
    assert answer.headers["content-length"] == str(len(answer.content))
    assert answer.headers["cache-control"] == "no-store"
    assert answer.content.isascii()
    assert answer.text.endswith("\r\n")
    assert answer.text.count("\n") == answer.text.count("\r") == 1
    return dict(zip(keys, answer.text[:-2].split(";"), strict=True))


def table(answer: httpx.Response) -> dict[str, str]:
    """Return the one line of a table by its head."""
    assert answer.headers["content-type"] == CSV
    assert answer.headers["content-length"] == str(len(answer.content))
    assert answer.text.count("\r\n") == answer.text.count("\n") == 2
    (found,) = csv.DictReader(io.StringIO(answer.text, newline=""), strict=True)
    return found


async def flat(client: httpx.AsyncClient, url: str) -> dict[str, Any]:
    told: dict[str, Any] = (await client.get(f"{url}&format=flat")).json()
    return told


async def test_a_line_says_what_flat_says(stocked: httpx.AsyncClient) -> None:
    url = f"{URL}/pose?{QUESTION}"
    told = await flat(stocked, url)
    fields = line(await stocked.get(f"{url}&format=txt"), flat_keys(None))
    for key in POSE[:6]:
        assert float(fields[key]) == pytest.approx(told[key], abs=5.1e-5)
    assert float(fields["condition"]) == pytest.approx(told["condition"], abs=0.051)
    assert float(fields["margin"]) == pytest.approx(told["margin"], abs=5.1e-5)
    others = set(told) - {*POSE[:6], "condition", "margin"} - OF_THE_MOMENT
    assert len(others) == 11
    assert {key: fields[key].rstrip(" ") for key in others} == {k: str(told[k]) for k in others}
    assert int(fields["seq"]) == told["seq"] + 1


@pytest.mark.parametrize("row", range(1, 7))
async def test_a_row_of_the_jacobian_is_a_line(stocked: httpx.AsyncClient, row: int) -> None:
    url = f"{URL}/jacobian?{QUESTION}"
    told = await flat(stocked, url)
    fields = line(await stocked.get(f"{url}&format=txt&row={row}"), row_keys(2, row))
    for key in (f"j{row}1", f"j{row}2"):
        assert len(fields[key]) == 12
        assert float(fields[key]) == pytest.approx(told[key], abs=5.1e-5)
    assert fields["digest"] == told["digest"]


async def test_a_table_says_what_flat_says(stocked: httpx.AsyncClient) -> None:
    for what, keys in [("pose", flat_keys(None)), ("jacobian", flat_keys(2))]:
        url = f"{URL}/{what}?{QUESTION}"
        told = await flat(stocked, url)
        found = table(await stocked.get(f"{url}&format=csv"))
        assert list(found) == keys
        for key in set(keys) - OF_THE_MOMENT:
            assert type(told[key])(found[key]) == told[key]


@pytest.mark.parametrize(("query", "code", "status"), REFUSALS)
@pytest.mark.parametrize("wanted", ["txt", "csv"])
async def test_a_refusal_is_a_line_of_the_same_length(
    stocked: httpx.AsyncClient, wanted: str, query: str, code: int, status: int
) -> None:
    for what, more, keys in [
        ("pose", "", flat_keys(None)),
        ("jacobian", "&row=4" if wanted == "txt" else "", row_keys(2, 4)),
    ]:
        fine = await stocked.get(f"{URL}/{what}?q=0,90&tag=8&format={wanted}{more}")
        assert fine.status_code == 200
        for inline in ("", "&errors=inline"):
            url = f"{URL}/{what}?{query}&tag=8&format={wanted}{more}{inline}"
            answer = await stocked.get(url)
            assert answer.status_code == (200 if inline else status)
            if wanted == "txt":
                fields = line(answer, keys)
                assert len(answer.content) == len(fine.content)
                numbers = [fields[key] for key in keys if key in POSE[:6] or key[0] == "j"]
                assert set(numbers) == {"-999999.9999"}
            else:
                fields = table(answer)
                assert list(fields) == list(table(fine))
            assert (fields["ok"], int(fields["code"]), int(fields["tag"])) == ("0", code, 8)


async def test_an_unknown_arm_in_text(stocked: httpx.AsyncClient) -> None:
    for what, more in [("pose", ""), ("jacobian", "&row=1")]:
        answer = await stocked.get(f"/v1/arms/no-such-arm/{what}?q=0,0&format=txt{more}")
        assert (answer.status_code, answer.text[:5]) == (404, "0;103")


async def test_a_row_is_for_lines_of_a_jacobian(stocked: httpx.AsyncClient) -> None:
    for query, code in [
        ("jacobian?q=0,0&format=txt", 105),
        ("jacobian?q=0,0&format=txt&row=7", 105),
        ("jacobian?q=0,0&format=txt&row=x", 100),
        ("pose?q=0,0&format=txt&row=1", 110),
    ]:
        answer = await stocked.get(f"{URL}/{query}")
        assert answer.headers["content-type"] == TXT
        assert answer.text[:5] == f"0;{code}"
    problem = (await stocked.get(f"{URL}/jacobian?q=0,0&row=1")).json()
    assert (problem["code"], problem["errors"][0]["pointer"]) == ("unusable-value", "/row")


@pytest.mark.parametrize("form", FORMS)
async def test_only_triples_are_lines(stocked: httpx.AsyncClient, form: str) -> None:
    for wanted in ("txt", "csv"):
        answer = await stocked.get(f"{URL}/pose?q=10,20&tr1=30&tr2=40&form={form}&format={wanted}")
        assert answer.status_code == (200 if form in TRIPLES else 422)
        if wanted == "txt":
            fields = line(answer, flat_keys(None))
            told = (fields["code"], fields["form"].rstrip())
            assert told == (("0  ", form) if form in TRIPLES else ("112", ""))


async def test_a_number_too_large_for_its_field(stocked: httpx.AsyncClient) -> None:
    for tz, status, start in [("999999.9999", 200, "1;"), ("1000000", 422, "0;113")]:
        answer = await stocked.get(f"{URL}/pose?q=0,90&tz={tz}&format=txt")
        assert (answer.status_code, answer.text[: len(start)]) == (status, start)
    assert (await stocked.get(f"{URL}/pose?q=0,90&tz=1000000&format=flat")).json()["z"] == 1e6
    answer = await stocked.get(f"{URL}/pose?q=0,90&tag=12345678901&format=txt")
    assert (answer.status_code, answer.text[:5]) == (422, "0;113")


# --- scale ---------------------------------------------------------------------------------


async def test_a_scale_in_flat_csv_and_txt(stocked: httpx.AsyncClient) -> None:
    plain = await flat(stocked, f"{URL}/pose?q=20.5,-95.25&tx=1.5&tr3=7&tag=3")
    url = f"{URL}/pose?q=20500,-95250&tx=1500&tr3=7000&tag=3&scale=1000"
    told = await flat(stocked, url)
    numbers = [*POSE[:6], "condition", "margin"]
    assert all(type(told[key]) is int for key in numbers)
    assert [told[key] for key in numbers] == [round(plain[key] * 1000) for key in numbers]
    others = set(told) - set(numbers) - OF_THE_MOMENT
    assert {key: told[key] for key in others} == {key: plain[key] for key in others}
    found = table(await stocked.get(f"{url}&format=csv"))
    assert [found[key] for key in numbers] == [str(told[key]) for key in numbers]
    answer = await stocked.get(f"{url}&format=txt")
    fields = line(answer, flat_keys(None))
    assert len(answer.content) == 197
    assert all(fields[key][0] in "+-" and "." not in fields[key] for key in numbers)
    assert [int(fields[key]) for key in numbers] == [told[key] for key in numbers]


async def test_a_scale_in_a_jacobian(stocked: httpx.AsyncClient) -> None:
    keys = [f"j{row}{joint}" for row in range(1, 7) for joint in (1, 2)]
    plain = await flat(stocked, f"{URL}/jacobian?q=20,95&units=m-rad")
    told = await flat(stocked, f"{URL}/jacobian?q=20000000,95000000&units=m-rad&scale=1000000")
    assert [told[key] for key in keys] == [round(plain[key] * 1e6) for key in keys]
    answer = await stocked.get(
        f"{URL}/jacobian?q=20000,95000&units=m-rad&scale=1000&format=txt&row=2"
    )
    fields = line(answer, row_keys(2, 2))
    assert int(fields["j21"]) == round(plain["j21"] * 1e3)


async def test_a_scale_in_nested_json(stocked: httpx.AsyncClient) -> None:
    plain = (await stocked.get(f"{URL}/pose?q=20,-95&tx=1.5")).json()
    told = (await stocked.get(f"{URL}/pose?q=20000,-95000&tx=1500&scale=1000")).json()
    position = plain["poses"][0]["position"]
    assert told["poses"][0]["position"] == [round(value * 1000) for value in position]
    values = plain["poses"][0]["orientation"]["values"]
    assert told["poses"][0]["orientation"]["values"] == [round(value * 1000) for value in values]
    assert told["tool"]["position"] == [1500, 0, 0]
    assert told["arm"] == plain["arm"]


async def test_a_refusal_beside_a_scale_is_the_same_line(stocked: httpx.AsyncClient) -> None:
    answer = await stocked.get(f"{URL}/pose?q=1.5,0&scale=1000&format=txt")
    fields = line(answer, flat_keys(None))
    assert (answer.status_code, fields["code"], fields["x"]) == (400, "100", "-999999.9999")
    answer = await stocked.get(f"{URL}/pose?q=0,0&tz=200000000000&scale=1000000&format=txt")
    assert (answer.status_code, answer.text[:5]) == (422, "0;113")


# --- budgets -------------------------------------------------------------------------------


@pytest.mark.parametrize("q", [BENT, BEYOND])
async def test_lines_stay_within_254_bytes(client: httpx.AsyncClient, q: str) -> None:
    arm = largest_arm()
    assert (await client.post("/v1/arms", json=arm)).status_code == 201
    more = "&tag=2147483647&tool=998&frame=999&row=6&format=txt"
    path = f"/v1/arms/{arm['name']}/jacobian?q={q}{more}"
    assert len(ADDRESS + path) <= 255
    lengths = set()
    for row in range(1, 7):
        answer = await client.get(path.replace("row=6", f"row={row}"))
        assert answer.status_code == 200, answer.text
        lengths.add(len(answer.content))
        refused = await client.get(path.replace("tool=998", "tool=997"))
        lengths.add(len(refused.content))
        assert refused.status_code == 422
    pose = path.replace("jacobian", "pose").replace("&row=6", "")
    lengths.add(len((await client.get(pose)).content))
    assert lengths == {211, 197}
