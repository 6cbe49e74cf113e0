"""POST /v1/rotations/conversions: many orientations, in and out as JSON, CSV and NPY.

Left out: one orientation by query (test_rotation_query) and how fast it is (tests/benchmarks).
"""

import io
import json
from collections.abc import Callable
from typing import Any

import httpx
import numpy as np
import pytest
from fastapi import FastAPI
from scipy.spatial.transform import Rotation

from kinematics.orientation_forms import FORMS, TRIPLES, rotation_from, shape_of
from service.bulk import conversions
from tests.contract.refusals import only_entry, refusal, sent

pytestmark = pytest.mark.anyio

PATH = "/v1/rotations/conversions"
NPY, CSV, JSON = "application/x-npy", "text/csv", "application/json"
COUNT = 200
EXACT = 1e-12
"""Radians, against scipy: above its rounding and ours, far below any digit a user reads."""

Body = dict[str, Any]
RANDOM = Rotation.random(COUNT, rng=4)


def npy(values: np.ndarray) -> bytes:
    file = io.BytesIO()
    np.save(file, values)
    return file.getvalue()


def csv(values: Any, names: list[str] | None = None) -> bytes:
    width = len(values[0])
    head = [f"r{column + 1}" for column in range(width)] + (["name"] if names else [])
    lines = [[repr(float(value)) for value in row] for row in values]
    if names:
        lines = [[*line, name] for line, name in zip(lines, names, strict=True)]
    return "\n".join(",".join(line) for line in [head, *lines]).encode()


def scipy_values(form: str, rotation: Rotation) -> np.ndarray:
    """Return scipy's values in radians, a matrix by rows."""
    if form == "matrix":
        return rotation.as_matrix().reshape(-1, 9)
    if form.startswith("quaternion"):
        return rotation.as_quat(canonical=True, scalar_first=form.endswith("wxyz"))
    if form == "rotation-vector":
        return rotation.as_rotvec()
    return rotation.as_euler(sequence_of(form))


def sequence_of(form: str) -> str:
    sequence, axes = form.split("-")
    return sequence.upper() if axes == "current" else sequence


async def send(
    client: httpx.AsyncClient, content: bytes, kind: str, **query: Any
) -> httpx.Response:
    return await client.post(PATH, content=content, params=query, headers={"content-type": kind})


async def as_numbers(
    client: httpx.AsyncClient, form: str, to: str, values: np.ndarray, units: str = "m-rad"
) -> np.ndarray:
    query = {"from": form, "to": to, "units": units}
    answer = await send(client, npy(values), NPY, **query)
    assert answer.status_code == 200, answer.text
    assert answer.headers["content-type"] == NPY
    return np.asarray(np.load(io.BytesIO(answer.content)))


async def items(client: httpx.AsyncClient, **asked: Any) -> list[Body]:
    answer = await sent(client, PATH, {"units": "mm-deg", **asked})
    assert answer.status_code == 200, answer.text
    told = answer.json()
    assert list(told) == ["units", "from", "to", "orientations"]
    found: list[Body] = told["orientations"]
    return found


# --- the numbers ---------------------------------------------------------------------------


@pytest.mark.parametrize("form", TRIPLES)
async def test_each_sequence_against_scipy(client: httpx.AsyncClient, form: str) -> None:
    rng = np.random.default_rng(11)
    angles = rng.uniform(-7.0, 7.0, (COUNT, 3))  # far beyond one turn as well
    found = await as_numbers(client, form, "matrix", angles)
    expected = Rotation.from_euler(sequence_of(form), angles).as_matrix().reshape(-1, 9)
    np.testing.assert_allclose(found, expected, rtol=0, atol=EXACT)
    back = await as_numbers(client, "matrix", form, RANDOM.as_matrix().reshape(-1, 9))
    np.testing.assert_allclose(back, scipy_values(form, RANDOM), rtol=0, atol=1e3 * EXACT)
    turned = Rotation.from_euler(sequence_of(form), back).as_matrix()
    np.testing.assert_allclose(turned, RANDOM.as_matrix(), rtol=0, atol=EXACT)


async def test_all_forms_return_to_the_same_matrix(client: httpx.AsyncClient) -> None:
    expected = RANDOM.as_matrix()
    for form in FORMS:
        values = await as_numbers(
            client, "quaternion-wxyz", form, RANDOM.as_quat(scalar_first=True)
        )
        matrix = rotation_from(form, values.reshape(COUNT, *shape_of(form)))
        np.testing.assert_allclose(matrix, expected, rtol=0, atol=EXACT)
        again = await as_numbers(client, form, "matrix", values)
        np.testing.assert_allclose(again.reshape(-1, 3, 3), expected, rtol=0, atol=EXACT)


