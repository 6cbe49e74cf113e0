"""Surveys over HTTP: taken in, gone on with after kills, cancelled, refused; results to the bit."""

import base64
import csv
import hashlib
import io
import json
import os
import re
import signal
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from html import escape
from importlib.util import find_spec
from pathlib import Path
from typing import Any

import httpx
import numpy as np
import pytest

from service.cautions import CAUTIONS
from tests.conftest import ROOT, ServerProcess
from tests.service.storage.conftest import SmallDisk, small_disk

__all__ = ["small_disk"]

QUATERNION = "quaternion-wxyz"
Launch = Callable[..., ServerProcess]
PATIENCE_S = 300.0
"""Kernels that were never compiled may be, on a first run; and processes of surveys give way to the
tests beside them, which leave them next to nothing on a machine that is full."""


_in_reach: list[dict[str, Any]] = []


def targets(count: int, seed: int = 7) -> list[dict[str, Any]]:
    """Return poses that postures have, one in 400 elsewhere, one that cannot be used."""
    random = np.random.default_rng(seed)
    rows: list[dict[str, Any]] = []
    for number in range(count):
        pose = dict(_in_reach[number % len(_in_reach)])
        if number % 400 == 7:
            pose["position"] = random.uniform(-1500, 1500, 3).round(3).tolist()
        rows.append({"name": f"part-{number}", "pose": pose})
    if count > 3:
        rows[2] = {"name": "part-2", "position": [1.0, 2.0]}
    return rows


def question(count: int, **more: Any) -> dict[str, Any]:
    request = {"arm": "housing-loader", "tool": "flange", "targets": targets(count), **more}
    return {"kind": "reach-checks", "title": "parts of line 2", "request": request}


def asked(client: httpx.Client, body: dict[str, Any], **headers: str) -> str:
    response = client.post("/v1/surveys", json=body, headers=headers)
    assert response.status_code == 202, response.text
    survey: str = response.json()["id"]
    assert response.headers["location"] == f"/v1/surveys/{survey}"
    return survey


def until(
    client: httpx.Client, survey: str, enough: Callable[[dict[str, Any]], bool]
) -> dict[str, Any]:
    """Ask again and again; ``done`` must never go back."""
    deadline, done = time.monotonic() + PATIENCE_S, -1
    while time.monotonic() < deadline:
        found: dict[str, Any] = client.get(f"/v1/surveys/{survey}").json()
        assert found["done"] >= done
        done = found["done"]
        if enough(found):
            return found
        time.sleep(0.05)
    pytest.fail(f"nothing came of it: {found}")


def is_over(found: dict[str, Any]) -> bool:
    return found["state"] not in ("queued", "running")


def result(client: httpx.Client, survey: str, wanted: str) -> bytes:
    response = client.get(f"/v1/surveys/{survey}/result", params={"format": wanted})
    assert response.status_code == 200, response.text
    return response.content


def results(client: httpx.Client, survey: str) -> tuple[object, ...]:
    """Return the result in all formats, without what tells one survey from the next."""
    whole = client.get(f"/v1/surveys/{survey}/result").json()
    del whole["survey"]
    lines = result(client, survey, "csv").decode().split("\r\n")
    cut = [",".join(line.split(",")[:5] + line.split(",")[6:]) for line in lines]
    return whole, cut, result(client, survey, "npy")


@pytest.fixture(scope="module")
def served(launch: Launch) -> Iterator[httpx.Client]:
    """A client of a service with the demonstration cell."""
    process = launch("--demo", "--survey-workers", "2")
    with httpx.Client(base_url=process.url, timeout=PATIENCE_S) as client:
        joints = np.random.default_rng(11).uniform(-80, 80, (1500, 6)).round(1).tolist()
        asked = {"arm": "housing-loader", "tool": "flange", "joints": joints, "singularity": False}
        told = client.post("/v1/poses", json=asked).json()["poses"]
        _in_reach[:] = [{key: pose[key] for key in ("position", "orientation")} for pose in told]
        yield client
    process.terminate()


