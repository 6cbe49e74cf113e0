"""Records over HTTP: kept once and for good, found again, exported, refused."""

import asyncio
import csv
import io
import json
import threading
from collections.abc import Callable
from pathlib import Path
from typing import Any

import httpx
import pytest
from fastapi import FastAPI

from service.app import create_app
from service.errors import NoLivePose
from service.live.samples import Sample
from service.settings import Settings
from service.wire.records import RecordRequest
from tests.conftest import ServerProcess
from tests.contract.refusals import refusal, sent

pytestmark = pytest.mark.anyio

LOADER = "/v1/arms/housing-loader/records"
POSTURE = [0, -90, 90, 0, 45, 0]
Launch = Callable[..., ServerProcess]


@pytest.fixture
def settings() -> Settings:
    """The demonstration cell."""
    return Settings(database=":memory:", demo=True)


async def kept(client: httpx.AsyncClient, path: str = LOADER, **body: Any) -> dict[str, Any]:
    answer = await client.post(path, json={"joints": POSTURE, "tool": "flange", **body})
    assert answer.status_code == 201, answer.text
    found: dict[str, Any] = answer.json()
    assert answer.headers["location"] == f"{path}/{found['id']}"
    return found


async def test_a_record_is_the_pose_with_all_that_leads_back_to_it(
    client: httpx.AsyncClient,
) -> None:
    question = {"arm": "housing-loader", "joints": [POSTURE], "tool": "flange"}
    pose = (await client.post("/v1/poses", json=question)).json()
    fields = {"shift": "b", "torque_Nm": 12.5, "scrap": False, "box": 7, "note": None}
    at = "2026-11-30T23:59:59.500+01:00"
    found = await kept(client, serial="HP-0001", tag=5, fields=fields, sampled_at=at)
    assert found["arm"] == pose["arm"]
    for key in ("position", "orientation", "singularity", "findings", "code"):
        assert found[key] == pose["poses"][0][key]
    assert (found["joints"], found["units"], found["frame"]) == (POSTURE, "mm-deg", "base")
    assert (found["source"], found["quality"], found["reason"]) == ("given", "good", None)
    assert (found["serial"], found["tag"], found["fields"]) == ("HP-0001", 5, fields)
    assert found["sampled_at"] == "2026-11-30T22:59:59.500Z"
    assert found["received_at"] <= found["computed_at"]
    for path in (f"{LOADER}/{found['id']}", f"/v1/records/{found['id']}"):
        again = await client.get(path)
        assert again.json() == found
        assert "immutable" in again.headers["cache-control"]


async def test_a_record_stays_as_it_was_whatever_becomes_of_its_arm(
    client: httpx.AsyncClient,
) -> None:
    first = await kept(client)
    arm = (await client.get("/v1/arms/housing-loader")).json()["arm"]
    rows = [{**arm["rows"][0], "d": arm["rows"][0]["d"] + 1}, *arm["rows"][1:]]
    own = {key: arm[key] for key in ("name", "convention", "units", "tools")}
    put = await client.put(
        "/v1/arms/housing-loader", json={**own, "rows": rows}, headers={"if-match": "*"}
    )
    assert put.status_code == 200, put.text
    second, old = await kept(client), await kept(client, revision=1)
    assert (second["arm"]["revision"], old["arm"]["revision"]) == (2, 1)
    assert second["position"] != first["position"] == old["position"]
    assert (await client.delete("/v1/arms/housing-loader")).status_code == 204
    assert (await client.get(f"{LOADER}/{first['id']}")).json() == first
    assert len((await client.get(LOADER)).json()["records"]) == 3
    refusal(await client.post(LOADER, json={"joints": POSTURE}), "unknown-arm", 404)