@pytest.mark.parametrize("to", ["zyx-current", "quaternion-xyzw", "rotation-vector", "matrix"])
async def test_three_formats_say_the_same(client: httpx.AsyncClient, to: str) -> None:
    degrees = scipy_values("xyz-fixed", RANDOM) * 180 / np.pi
    query = {"from": "xyz-fixed", "to": to, "units": "in-deg"}
    numbers = await as_numbers(client, "xyz-fixed", to, degrees, "in-deg")
    lines = await send(client, csv(degrees), CSV, **query)
    head, *rows = lines.text.removesuffix("\r\n").split("\r\n")
    width = numbers.shape[1]
    keys = ",".join(f"r{column + 1}" for column in range(width))
    assert head == f"ok,code,flags,seq,tag,t_ms,{keys},form,units"
    cut = np.array([[float(cell) for cell in row.split(",")[6 : 6 + width]] for row in rows])
    assert np.array_equal(cut, numbers)
    assert all(row.endswith(f",{to},in-deg") and row.startswith("1,0,0,") for row in rows)
    told = await items(client, **query | {"values": degrees.tolist()})
    nested = np.array([item["values"] for item in told])
    assert np.array_equal(nested.reshape(COUNT, -1), numbers)
    assert nested.shape == (COUNT, *shape_of(to))
    assert all(item == {"ok": True, "code": 0, "values": item["values"], "findings": []}
               for item in told)  # fmt: skip


async def test_each_format_in_any_other_out(client: httpx.AsyncClient) -> None:
    values = RANDOM.as_quat(scalar_first=True)[:3]
    query = {"from": "quaternion-wxyz", "to": "zyz-fixed", "units": "mm-deg"}
    body = json.dumps(query | {"values": values.tolist()}).encode()
    ways = [(npy(values), NPY, query), (csv(values), CSV, query), (body, JSON, {})]
    answers = {}
    for content, kind, said in ways:
        for wanted, media in (("npy", NPY), ("csv", CSV), ("json", JSON)):
            answer = await send(client, content, kind, **said, format=wanted, tag="3")
            assert answer.headers["content-type"].startswith(media)
            by_accept = await client.post(
                PATH, content=content, params=said, headers={"content-type": kind, "accept": media}
            )
            assert by_accept.headers["content-type"].startswith(media)
            cut = answer.text.split("\r\n")[1].split(",")[6:] if wanted == "csv" else None
            answers.setdefault(wanted, []).append(cut or answer.content)
    for told in answers.values():
        assert told[0] == told[1] == told[2]


async def test_what_comes_where_no_form_is_named(client: httpx.AsyncClient) -> None:
    query = {"from": "xyz-fixed", "units": "mm-deg"}
    line = (await send(client, csv([[0, 0, 90]]), CSV, **query)).text.split("\r\n")[1]
    assert line.endswith(",0.0,0.0,90.0,xyz-fixed,mm-deg")
    (item,) = await items(client, **query, values=[[0, 0, 90]])
    assert item["values"] == pytest.approx([0.5**0.5, 0, 0, 0.5**0.5])


async def test_names_go_back_beside_the_answer(client: httpx.AsyncClient) -> None:
    query = {"from": "xyz-fixed", "units": "mm-deg"}
    content = csv([[0, 0, 90], [0, 0, 0]], ["housing", '"lid, upper"'])
    lines = (await send(client, content, CSV, **query)).text.split("\r\n")
    assert lines[0].endswith(",units,name")
    assert lines[1].endswith(",mm-deg,housing")
    assert lines[2].endswith(',mm-deg,"lid, upper"')
    told = (await send(client, content, CSV, **query, format="json")).json()
    assert [item["name"] for item in told["orientations"]] == ["housing", "lid, upper"]
    assert all(item["ok"] and item["findings"] == [] for item in told["orientations"])


@pytest.mark.parametrize("form", FORMS)
async def test_none_at_all(client: httpx.AsyncClient, form: str) -> None:
    width = int(np.prod(shape_of(form)))
    query = {"from": form, "to": form, "units": "mm-deg"}
    assert await items(client, **query, values=[]) == []
    assert (await as_numbers(client, form, form, np.empty((0, width)))).shape == (0, width)
    head = ",".join(f"r{column + 1}" for column in range(width))
    lines = await send(client, head.encode(), CSV, **query)
    assert lines.text == f"ok,code,flags,seq,tag,t_ms,{head},form,units\r\n"


# --- one bad orientation among good ones ----------------------------------------------------