@pytest.fixture(scope="module")
def finished(served: httpx.Client) -> str:
    """A survey of 300 targets that has succeeded."""
    survey = asked(served, question(300))
    found = until(served, survey, is_over)
    assert found["state"] == "succeeded", found
    return survey


def test_the_result_is_that_of_reach_checks(served: httpx.Client, finished: str) -> None:
    asked_at_once = {**question(300)["request"]}
    checks = served.post("/v1/reach/checks", json=asked_at_once).json()
    told = served.get(f"/v1/surveys/{finished}/result").json()
    assert told["summary"] == checks["summary"]
    assert told["summary"]["refused"] == 1
    assert told["summary"]["reachable"] > 20
    for ours, theirs in zip(told["results"], checks["results"], strict=True):
        same = ("name", "ok", "code", "verdict", "proof", "found")
        assert [ours[key] for key in same] == [theirs[key] for key in same]
        # Beyond travel the CSV, and so a survey, counts solutions and does not list them.
        listed = theirs["solutions"] if theirs["ok"] else []
        if theirs["verdict"] is None:
            assert ours["problem"]["say"] == theirs["problem"]["say"] == ours["reason"]["say"]
            assert theirs["problem"]["pointer"].endswith(ours["problem"]["pointer"])
        else:
            assert "problem" not in ours
            assert (ours["reason"] is None) == (theirs["reason"] is None)
        if ours["verdict"] and theirs["reason"]:
            same = ("code", "say", "stage", "unit")
            assert [ours["reason"][key] for key in same] == [theirs["reason"][key] for key in same]
            assert np.isclose(ours["reason"]["shortfall"], theirs["reason"]["shortfall"])
            nearest = [set(each["reason"]["nearest"] or ()) for each in (ours, theirs)]
            assert nearest[0] == nearest[1]
        for one, other in zip(ours["solutions"], listed, strict=True):
            assert one["branch"] == other["branch"]
            assert np.allclose(one["joints"], other["joints"], rtol=0, atol=1e-9)


def test_all_formats_tell_the_same(served: httpx.Client, finished: str) -> None:
    told = served.get(f"/v1/surveys/{finished}/result").json()["results"]
    response = served.get(f"/v1/surveys/{finished}/result", params={"format": "npy"})
    columns = response.headers["x-columns"].split(",")
    table = np.load(io.BytesIO(response.content))
    assert table.shape == (300, len(columns))
    lines = result(served, finished, "csv").decode().split("\r\n")[1:-1]
    assert len(lines) == 300
    for row, item, line in zip(table, told, lines, strict=True):
        assert row[columns.index("code")] == item["code"] == int(line.split(",")[1])
        assert row[columns.index("solutions")] == item["found"]
        if item["solutions"]:
            joints = row[columns.index("q1") : columns.index("q6") + 1]
            assert joints.tolist() == item["solutions"][0]["joints"]


def test_what_was_asked_stands_beside_what_was_found(served: httpx.Client, finished: str) -> None:
    """As it was typed, to the last digit: planners sort and find by it."""
    asked_for = [
        row.get("position") or row["pose"]["position"]
        for row in question(300)["request"]["targets"]
    ]
    told = served.get(f"/v1/surveys/{finished}/result").json()["results"]
    response = served.get(f"/v1/surveys/{finished}/result", params={"format": "npy"})
    places = np.load(io.BytesIO(response.content))[:, -3:]
    rows = list(csv.DictReader(io.StringIO(result(served, finished, "csv").decode(), newline="")))
    refused = 0
    for wanted, item, place, row in zip(asked_for, told, places, rows, strict=True):
        if item["verdict"] is None:
            refused += 1
            assert item["position"] is None
            assert np.isnan(place).all()
            assert [row[key] for key in "xyz"] == ["", "", ""]
        else:
            assert item["position"] == pytest.approx(wanted, rel=0, abs=1e-9)
            assert item["position"] == place.tolist() == [float(row[key]) for key in "xyz"]
    assert refused == 1