async def test_the_same_key_makes_one_record(client: httpx.AsyncClient) -> None:
    body = {"joints": POSTURE, "serial": "HP-1"}
    key = {"idempotency-key": "8a1f"}
    answers = await asyncio.gather(*(client.post(LOADER, json=body, headers=key) for _ in range(8)))
    assert {answer.status_code for answer in answers} == {201}
    assert len({answer.content for answer in answers}) == 1
    assert len({answer.headers["location"] for answer in answers}) == 1
    assert len((await client.get("/v1/records")).json()["records"]) == 1
    for path, other in [
        (LOADER, {**body, "serial": "HP-2"}),
        ("/v1/arms/lathe-tender/records", body),
    ]:
        problem = refusal(await client.post(path, json=other, headers=key), "unusable-value", 422)
        assert problem["errors"][0]["pointer"] == "/idempotency-key"
    # A refused request has used up no key.
    late = {"idempotency-key": "9b"}
    refusal(await client.post(LOADER, json={"joints": [1]}, headers=late), "wrong-joint-count")
    assert (await client.post(LOADER, json=body, headers=late)).status_code == 201


async def test_lists_are_filtered_and_paged(client: httpx.AsyncClient) -> None:
    for number in range(7):
        at = f"2026-11-30T0{number}:00:00Z"
        await kept(client, serial=f"HP-{number % 2}", tag=number, sampled_at=at)
    tender = await kept(client, "/v1/arms/lathe-tender/records", joints=[0] * 6, serial="HP-0")

    async def tags(query: str, path: str = "/v1/records") -> list[int | None]:
        answer = await client.get(f"{path}?{query}")
        assert answer.status_code == 200, answer.text
        return [found["tag"] for found in answer.json()["records"]]

    assert await tags("serial=HP-0") == [None, 6, 4, 2, 0]
    assert await tags("serial=HP-0", LOADER) == [6, 4, 2, 0]
    assert await tags("serial=HP-1&arm=housing-loader&tag=3") == [3]
    assert await tags("from=2026-11-30T05:00:00%2B01:00&to=2026-11-30T06:00:00Z") == [5, 4]
    assert await tags("from=2026-11-30T05:00:00+01:00&to=2026-11-30T06:00:00Z") == [5, 4]
    assert await tags("quality=bad") == []
    assert await tags("arm=lathe-tender") == [tender["tag"]]
    seen: list[Any] = []
    path = "/v1/records?page_size=3&serial=HP-0"
    while path:
        answer = await client.get(path)
        seen += [found["tag"] for found in answer.json()["records"]]
        path = answer.links.get("next", {}).get("url", "")
        assert bool(path) == (answer.json()["next_page_token"] is not None)
    assert seen == [None, 6, 4, 2, 0]


HOSTILE = ["=1+1", "+49", "-x", "@SUM(A1)", '"; DROP TABLE', "a,b", "Größe ü", "'", "<b>"]


async def test_a_table_shows_what_senders_wrote_and_runs_none_of_it(
    client: httpx.AsyncClient,
) -> None:
    for serial in HOSTILE:
        await kept(client, serial=serial, fields={"note": serial})
    await kept(client, form="matrix")
    await kept(client, "/v1/arms/pallet-stacker/records", joints=[0] * 4, form="xyz-fixed")
    answer = await client.get("/v1/records?format=csv")
    assert answer.headers["content-type"].startswith("text/csv")
    lines = list(csv.DictReader(io.StringIO(answer.text, newline="")))
    stored = (await client.get("/v1/records")).json()["records"][::-1]
    assert len(lines) == len(stored) == len(HOSTILE) + 2
    for line, record in zip(lines, stored, strict=True):
        serial = record["serial"] or ""
        assert line["serial"] == ("'" if serial.startswith(("=", "+", "-", "@")) else "") + serial
        assert not any(cell.startswith(("=", "+", "@")) for cell in line.values())
        assert json.loads(line["fields"]) == record["fields"]
        assert (line["id"], line["digest"]) == (record["id"], record["arm"]["digest"])
        numbers = [line["x"], line["y"], line["z"]]
        assert list(map(float, numbers)) == record["position"]
        count = len(record["joints"])
        joints = [line[f"q{joint}"] for joint in range(1, 7)]
        assert list(map(float, joints[:count])) == record["joints"]
        assert joints[count:] == [""] * (6 - count)
    assert [stored[place]["serial"] for place in range(len(HOSTILE))] == HOSTILE
    matrix = lines[len(HOSTILE)]
    rows = stored[len(HOSTILE)]["orientation"]["values"]
    turned = [float(matrix[f"r{number}"]) for number in range(1, 10)]
    assert turned == [number for row in rows for number in row]
    accepted = await client.get("/v1/records", headers={"accept": "text/csv"})
    assert accepted.text == answer.text
    assert (await client.get("/v1/records?format=csv&tag=1")).text.count("\r\n") == 1
    assert (await client.head("/v1/records?format=csv")).status_code == 200