TWO_OF_FIVE: Body = {
    "from": "quaternion-wxyz",
    "to": "zyz-current",
    "values": [
        [0.5, 0.5, 0.5, 0.5],
        [0, 0, 0, 0],
        [2, 0, 0, 0],
        [1, "0", 0, 0],
        [0.8, 0.6, 0, 0],
    ],
}


async def test_one_that_cannot_be_used_does_not_fail_the_others(client: httpx.AsyncClient) -> None:
    told = await items(client, **TWO_OF_FIVE)
    assert [item["ok"] for item in told] == [True, False, True, False, True]
    assert [item["code"] for item in told] == [0, 105, 6, 105, 0]
    assert [item["values"] is None for item in told] == [False, True, False, True, False]
    assert [len(item["findings"]) for item in told] == [0, 0, 2, 0, 0]
    assert [finding["code"] for finding in told[2]["findings"]] == [6, 5]
    assert list(told[1]) == ["ok", "code", "values", "findings", "problem"]
    assert told[1]["problem"]["pointer"] == "/values/1"
    assert told[1]["problem"]["value"] == [0, 0, 0, 0]
    assert told[3]["problem"]["pointer"] == "/values/3/1"
    assert told[3]["problem"]["value"] == "0"
    assert all(item["problem"]["way_out"] for item in told if not item["ok"])


async def test_the_same_as_a_table(client: httpx.AsyncClient) -> None:
    body = json.dumps(TWO_OF_FIVE | {"units": "mm-deg"}).encode()
    bare = await send(client, body, JSON, format="npy")
    numbers = np.load(io.BytesIO(bare.content))
    assert bare.headers["x-bad-rows"] == "2"
    assert np.isnan(numbers).all(axis=1).tolist() == [False, True, False, True, False]
    lines = await send(client, body, JSON, format="csv")
    assert lines.headers["x-bad-rows"] == "2"
    cells = [line.split(",") for line in lines.text.split("\r\n")[1:-1]]
    assert [row[:3] for row in cells] == [
        ["1", "0", "0"],
        ["0", "105", "0"],
        ["1", "6", "48"],
        ["0", "105", "0"],
        ["1", "0", "0"],
    ]
    assert cells[1][6:9] == ["-999999.9999"] * 3


async def test_a_cell_that_is_no_number_is_told_by_its_line(client: httpx.AsyncClient) -> None:
    content = b"r1,r2,r3\n0,0,90\n0,x,90\n0,1e999,0\n0,0,1e12\n"
    query = {"from": "xyz-fixed", "units": "mm-deg", "format": "json"}
    told = (await send(client, content, CSV, **query)).json()["orientations"]
    assert [item["code"] for item in told] == [0, 100, 102, 105]
    places = [item["problem"]["pointer"] for item in told[1:]]
    assert places == ["/3/r2", "/4/r2", "/5/r3"]


async def test_nan_and_infinity_in_a_table(client: httpx.AsyncClient) -> None:
    values = np.eye(3).reshape(1, 9).repeat(4, axis=0)
    values[1, 5], values[2, 0], values[3, 8] = np.nan, np.inf, 1e300
    query = {"from": "matrix", "units": "mm-deg", "format": "json"}
    told = (await send(client, npy(values), NPY, **query)).json()["orientations"]
    assert [item["code"] for item in told] == [0, 102, 102, 105]
    assert [item["problem"]["pointer"] for item in told[1:]] == ["/1/5", "/2/0", "/3/8"]
    assert [item["problem"]["value"] for item in told[1:]] == ["NaN", "Infinity", 1e300]
    bare = await send(client, npy(values), NPY, **{"from": "matrix", "units": "mm-deg"})
    assert bare.headers["x-bad-rows"] == "3"


async def test_places_are_told_in_the_whole_and_not_in_a_piece(client: httpx.AsyncClient) -> None:
    """Long answers are made in pieces; a complaint or a name must not slip by one of them."""
    count, bad = 10_000, (0, 4095, 4096, 9_001)
    values = np.random.default_rng(2).uniform(-180, 180, (count, 3))
    values[list(bad), 1] = np.nan
    query = {"from": "xyz-fixed", "to": "xyz-fixed", "units": "mm-deg", "format": "json"}
    told = (await send(client, npy(values), NPY, **query)).json()["orientations"]
    refused = {place: item["problem"] for place, item in enumerate(told) if not item["ok"]}
    assert {place: each["pointer"] for place, each in refused.items()} == {
        place: f"/{place}/1" for place in bad
    }
    names = [f"part-{place}" for place in range(count)]
    named = await send(client, csv(values, names), CSV, **query | {"format": "csv"})
    lines = named.text.removesuffix("\r\n").split("\r\n")[1:]
    assert [line.rpartition(",")[2] for line in lines] == names
    assert [place for place, line in enumerate(lines) if line.startswith("0,102,")] == [*bad]
    assert named.headers["x-bad-rows"] == "4"