def test_the_report_names_what_is_reached_with_a_reserve(
    served: httpx.Client, finished: str
) -> None:
    page = served.get(f"/v1/surveys/{finished}/report").text
    section = page.split("Reached, but", 1)[1].split("</table>", 1)[0]
    items = served.get(f"/v1/surveys/{finished}/result").json()["results"]
    reserved = {item["name"] for item in items if item["code"] in (1, 2, 3) and item["name"]}
    assert reserved
    for item in items:
        if item["name"]:
            assert (f"<td>{item['name']}</td>" in section) == (item["name"] in reserved)
    assert re.search("near singular|singular|outside working travel", section)


def test_the_report_is_one_page_with_nothing_outside(served: httpx.Client, finished: str) -> None:
    response = served.get(f"/v1/surveys/{finished}/report")
    page = response.text
    assert response.headers["content-type"] == "text/html; charset=utf-8"
    assert "<script" not in page
    assert not re.search(r"(?:src|href)=|url\(|@import", page)
    found = served.get(f"/v1/surveys/{finished}").json()
    for text in (found["id"], found["arm"]["digest"], found["arm"]["setup_digest"], *CAUTIONS):
        assert escape(text) in page
    counts = served.get(f"/v1/surveys/{finished}/result").json()["summary"]
    for verdict, count in counts.items():
        cells = f'<td>{verdict.replace("_", " ")}</td><td class="n">{count}</td><td>'
        assert cells in page
    # Each target that can be drawn has its mark in both views.
    marks = "m-.8 0a", "m-.8-.8h", "m-.9-.9l", "m0-1.1l", "m-.9 0h"
    assert sum(len(re.findall(rf"M[-.0-9]+ [-.0-9]+{mark}", page)) for mark in marks) == (
        2 * 299 + sum(f"M0 0{mark}" in page for mark in marks)  # the legend
    )
    (style,) = re.findall("<style>(.*?)</style>", page, re.DOTALL)
    hashed = base64.b64encode(hashlib.sha256(style.encode()).digest()).decode()
    assert f"style-src 'sha256-{hashed}'" in response.headers["content-security-policy"]


def test_a_table_of_targets_is_the_same_as_a_body(served: httpx.Client) -> None:
    rows = [row["pose"] for row in targets(200) if "pose" in row]
    table = np.array([[*row["position"], *row["orientation"]["values"]] for row in rows])
    file = io.BytesIO()
    np.save(file, table)
    query = {"kind": "reach-checks", "arm": "housing-loader", "tool": "flange", "revision": 1}
    head = {"Content-Type": "application/x-npy"}
    response = served.post("/v1/surveys", params=query, content=file.getvalue(), headers=head)
    assert response.status_code == 202, response.text
    body = question(1)
    body["request"]["targets"] = [
        {"pose": {"position": row[:3], "orientation": {"form": QUATERNION, "values": row[3:]}}}
        for row in table.tolist()
    ]
    ids = [response.json()["id"], asked(served, body)]
    for survey in ids:
        assert until(served, survey, is_over)["state"] == "succeeded"
    assert results(served, ids[0]) == results(served, ids[1])
    assert "<svg" in served.get(f"/v1/surveys/{ids[0]}/report").text
    wrong = served.post("/v1/surveys", params=query, content=b"no", headers=head)
    assert wrong.status_code == 400
    file = io.BytesIO()
    np.save(file, np.zeros((2, 5)))
    wrong = served.post("/v1/surveys", params=query, content=file.getvalue(), headers=head)
    assert (wrong.status_code, wrong.json()["code"]) == (422, "unusable-value")