async def test_a_long_table_is_sent_in_parts_and_whole(client: httpx.AsyncClient) -> None:
    first = await kept(client)
    store = client._transport.app.state.opened.records  # type: ignore[attr-defined]
    template = store.get(first["id"])
    for number in range(1200):
        record = f"{number:020x}"
        copy = type(template)(
            record, *(getattr(template, name) for name in template.__slots__[1:-1]),
            {**first, "id": record},
        )  # fmt: skip
        store.add(copy, key=None, digest="")
    answer = await client.get("/v1/records?format=csv")
    lines = answer.text.split("\r\n")
    assert [line[:20] for line in lines[1:-2]] == [f"{number:020x}" for number in range(1200)]
    assert lines[-2].startswith(first["id"])


async def test_a_table_has_no_line_wider_than_its_head(
    client: httpx.AsyncClient, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Another is kept while the table is read: an arm of more joints than all before."""
    await kept(client, "/v1/arms/pallet-stacker/records", joints=[0] * 4, form="xyz-fixed")
    desk = client._transport.app.state.records  # type: ignore[attr-defined]
    oldest, more = desk.oldest, []

    def read_late(*which: Any) -> Any:
        question = RecordRequest.model_validate({"joints": POSTURE, "tool": "flange"})
        missing = NoLivePose("not asked for")
        more.append(desk.create("housing-loader", question, missing, None, b""))
        return oldest(*which)

    monkeypatch.setattr(desk, "oldest", read_late)
    lines = (await client.get("/v1/records?format=csv")).text.split("\r\n")
    assert more
    assert len(lines) == 3
    assert "q5" not in lines[0]


@pytest.mark.parametrize(
    ("body", "code", "pointer"),
    [
        ({"joints": [1, 2]}, "wrong-joint-count", "/joints"),
        ({"joints": [POSTURE]}, "wrong-joint-count", "/joints"),
        ({"joints": [0, 0, 0, 0, 0, float("nan")]}, "not-finite", "/joints/5"),
        ({"joints": [0, 0, 0, 0, 0, "1"]}, "unusable-value", "/joints/5"),
        ({"joints": [0, 0, 0, 0, 0, 1e12]}, "out-of-range", "/joints/5"),
        ({"serial": ""}, "unusable-value", "/serial"),
        ({"serial": "x" * 101}, "unusable-value", "/serial"),
        ({"serial": "two\nlines"}, "unusable-value", "/serial"),
        ({"serial": "nul\0"}, "unusable-value", "/serial"),
        ({"serial": "turned \u202e round"}, "unusable-value", "/serial"),
        ({"serial": 17}, "unusable-value", "/serial"),
        ({"tag": 2**53 + 1}, "unusable-value", "/tag"),
        ({"tag": True}, "unusable-value", "/tag"),
        ({"fields": {"a b": 1}}, "unusable-value", "/fields/a b"),
        ({"fields": {"": 1}}, "unusable-value", "/fields/"),
        ({"fields": {"x" * 49: 1}}, "unusable-value", f"/fields/{'x' * 49}"),
        ({"fields": {"a": [1]}}, "unusable-value", "/fields/a"),
        ({"fields": {"a": {}}}, "unusable-value", "/fields/a"),
        ({"fields": {"a": "x" * 501}}, "unusable-value", "/fields/a"),
        ({"fields": {"a": float("inf")}}, "not-finite", "/fields/a"),
        ({"fields": {"a": 2**60}}, "unusable-value", "/fields/a"),
        ({"fields": {"a": "\x1b[31m"}}, "unusable-value", "/fields/a"),
        ({"fields": {f"f{number}": 1 for number in range(33)}}, "unusable-value", "/fields"),
        ({"fields": []}, "unusable-value", "/fields"),
        ({"sampled_at": "yesterday"}, "unusable-value", "/sampled_at"),
        ({"sampled_at": "2026-11-30T00:00:00"}, "unusable-value", "/sampled_at"),
        ({"sampled_at": "2026-02-30T00:00:00Z"}, "unusable-value", "/sampled_at"),
        ({"sampled_at": "9999-01-01T00:00:00Z"}, "unusable-value", "/sampled_at"),
        ({"revision": 99}, "unknown-revision", "/revision"),
        ({"revision": 0}, "unusable-value", "/revision"),
        ({"expect": "00000000"}, "digest-differs", "/expect"),
        ({"tool": "crane"}, "unknown-tool", "/tool"),
        ({"frame": "moon"}, "unknown-frame", "/frame"),
        ({"frame": "flange"}, "unknown-frame", "/frame"),
        ({"form": "polar"}, "unusable-value", "/form"),
        ({"units": "mm"}, "unusable-value", "/units"),
        ({"serail": "x"}, "unknown-field", "/serail"),
    ],
)
async def test_what_cannot_be_kept_is_refused_where_it_is(
    client: httpx.AsyncClient, body: dict[str, Any], code: str, pointer: str
) -> None:
    asked = {"joints": POSTURE, "tool": "flange", **body}
    status = 409 if code == "digest-differs" else 422
    problem = refusal(await sent(client, LOADER, asked), code, status)
    assert problem["errors"][0]["pointer"] == pointer
    assert (await client.get("/v1/records")).json()["records"] == []


async def test_an_unknown_arm_a_long_body_and_other_rubbish(client: httpx.AsyncClient) -> None:
    for arm in ("no-arm", "NO", "a%00b", "..%2f"):
        path = f"/v1/arms/{arm}/records"
        answer = await client.post(path, json={"joints": POSTURE})
        assert answer.status_code == 404
    refusal(await client.get("/v1/arms/no-arm/records"), "unknown-arm", 404)
    refusal(await client.get("/v1/records?arm=no-arm"), "unknown-arm", 422)
    refusal(await client.get("/v1/records?arm=%00"), "unknown-arm", 422)
    big = await client.post(
        LOADER, content=b" " * 140_000, headers={"content-type": "application/json"}
    )
    refusal(big, "too-large", 413)
    refusal(await client.post(LOADER, json=[1]), "unusable-value", 422)
    other = await client.post(LOADER, content=b"q=1", headers={"content-type": "text/plain"})
    refusal(other, "wrong-media-type", 415)
    for key in ("", "x" * 201):
        answer = await client.post(
            LOADER, json={"joints": POSTURE}, headers={"idempotency-key": key}
        )
        refusal(answer, "unusable-value", 422)


@pytest.mark.parametrize(
    ("query", "code"),
    [
        ("page_token=zz", "unusable-value"),
        ("page_size=0", "unusable-value"),
        ("page_size=x", "unparseable"),
        ("from=now", "unusable-value"),
        ("to=2026-13-01T00:00:00Z", "unusable-value"),
        ("tag=1.5", "unparseable"),
        ("tag=9999999999999999999", "unusable-value"),
        ("quality=fine", "unusable-value"),
        ("serial=a%00", "unusable-value"),
        ("format=npy", "unusable-value"),
        ("colour=red", "unknown-field"),
        ("tag=1&tag=2", "unusable-value"),
    ],
)
async def test_a_list_refuses_what_it_does_not_know(
    client: httpx.AsyncClient, query: str, code: str
) -> None:
    refusal(await client.get(f"/v1/records?{query}"), code)


async def test_an_unknown_record(client: httpx.AsyncClient) -> None:
    found = await kept(client)
    for path in (
        "/v1/records/nothing",
        f"/v1/records/{'0' * 20}",
        f"/v1/arms/lathe-tender/records/{found['id']}",
    ):
        refusal(await client.get(path), "unknown-record", 404)


async def test_the_live_value_is_kept_with_what_is_thought_of_it(
    app: FastAPI, client: httpx.AsyncClient
) -> None:
    live, stored = app.state.live, app.state.arms.get("lathe-tender")
    path = "/v1/arms/lathe-tender/records"
    refusal(await client.post(path, json={"serial": "HP-1"}), "no-live-pose", 409)
    now_s, now_ms = live.clock.steady_s(), live.clock.wall_ms()
    joints = tuple(0.01 * joint for joint in range(stored.read.arm.joint_count))
    live.feed(stored, [Sample(joints, now_s, now_ms, simulated=True)])
    answer = await client.post(path, json={"units": "m-rad", "serial": "HP-1"})
    assert answer.status_code == 201, answer.text
    found = answer.json()
    assert (found["source"], found["quality"], found["reason"]) == ("live", "good", None)
    assert found["joints"] == list(joints)
    assert (found["code"], found["flags"] & 128) == (8, 128)
    assert found["sampled_at"] == found["received_at"] <= found["computed_at"]
    # The input stops; what is kept says so.
    assert live.get("lathe-tender").became_stale(now_s + 60)
    found = (await client.post(path)).json()
    assert (found["quality"], found["reason"], found["flags"] & 64) == ("bad", "stale", 64)
    assert found["sampled_at"] == answer.json()["sampled_at"]
    body = {"sampled_at": "2026-11-30T00:00:00Z"}
    refusal(await client.post(path, json=body), "unusable-value", 422)
    foreign = {"origin": "http://elsewhere.example"}
    assert (await client.post(path, headers=foreign)).status_code >= 400


async def test_where_nothing_can_be_stored_nothing_is_promised(tmp_path: Path) -> None:
    no_folder = tmp_path / "file"
    no_folder.write_text("in the way")
    service = create_app(Settings(database=str(no_folder / "arms.db"), demo=True))
    transport = httpx.ASGITransport(service)
    async with (
        service.router.lifespan_context(service),
        httpx.AsyncClient(transport=transport, base_url="http://armspan.test") as client,
    ):
        answer = await client.post(LOADER, json={"joints": POSTURE, "tool": "flange"})
        refusal(answer, "not-available", 503)
        assert answer.headers["retry-after"]
        assert (await client.get("/v1/records")).json()["records"] == []


async def test_joint_values_outside_travel_are_kept_as_uncertain(
    client: httpx.AsyncClient,
) -> None:
    found = await kept(client, joints=[300, -90, 90, 0, 45, 0])
    assert (found["quality"], found["reason"], found["code"]) == ("uncertain", "outside-travel", 4)
    assert found["flags"] & 8
    assert found["margin"] < 0


def test_what_was_acknowledged_survives_a_kill(launch: Launch, tmp_path: Path) -> None:
    """Several senders write while the process is killed; each answered record is there, whole."""
    database = str(tmp_path / "arms.db")
    process = launch("--demo", database=database)
    answered: dict[str, dict[str, Any]] = {}
    enough = threading.Event()

    def send(sender: int) -> None:
        with httpx.Client(base_url=process.url, timeout=20) as client:
            for number in range(10_000):
                key = f"{sender}-{number}"
                body = {"joints": POSTURE, "tool": "flange", "serial": key}
                try:
                    answer = client.post(LOADER, json=body, headers={"idempotency-key": key})
                except httpx.TransportError:
                    return
                assert answer.status_code == 201, answer.text
                answered[key] = answer.json()
                if len(answered) > 60:
                    enough.set()

    senders = [threading.Thread(target=send, args=(sender,)) for sender in range(4)]
    for sender in senders:
        sender.start()
    assert enough.wait(60)
    process.process.kill()
    process.process.wait(10)
    for sender in senders:
        sender.join(30)
    again = launch("--demo", database=database)
    with httpx.Client(base_url=again.url, timeout=20) as client:
        found: dict[str, dict[str, Any]] = {}
        path = "/v1/records?page_size=200"
        while path:
            page = client.get(path)
            found |= {record["serial"]: record for record in page.json()["records"]}
            path = page.links.get("next", {}).get("url", "")
        assert answered.items() <= found.items()
        # Of what was not answered any more, one in hand for each sender at most.
        assert len(found) <= len(answered) + 4
        # A sender that got no answer asks again, and makes no second one.
        for key in list(found)[:5]:
            body = {"joints": POSTURE, "tool": "flange", "serial": key}
            answer = client.post(LOADER, json=body, headers={"idempotency-key": key})
            assert answer.json() == found[key]
    again.terminate()