async def test_if_none_can_be_used_the_request_is_refused(client: httpx.AsyncClient) -> None:
    asked = {"from": "quaternion-xyzw", "units": "mm-deg", "values": [[0, 0, 0, 0], [0, 0, 1]] * 30}
    problem = refusal(await sent(client, PATH, asked), "unusable-value")
    assert [entry["pointer"] for entry in problem["errors"][:3]] == [
        "/values/0", "/values/1", "/values/2",
    ]  # fmt: skip
    assert len(problem["errors"]) == 20


@pytest.mark.parametrize("form", ["matrix", "xyz-fixed"])
@pytest.mark.parametrize("long_from", [10**9, 0])
async def test_what_is_nested_deeply_spoils_its_own_row(
    client: httpx.AsyncClient, monkeypatch: pytest.MonkeyPatch, form: str, long_from: int
) -> None:
    monkeypatch.setattr(conversions, "LONG_BYTES", long_from)
    nested = "[" * 900 + "1" + "]" * 900
    good = "[[1, 0, 0], [0, 1, 0], [0, 0, 1]]" if form == "matrix" else "[0, 0, 0]"
    body = f'{{"from": "{form}", "units": "mm-deg", "values": [{nested}, {good}]}}'
    answer = await send(client, body.encode(), JSON)
    assert answer.status_code == 200
    assert [item["ok"] for item in answer.json()["orientations"]] == [False, True]


# --- large bodies --------------------------------------------------------------------------

LARGE: list[Body] = [
    {},
    {"to": "matrix"},
    {"from": "matrix", "values": RANDOM.as_matrix().tolist()},
    {"from": "matrix", "values": RANDOM.as_matrix().reshape(-1, 9).tolist()},
    {"from": "matrix", "values": [[[1, 0, 0], [0, 1, 0], [0, 0, 1]], [[1, 0], [0, 1]]]},
    {"values": [[0, 0, 1], [0, float("nan"), 1], [0, 0, True], [0, 0], "x", None, {}]},
    {"values": [[[0, 0, 1]], [[0, 0, 1]]]},
    {"values": [[0, 0], [0, 1]]},
    {"values": [0, 0, 1]},
    {"values": [[10**400, 0, 0], [0, 0, 0]]},
    {"values": {}},
    {"from": "zyx"},
    {"to": "nonsense"},
    {"units": None},
    {"more": [[1, 2, 3]]},
]


@pytest.mark.parametrize("wanted", ["json", "npy", "csv"])
async def test_the_worker_answers_as_the_server_does(
    client: httpx.AsyncClient, monkeypatch: pytest.MonkeyPatch, wanted: str
) -> None:
    plain = {"from": "xyz-fixed", "units": "m-rad", "values": RANDOM.as_euler("xyz").tolist()}
    statuses = set()
    for changed in LARGE:
        body = json.dumps(plain | changed).encode()
        monkeypatch.setattr(conversions, "LONG_BYTES", 10**9)
        direct = await send(client, body, JSON, format=wanted)
        monkeypatch.setattr(conversions, "LONG_BYTES", 0)
        worked_out = await send(client, body, JSON, format=wanted)
        assert worked_out.status_code == direct.status_code, (changed, worked_out.text)
        statuses.add(direct.status_code)
        if direct.status_code >= 400:
            problems = [answer.json() for answer in (direct, worked_out)]
            assert problems[0].pop("request_id") != problems[1].pop("request_id")
            assert problems[0] == problems[1]
        elif wanted == "csv":
            cells = [
                [line.split(",")[6:] for line in answer.text.split("\r\n")]
                for answer in (direct, worked_out)
            ]
            assert cells[0] == cells[1]
        else:
            assert worked_out.content == direct.content
    assert statuses == {200, 422}


async def test_a_large_body_goes_to_the_worker(
    app: FastAPI, client: httpx.AsyncClient, monkeypatch: pytest.MonkeyPatch
) -> None:
    asked = []
    convert: Callable[..., Any] = app.state.bulk.worker.convert

    async def watched(*given: Any) -> Any:
        asked.append(len(given[0]))
        return await convert(*given)

    monkeypatch.setattr(app.state.bulk.worker, "convert", watched)
    row = [[0.1234567890123456, 0.1234567890123456, 0.1234567890123456]]
    for count in (10, 40_000):
        told = await items(client, **{"from": "xyz-fixed", "values": row * count})
        assert len(told) == count
    assert len(asked) == 1
    assert asked[0] > 2_000_000