def test_csv_of_targets_is_the_same_as_a_body(served: httpx.Client) -> None:
    lines = ["name,x,y,z,r1,r2,r3,freedom,approach"]
    rows: list[dict[str, Any]] = []
    for place, pose in enumerate(_in_reach[:120]):
        x, y, z = pose["position"]
        name = f"lug-{place}" if place % 2 else ""
        row: dict[str, Any] = {"name": name} if name else {}
        orientation = {"form": "zyx-current", "values": [place, 0.5, -place]}
        if place % 5:
            row["pose"] = {"position": [x, y, z], "orientation": orientation}
            angles = f"{place},0.5,{-place}"
        else:
            row["position"], angles = [x, y, z], ",,"
        freedom = "spin" if place % 7 == 1 and place % 5 else ""
        back = "25" if place % 11 == 1 and place % 5 else ""
        row |= {"freedom": freedom} if freedom else {}
        row |= {"approach": {"distance": 25}} if back else {}
        rows.append(row)
        lines.append(f"{name},{x!r},{y!r},{z!r},{angles},{freedom},{back}")
    rows.append({"position": ["high", 0, 0]})
    lines.append(",high,0,0,,,,,")
    body = question(1)
    body["request"]["targets"] = rows
    query = {
        "kind": "reach-checks",
        "arm": "housing-loader",
        "tool": "flange",
        "form": "zyx-current",
    }
    head = {"Content-Type": "text/csv"}
    sent = {"params": query, "headers": head}
    response = served.post("/v1/surveys", content="\r\n".join(lines), **sent)  # type: ignore[arg-type]
    assert response.status_code == 202, response.text
    ids = [response.json()["id"], asked(served, body)]
    for survey in ids:
        assert until(served, survey, is_over)["state"] == "succeeded"
    assert results(served, ids[0]) == results(served, ids[1])
    for wrong, code in (("x,y\n1,2", "missing-field"), ("x,y,z\n1,2", "unusable-value")):
        answer = served.post("/v1/surveys", content=wrong, **sent)  # type: ignore[arg-type]
        assert (answer.status_code, answer.json()["code"]) == (422, code)


def test_long_bodies_are_read_elsewhere_and_mean_the_same(served: httpx.Client) -> None:
    """Bodies of some megabytes, by way of the process that reads them, and the same in short."""
    many = [{**row, "name": f"row {n}"} for n, row in enumerate(targets(1400) * 10)]
    body = question(1)
    body["request"]["targets"] = many
    raw = json.dumps(body)
    assert len(raw) > 2_000_000
    head = {"Content-Type": "application/json"}
    found = served.post("/v1/surveys", content=raw, headers=head)
    assert found.status_code == 202, found.text
    assert found.json()["total"] == len(many)
    survey = found.json()["id"]
    body["request"]["targets"] = many[:4000]
    short = asked(served, body)
    for one in (survey, short):
        assert until(served, one, is_over)["state"] == "succeeded"
    long_told, told = (served.get(f"/v1/surveys/{one}/result").json() for one in (survey, short))
    # The last piece of the short one is not the same piece.
    assert long_told["results"][:2000] == told["results"][:2000]
    assert [row["name"] for row in long_told["results"]] == [row["name"] for row in many]
    body["request"]["targets"] = [*many, many[7]]
    for wrong, code, pointer in (
        (json.dumps(body), "unusable-value", f"/request/targets/{len(many)}/name"),
        (raw[:-3], "unparseable", None),
        (raw.replace("reach-checks", "samples", 1), "unknown-field", "/request/targets"),
        (raw.replace("position", "positron", 1), "unknown-field", None),
    ):
        answer = served.post("/v1/surveys", content=wrong, headers=head)
        assert answer.status_code in (400, 422), answer.text
        assert answer.json()["code"] == code
        if pointer:
            assert answer.json()["errors"][0]["pointer"] == pointer


def test_samples_are_those_of_reach_samples(served: httpx.Client) -> None:
    request = {"arm": "housing-loader", "count": 40_000, "seed": 3, "joints": True}
    survey = asked(served, {"kind": "samples", "request": request})
    found = until(served, survey, is_over)
    assert (found["state"], found["done"], found["counts"]["judged"]) == (
        "succeeded",
        40_000,
        16384,
    )
    for wanted in ("npy", "csv", "json"):
        at_once = served.post("/v1/reach/samples", params={"format": wanted}, json=request)
        if wanted != "json":
            assert result(served, survey, wanted) == at_once.content
            continue
        told, expected = json.loads(result(served, survey, "json")), at_once.json()
        assert {key: told[key] for key in expected if key != "form"} == {
            key: value for key, value in expected.items() if key != "form"
        }
    page = served.get(f"/v1/surveys/{survey}/report").text
    assert "How far the tool gets" in page
    wrong = served.get(f"/v1/surveys/{survey}/result?format=svg")
    assert (wrong.status_code, wrong.json()["errors"][0]["pointer"]) == (422, "/format")