# --- what is refused -----------------------------------------------------------------------

ONE: Body = {"from": "xyz-fixed", "values": [[0, 0, 0]]}


@pytest.mark.parametrize(
    ("asked", "code", "pointer", "way_out"),
    [
        ({"values": [[0, 0, 0]]}, "missing-field", "/from", "from"),
        ({"from": "xyz-fixed"}, "missing-field", "/values", "values"),
        (ONE | {"units": None}, "unusable-value", "/units", "mm-deg"),
        (ONE | {"from": "xyz-fix"}, "unusable-value", "/from", '"xyz-fixed"'),
        (ONE | {"from": 3}, "unusable-value", "/from", "text"),
        (ONE | {"to": "xyz"}, "unusable-value", "/to", '"xyz-current"'),
        (ONE | {"form": "matrix"}, "unknown-field", "/form", '"from"'),
        (ONE | {"values": "0,0,0"}, "unusable-value", "/values", "list"),
        (ONE | {"values": [0, 0, 0]}, "unusable-value", "/values", "[[...]]"),
        (ONE | {"values": [[0, 0, 0]] * 200_001}, "too-large", "/values", "several"),
    ],
)
async def test_what_cannot_be_used(
    client: httpx.AsyncClient, asked: Body, code: str, pointer: str, way_out: str
) -> None:
    answer = await sent(client, PATH, {"units": "mm-deg", **asked})
    problem = refusal(answer, code, 422)
    assert problem["errors"][0]["pointer"] == pointer
    assert way_out in problem["errors"][0]["way_out"]


@pytest.mark.parametrize(
    ("content", "kind", "changed", "code", "said"),
    [
        (npy(np.zeros((2, 4))), NPY, {}, "unusable-value", "send 3 numbers"),
        (npy(np.zeros((2, 3))), NPY, {"from": "matrix"}, "unusable-value", "9 numbers, the rows"),
        (npy(np.zeros((2, 3, 3))), NPY, {"from": "matrix"}, "unusable-value", ""),
        (npy(np.zeros((2, 3), np.float32)), NPY, {}, "unusable-value", "<f8"),
        (npy(np.zeros((200_001, 3))), NPY, {}, "too-large", "several"),
        (b"", NPY, {}, "unparseable", "NPY"),
        (b"", CSV, {}, "unparseable", "r1,r2"),
        (b"r1,r2\n0,0\n", CSV, {}, "unusable-value", "r1,r2,r3,name"),
        (b"r1,r2,r3\n0,0\n", CSV, {}, "unusable-value", "takes 3 numbers"),
        (b"q1,q2,q3\n0,0,0\n", CSV, {}, "unusable-value", "r1,r2,r3,name"),
        (csv([[0, 0, 0]]), CSV, {"from": None}, "missing-field", "from=xyz-fixed"),
        (csv([[0, 0, 0]]), CSV, {"units": None}, "missing-field", "mm-deg"),
        (csv([[0, 0, 0]]), CSV, {"units": "mm"}, "unusable-value", "mm-deg"),
        (csv([[0, 0, 0]]), CSV, {"from": "xyz"}, "unusable-value", '"xyz-fixed"'),
        (csv([[0, 0, 0]]), CSV, {"to": "zyz-curren"}, "unusable-value", '"zyz-current"'),
        (csv([[0, 0, 0]]), CSV, {"arm": "x"}, "unknown-field", "known here"),
        (csv([[0, 0, 0]]), CSV, {"format": "txt"}, "unusable-value", "npy"),
        (csv([[0, 0, 0]]), CSV, {"tag": "x"}, "unparseable", "12"),
        (csv([[0, 0, 0]]), "text/plain", {}, "wrong-media-type", "text/csv"),
        (json.dumps(ONE | {"units": "mm-deg"}).encode(), JSON, {}, "unknown-field", "in the body"),
    ],
)
async def test_tables_that_cannot_be_used(
    client: httpx.AsyncClient, content: bytes, kind: str, changed: Body, code: str, said: str
) -> None:
    query = {"from": "xyz-fixed", "units": "mm-deg"} | changed
    said_query = {name: text for name, text in query.items() if text is not None}
    answer = await send(client, content, kind, **said_query)
    problem = refusal(answer, code, 422 if code == "too-large" else None)
    assert said in problem["errors"][0]["way_out"]


async def test_units_are_never_guessed(client: httpx.AsyncClient) -> None:
    entry = only_entry(await sent(client, PATH, ONE), "missing-field")
    assert entry["pointer"] == "/units"