def test_an_envelope_is_that_of_reach_envelope(served: httpx.Client) -> None:
    request = {"arm": "housing-loader", "point": "wrist", "within": "working-travel"}
    survey = asked(served, {"kind": "envelope", "title": "for the layout", "request": request})
    found = until(served, survey, is_over)
    assert (found["state"], found["done"], found["total"]) == ("succeeded", 1, 1)
    told = served.get(f"/v1/surveys/{survey}/result").json()
    expected = served.post("/v1/reach/envelope", json=request).json()
    assert {key: told[key] for key in expected} == expected
    address = f"/v1/surveys/{survey}/result"
    drawing = served.get(address, params={"format": "svg"})
    assert drawing.headers["content-type"].startswith("image/svg+xml")
    rows = served.get(address, headers={"Accept": "text/csv"}).text.splitlines()
    assert rows[0] == "within,view,curve,boundary,radius_or_x_mm,height_or_y_mm"
    table = served.get(address, headers={"Accept": "application/x-npy"})
    assert table.headers["x-columns"] == rows[0]
    shape = np.load(io.BytesIO(table.content)).shape
    points = [curve["points"] for curve in told["working_travel"]["section"]["curves"]]
    points += [curve["points"] for curve in told["working_travel"]["plan"]["curves"]]
    assert shape == (len(rows) - 1, 6) == (sum(map(len, points)), 6)
    page = served.get(f"/v1/surveys/{survey}/report").text
    assert "Areas and volume" in page
    assert "<?xml" not in page
    assert "style=" not in page


def test_it_keeps_request_arm_and_version(served: httpx.Client, finished: str) -> None:
    found = served.get(f"/v1/surveys/{finished}").json()
    assert found["request"]["arm"] == {"name": "housing-loader", "revision": 1}
    assert "targets" not in found["request"]
    assert found["arm"]["digest"] == served.get("/v1/arms/housing-loader").json()["digest"]
    assert found["software"]
    assert found["created_at"] <= found["started_at"] <= found["finished_at"]


def test_the_stream_ends_with_the_survey(served: httpx.Client) -> None:
    survey = asked(served, question(2000))
    done: list[int] = []
    with served.stream("GET", f"/v1/surveys/{survey}/progress") as stream:
        assert stream.headers["content-type"].startswith("text/event-stream")
        for line in stream.iter_lines():
            if line.startswith("id: "):
                done.append(int(line[4:]))
    assert done == sorted(done)
    assert done[-1] == 2000
    assert len(done) >= 2


def test_the_same_key_gives_the_same_survey(served: httpx.Client) -> None:
    body, key = question(5), {"Idempotency-Key": "5f0c"}
    survey = asked(served, body, **key)
    assert asked(served, body, **key) == survey
    other = served.post("/v1/surveys", json=question(6), headers=key)
    assert other.status_code == 422
    assert other.json()["errors"][0]["pointer"] == "/idempotency-key"


def test_cancelled_within_a_second_and_twice(served: httpx.Client) -> None:
    survey = asked(served, question(20_000))
    behind = asked(served, question(5))
    until(served, survey, lambda found: found["done"] > 0)
    early = served.get(f"/v1/surveys/{survey}/result")
    assert early.status_code == 409
    assert int(early.headers["retry-after"]) >= 1
    assert early.json()["code"] == "not-finished"
    assert served.delete(f"/v1/surveys/{survey}").status_code == 409
    for _ in range(2):
        answer = served.post(f"/v1/surveys/{survey}/cancel")
        assert (answer.status_code, answer.json()["state"]) == (200, "cancelled")
    assert until(served, behind, is_over)["state"] == "succeeded"
    late = served.get(f"/v1/surveys/{survey}")
    assert late.json()["done"] == answer.json()["done"]
    refused = served.get(f"/v1/surveys/{survey}/result")
    assert (refused.status_code, "retry-after" in refused.headers) == (409, False)
    assert served.delete(f"/v1/surveys/{survey}").status_code == 204
    assert served.get(f"/v1/surveys/{survey}").status_code == 404


def test_an_arm_that_was_removed_meanwhile(served: httpx.Client) -> None:
    arm = served.get("/v1/arms/housing-loader").json()["arm"]
    arm = {key: value for key, value in arm.items() if key != "cell"}
    arm["frames"] = {}
    assert served.post("/v1/arms", json={**arm, "name": "spare-loader"}).status_code == 201
    front = asked(served, question(2000))
    body = question(20)
    body["request"]["arm"] = "spare-loader"
    key = {"Idempotency-Key": "spare"}
    survey = asked(served, body, **key)
    assert served.delete("/v1/arms/spare-loader", headers={"If-Match": "*"}).status_code == 204
    assert asked(served, body, **key) == survey
    assert served.post("/v1/surveys", json=body).status_code == 422
    assert until(served, survey, is_over)["state"] == "succeeded"
    assert until(served, front, is_over)["state"] == "succeeded"


def test_pages_are_newest_first(served: httpx.Client) -> None:
    made = [asked(served, question(1)) for _ in range(5)]
    found: list[str] = []
    address: str | None = "/v1/surveys?page_size=2"
    while address is not None and len(found) < 5:
        page = served.get(address)
        found += [survey["id"] for survey in page.json()["surveys"]]
        address = page.links["next"]["url"] if "next" in page.links else None
    assert found[:5] == made[::-1]


@pytest.mark.parametrize(
    ("change", "code", "pointer"),
    [
        ({"kind": "samples-of-air"}, "unusable-value", "/kind"),
        ({"title": "x" * 201}, "unusable-value", "/title"),
        ({"request": {"targets": [{"position": [0, 0, 0]}]}}, "missing-field", "/request"),
        ({"targets": []}, "unusable-value", "/request/targets"),
        ({"targets": {}}, "unusable-value", "/request/targets"),
        ({"targets": [{"hue": 1}]}, "unknown-field", "/request/targets/0/hue"),
        ({"targets": [{"position": [0, 0]}]}, "unusable-value", "/request/targets/0/position"),
        ({"arm": "nobody"}, "unknown-arm", "/request/arm"),
        ({"frame": "nowhere"}, "unknown-frame", "/request/frame"),
        ({"solutions": "some"}, "unusable-value", "/request/solutions"),
        ({"speed": 3}, "unknown-field", "/request/speed"),
        ({"targets": [{"name": "a"}] * 2}, "unusable-value", "/request/targets/1/name"),
    ],
)  # fmt: skip
def test_what_cannot_be_used_is_refused_where_it_stands(
    served: httpx.Client, change: dict[str, Any], code: str, pointer: str
) -> None:
    body = question(1)
    if change.keys() & body.keys():
        body |= change
    else:
        body["request"] |= change
    refused = served.post("/v1/surveys", json=body)
    assert refused.status_code == 422, refused.text
    assert refused.json()["code"] == code
    assert refused.json()["errors"][0]["pointer"].startswith(pointer), refused.text


@pytest.mark.parametrize(
    ("kind", "request_", "pointer"),
    [
        ("samples", {"count": 0}, "/request/count"),
        ("samples", {"count": 10**9}, "/request/count"),
        ("samples", {"count": 9, "targets": []}, "/request/targets"),
        ("samples", {}, "/request"),
        ("envelope", {"resolution": 0}, "/request/resolution"),
        ("envelope", {"tool": "gripper", "resolution": 1e-6}, "/request/resolution"),
        ("envelope", {"point": "elbow"}, "/request/point"),
    ],
)
def test_other_kinds_are_refused_where_it_stands(
    served: httpx.Client, kind: str, request_: dict[str, Any], pointer: str
) -> None:
    body = {"kind": kind, "request": {"arm": "housing-loader", **request_}}
    refused = served.post("/v1/surveys", json=body)
    assert refused.status_code == 422, refused.text
    assert refused.json()["errors"][0]["pointer"].startswith(pointer), refused.text


def test_unknown_ids_and_keys_are_refused(served: httpx.Client) -> None:
    for name in ("0" * 20, "x", "%00"):
        for method, end in (("GET", ""), ("GET", "/result"), ("POST", "/cancel"), ("DELETE", "")):
            refused = served.request(method, f"/v1/surveys/{name}{end}")
            assert (refused.status_code, refused.json()["code"]) == (404, "unknown-survey")
    long = served.post("/v1/surveys", json=question(1), headers={"Idempotency-Key": "x" * 201})
    assert (long.status_code, long.json()["errors"][0]["in"]) == (422, "header")


def children_of(process: int) -> list[int]:
    """Return processes started by another and still there, but for what watches semaphores."""
    listed = Path(f"/proc/{process}/task/{process}/children")
    if not listed.exists():
        pytest.skip("this system does not list the children of a process")
    found = [int(child) for child in listed.read_text().split()]
    for thread in Path(f"/proc/{process}/task").iterdir():
        found += [int(child) for child in (thread / "children").read_text().split()]
    return sorted({c for c in found if b"spawn_main" in Path(f"/proc/{c}/cmdline").read_bytes()})


def test_kills_of_a_worker_and_of_the_service_cost_chunks_and_no_bits(
    served: httpx.Client, launch: Launch, tmp_path: Path
) -> None:
    body = question(12_000)
    database = str(tmp_path / "arms.db")
    process = launch("--demo", "--survey-workers", "2", database=database)
    with httpx.Client(base_url=process.url, timeout=PATIENCE_S) as client:
        survey = asked(client, body)
        until(client, survey, lambda found: found["done"] > 0)
        workers = children_of(process.process.pid)
        assert workers
        os.kill(workers[0], signal.SIGKILL)
        before = client.get(f"/v1/surveys/{survey}").json()
        assert not is_over(before)
        done = until(client, survey, lambda found: found["done"] > before["done"])["done"]
        assert done < 12_000
        process.process.kill()
        process.process.wait(10)
    again = launch("--demo", "--survey-workers", "1", database=database)
    with httpx.Client(base_url=again.url, timeout=PATIENCE_S) as client:
        first = client.get(f"/v1/surveys/{survey}").json()
        assert first["done"] >= done
        assert first["state"] in ("running", "succeeded")
        assert until(client, survey, is_over)["state"] == "succeeded"
        # The same once more, without a kill, by two processes instead of one.
        other = asked(served, body)
        until(served, other, is_over)
        assert results(client, survey) == results(served, other)
    assert again.terminate() < 3


def test_kills_cost_an_envelope_pieces_and_no_bits(launch: Launch, tmp_path: Path) -> None:
    request = {"arm": "wash-arm", "within": "travel", "resolution": 9}
    database = str(tmp_path / "arms.db")
    process = launch("--demo", "--survey-workers", "2", database=database)
    with httpx.Client(base_url=process.url, timeout=PATIENCE_S) as client:
        survey = asked(client, {"kind": "envelope", "request": request})
        total = until(client, survey, lambda found: found["done"] > 0)["total"]
        os.kill(children_of(process.process.pid)[0], signal.SIGKILL)
        before = client.get(f"/v1/surveys/{survey}").json()
        assert not is_over(before)
        done = until(client, survey, lambda found: found["done"] > before["done"])["done"]
        process.process.kill()
        process.process.wait(10)
    again = launch("--demo", "--survey-workers", "1", database=database)
    with httpx.Client(base_url=again.url, timeout=PATIENCE_S) as client:
        first = client.get(f"/v1/surveys/{survey}").json()
        assert done <= first["done"] <= total
        found = until(client, survey, is_over)
        assert (found["state"], found["done"], found["total"]) == ("succeeded", total, total)
        told = client.get(f"/v1/surveys/{survey}/result").json()
        expected = client.post("/v1/reach/envelope", json=request).json()
        assert {key: told[key] for key in expected} == expected
    again.terminate()


@pytest.mark.usefixtures("served")
def test_a_full_disk_fails_the_survey_and_not_the_service(
    launch: Launch, small_disk: SmallDisk
) -> None:
    process = launch("--demo", database=str(small_disk.folder / "arms.db"))
    with httpx.Client(base_url=process.url, timeout=PATIENCE_S) as client:
        # It is full before the first worker is ready.
        survey = asked(client, question(1500))
        small_disk.fill(leave=0)
        found = until(client, survey, is_over)
        assert found["state"] == "failed"
        assert "disk is full" in found["reason"]
        assert (
            client.get("/v1/arms/housing-loader/pose?q=0,0,0,0,0,0&tool=flange").status_code == 200
        )
        small_disk.free()
        assert until(client, survey, is_over)["state"] == "failed"
        assert until(client, asked(client, question(3)), is_over)["state"] == "succeeded"
    process.terminate()


@pytest.mark.usefixtures("served")
def test_a_cluster_that_does_not_answer_fails_the_survey(launch: Launch) -> None:
    process = launch("--demo", "--cluster", "tcp://127.0.0.1:9")
    with httpx.Client(base_url=process.url, timeout=PATIENCE_S) as client:
        found = until(client, asked(client, question(3)), is_over)
        assert found["state"] == "failed"
        assert "cluster" in found["reason"]
        refused = client.get(f"/v1/surveys/{found['id']}/result")
        assert (refused.status_code, refused.headers.get("retry-after")) == (409, None)
        assert found["reason"] in refused.json()["detail"]
        assert client.get("/v1/ping").status_code == 200
    process.terminate()


@pytest.fixture
def cluster(tmp_path: Path) -> Iterator[str]:
    """The address of a scheduler on loopback with two workers."""
    if find_spec("distributed") is None:
        pytest.skip("the package distributed is not installed")
    meeting = tmp_path / "scheduler.json"
    where = ["--scheduler-file", str(meeting)]
    commands = [
        ["scheduler", "--host", "127.0.0.1", "--port", "0", "--no-dashboard", *where],
        *[["worker", "--nthreads", "1", "--no-nanny", "--no-dashboard", *where]] * 2,
    ]
    environment = {**os.environ, "PYTHONPATH": str(ROOT)}
    started = []
    for command in commands:
        started.append(
            subprocess.Popen(
                [sys.executable, "-m", "distributed.cli.dask_" + command[0], *command[1:]],
                cwd=tmp_path,
                env=environment,
                stdout=subprocess.DEVNULL,
                stderr=subprocess.DEVNULL,
            )
        )
        deadline = time.monotonic() + 20
        while not meeting.exists() and time.monotonic() < deadline:
            time.sleep(0.05)
    yield str(json.loads(meeting.read_text())["address"])
    for process in reversed(started):
        process.kill()
        process.wait(10)


@pytest.mark.usefixtures("served")
def test_a_cluster_makes_the_same_bits(served: httpx.Client, launch: Launch, cluster: str) -> None:
    process = launch("--demo", "--cluster", cluster)
    with httpx.Client(base_url=process.url, timeout=PATIENCE_S) as client:
        there = asked(client, question(2000))
        found = until(client, there, is_over)
        assert found["state"] == "succeeded", found
        here = asked(served, question(2000))
        until(served, here, is_over)
        assert results(client, there) == results(served, here)
        request = {"arm": "wash-arm", "within": "travel", "resolution": 15}
        there = asked(client, {"kind": "envelope", "request": request})
        assert until(client, there, is_over)["total"] > 4
        told = client.get(f"/v1/surveys/{there}/result").json()
        expected = served.post("/v1/reach/envelope", json=request).json()
        assert {key: told[key] for key in expected} == expected
    process.terminate()


def test_a_thousand_wait_their_turn(served: httpx.Client) -> None:
    """The last of all: what still waits then ends with the service."""
    body = question(1)
    # The front one keeps the others waiting; a thousand that are worked off take a minute.
    samples = {"arm": "housing-loader", "count": 5_000_000}
    front = asked(served, {"kind": "samples", "request": samples})
    made = [asked(served, body) for _ in range(1000)]
    waiting = [served.get(f"/v1/surveys/{survey}").json()["state"] for survey in made[-3:]]
    assert set(waiting) <= {"queued", "running", "succeeded"}
    assert served.post(f"/v1/surveys/{front}/cancel").status_code == 200
    for survey in made[:5]:
        assert until(served, survey, is_over)["state"] == "succeeded"
    assert served.get("/v1/ping").status_code == 200
