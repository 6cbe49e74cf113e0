"""Stored arms as the contract has them on the wire: statuses, headers, preconditions, paging."""

import asyncio
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

import httpx
import pytest
import sqlalchemy as sa
from fastapi import FastAPI

from service.settings import Settings
from service.wire.arms import read_arm

pytestmark = pytest.mark.anyio

ARM = "/v1/arms/press-arm"
ROW = {"joint": "revolute", "a": 100, "alpha": 90, "d": 0.1, "theta": 0}


def document(name: str = "press-arm", **changes: Any) -> dict[str, Any]:
    return {"name": name, "convention": "standard", "units": "mm-deg", "rows": [ROW], **changes}


@pytest.fixture
def settings(tmp_path: Path) -> Settings:
    """Arms in a file, so that requests at once meet in the database and not in one connection."""
    return Settings(database=str(tmp_path / "arms.db"))


def refused(answer: httpx.Response, status: int, code: str, pointer: str, place: str) -> bool:
    problem = answer.json()
    (error,) = problem["errors"]
    assert answer.headers["content-type"] == "application/problem+json"
    assert (answer.status_code, problem["status"], problem["code"]) == (status, status, code)
    assert (error["pointer"], error["in"]) == (pointer, place)
    assert error["say"]
    return True


async def test_an_arm_is_created(client: httpx.AsyncClient) -> None:
    before = datetime.now(UTC)
    answer = await client.post(
        "/v1/arms", json=document(), params={"author": "Ada Ü", "reason": "new line"}
    )
    stored = answer.json()
    digests = read_arm(document()).digests
    assert answer.status_code == 201
    assert answer.headers["location"] == ARM
    assert answer.headers["etag"] == f'"1-{digests.digest}"'
    created_at = stored.pop("created_at")
    assert stored == {
        "name": "press-arm",
        "revision": 1,
        "digest": digests.digest,
        "table_digest": digests.table_digest,
        "setup_digest": digests.setup_digest,
        "author": "Ada Ü",
        "reason": "new line",
        "units": "mm-deg",
        "findings": [],
        "arm": document(),
    }
    assert len(created_at) == len("2026-01-02T03:04:05.678Z")
    assert created_at.endswith("Z")
    age = datetime.fromisoformat(created_at) - before
    assert -0.001 <= age.total_seconds() < 10


async def test_a_taken_name_is_409(client: httpx.AsyncClient) -> None:
    await client.post("/v1/arms", json=document())
    answer = await client.post("/v1/arms", json=document())
    assert refused(answer, 409, "name-taken", "/name", "body")


async def test_what_was_mended_is_said_when_stored_and_when_got(client: httpx.AsyncClient) -> None:
    tilted = {"form": "quaternion-wxyz", "values": [2, 0, 0, 0]}
    mended = document(base={"position": [0, 0, 0], "orientation": tilted})
    created = await client.post("/v1/arms", json=mended)
    got = await client.get(ARM)
    for answer in (created, got):
        (finding,) = answer.json()["findings"]
        assert finding["code"] == 6


async def test_the_newest_revision_is_got_and_not_sent_twice(client: httpx.AsyncClient) -> None:
    created = await client.post("/v1/arms", json=document())
    answer = await client.get(ARM)
    assert answer.status_code == 200
    assert answer.json() == created.json()
    assert answer.headers["etag"] == created.headers["etag"]
    assert answer.headers["cache-control"] == "no-cache"
    etag = answer.headers["etag"]
    for has in (etag, f"W/{etag}", f'"9-00000000", {etag}', "*"):
        again = await client.get(ARM, headers={"If-None-Match": has})
        assert (again.status_code, again.content) == (304, b"")
        assert again.headers["etag"] == etag
        assert again.headers["cache-control"] == "no-cache"
    for has in ('"9-00000000"', etag.strip('"'), "", '"'):
        assert (await client.get(ARM, headers={"If-None-Match": has})).status_code == 200


@pytest.mark.parametrize("path", ["/v1/arms", ARM, f"{ARM}/revisions", f"{ARM}/revisions/1"])
async def test_head_has_the_headers_of_get(client: httpx.AsyncClient, path: str) -> None:
    await client.post("/v1/arms", json=document())
    got, head = await client.get(path), await client.head(path)
    assert head.status_code == got.status_code == 200
    assert head.content == b""
    own = {"x-request-id", "date"}
    assert {k: v for k, v in head.headers.items() if k not in own} == {
        k: v for k, v in got.headers.items() if k not in own
    }


async def test_a_pinned_revision_may_be_kept_for_ever(client: httpx.AsyncClient) -> None:
    first = await client.post("/v1/arms", json=document())
    await client.put(ARM, json=document(title="2"), headers={"If-Match": "*"})
    answer = await client.get(f"{ARM}/revisions/1")
    assert answer.json() == first.json()
    assert answer.headers["etag"] == first.headers["etag"]
    assert answer.headers["cache-control"] == "public, max-age=31536000, immutable"
    has = {"If-None-Match": first.headers["etag"]}
    again = await client.get(f"{ARM}/revisions/1", headers=has)
    assert again.status_code == 304
    assert again.headers["cache-control"] == "public, max-age=31536000, immutable"


@pytest.mark.parametrize("number", ["0", "3", "01", "+1", "-1", "1.0", "x", "9" * 10, "9" * 40])
async def test_a_revision_that_never_was_is_404(client: httpx.AsyncClient, number: str) -> None:
    await client.post("/v1/arms", json=document())
    answer = await client.get(f"{ARM}/revisions/{number}")
    assert refused(answer, 404, "unknown-revision", "/n", "path")


@pytest.mark.parametrize("name", ["none", "Press-Arm", "press_arm", "x" * 49, "a%00b", "%C3%A4"])
async def test_an_unknown_arm_is_404(client: httpx.AsyncClient, name: str) -> None:
    await client.post("/v1/arms", json=document())
    for method, path in [
        ("GET", f"/v1/arms/{name}"),
        ("DELETE", f"/v1/arms/{name}"),
        ("GET", f"/v1/arms/{name}/revisions"),
        ("GET", f"/v1/arms/{name}/revisions/1"),
    ]:
        answer = await client.request(method, path)
        assert refused(answer, 404, "unknown-arm", "/arm", "path"), path


async def test_a_put_with_the_present_etag_stores_the_next_revision(
    client: httpx.AsyncClient,
) -> None:
    created = await client.post("/v1/arms", json=document())
    answer = await client.put(
        ARM,
        json=document(title="2"),
        headers={"If-Match": f'"9-00000000", {created.headers["etag"]}'},
        params={"author": "Bo", "reason": "title"},
    )
    stored = answer.json()
    assert answer.status_code == 200
    assert (stored["revision"], stored["author"], stored["reason"]) == (2, "Bo", "title")
    assert stored["arm"] == document(title="2")
    assert answer.headers["etag"] == f'"2-{stored["digest"]}"'
    assert (await client.get(ARM)).json() == stored


async def test_what_a_put_replaces_is_asked_before_its_body_is_read(
    client: httpx.AsyncClient,
) -> None:
    for body, kind in ((b"{", "application/json"), (b"", "application/json"), (b"x", "text/csv")):
        answer = await client.put(ARM, content=body, headers={"Content-Type": kind})
        assert refused(answer, 428, "precondition-required", "/if-match", "header")
        answer = await client.put(
            ARM, content=body, headers={"Content-Type": kind, "If-None-Match": "*"}
        )
        assert answer.status_code in (400, 415)


async def test_a_put_that_does_not_say_what_it_replaces_is_428(client: httpx.AsyncClient) -> None:
    created = await client.post("/v1/arms", json=document())
    for headers in ({}, {"If-None-Match": created.headers["etag"]}):
        answer = await client.put(ARM, json=document(title="2"), headers=headers)
        assert refused(answer, 428, "precondition-required", "/if-match", "header")
    assert (await client.get(ARM)).json()["revision"] == 1


@pytest.mark.parametrize(
    "match",
    [
        '"1-00000000"',
        '"2-{digest}"',
        'W/"1-{digest}"',
        "1-{digest}",
        '"1-{digest}',
        "'1-{digest}'",
        '"1-{digest}" "1-{digest}"',
        "",
        '"*"',
    ],
)
@pytest.mark.parametrize("method", ["PUT", "DELETE"])
async def test_a_stale_weak_or_malformed_etag_is_412(
    client: httpx.AsyncClient, match: str, method: str
) -> None:
    digest = (await client.post("/v1/arms", json=document())).json()["digest"]
    headers = {"If-Match": match.format(digest=digest)}
    body = document(title="2") if method == "PUT" else None
    answer = await client.request(method, ARM, json=body, headers=headers)
    assert refused(answer, 412, "revision-differs", "/if-match", "header")
    assert (await client.get(ARM)).json()["revision"] == 1


async def test_a_star_replaces_whatever_is_there_and_nothing_else(
    client: httpx.AsyncClient,
) -> None:
    star = {"If-Match": "*"}
    answer = await client.put(ARM, json=document(), headers=star)
    assert refused(answer, 412, "revision-differs", "/if-match", "header")
    await client.post("/v1/arms", json=document())
    assert (await client.put(ARM, json=document(), headers=star)).json()["revision"] == 2


async def test_a_put_may_create_only(client: httpx.AsyncClient) -> None:
    absent = {"If-None-Match": "*"}
    created = await client.put(ARM, json=document(), headers=absent)
    assert created.status_code == 201
    assert created.headers["location"] == ARM
    assert created.headers["etag"] == f'"1-{created.json()["digest"]}"'
    answer = await client.put(ARM, json=document(title="2"), headers=absent)
    assert refused(answer, 412, "revision-differs", "/if-none-match", "header")
    both = {"If-None-Match": "*", "If-Match": created.headers["etag"]}
    answer = await client.put(ARM, json=document(title="2"), headers=both)
    assert answer.status_code == 412
    assert (await client.get(ARM)).json() == created.json()


async def test_a_put_under_another_name_is_422_at_the_name(client: httpx.AsyncClient) -> None:
    await client.post("/v1/arms", json=document())
    answer = await client.put(ARM, json=document("other"), headers={"If-Match": "*"})
    assert refused(answer, 422, "unusable-value", "/name", "body")


async def test_an_arm_that_cannot_be_used_is_422_where_it_is_wrong(
    client: httpx.AsyncClient,
) -> None:
    wrong = document(rows=[ROW, {**ROW, "a": None}])
    for answer in (
        await client.post("/v1/arms", json=wrong),
        await client.put(ARM, json=wrong, headers={"If-None-Match": "*"}),
    ):
        assert answer.status_code == 422
        assert answer.json()["errors"][0]["pointer"] == "/rows/1/a"
    answer = await client.post("/v1/arms", json=[document()])
    assert answer.status_code == 422
    assert (await client.get("/v1/arms")).json()["arms"] == []


async def test_a_removed_arm_is_404_and_its_revisions_stay(client: httpx.AsyncClient) -> None:
    first = await client.post("/v1/arms", json=document())
    answer = await client.delete(
        ARM,
        headers={"If-Match": first.headers["etag"]},
        params={"author": "Bo", "reason": "scrapped"},
    )
    assert (answer.status_code, answer.content) == (204, b"")
    assert (await client.get(ARM)).status_code == 404
    assert (await client.delete(ARM)).status_code == 404
    assert (await client.get("/v1/arms")).json()["arms"] == []
    assert (await client.get(f"{ARM}/revisions/1")).json() == first.json()
    (listed,) = (await client.get(f"{ARM}/revisions")).json()["revisions"]
    assert (listed["hidden"]["author"], listed["hidden"]["reason"]) == ("Bo", "scrapped")
    again = await client.post("/v1/arms", json=document())
    assert (again.status_code, again.json()["revision"]) == (201, 2)


async def test_a_removal_needs_no_etag(client: httpx.AsyncClient) -> None:
    await client.post("/v1/arms", json=document())
    assert (await client.delete(ARM)).status_code == 204


async def test_arms_are_listed_with_what_tells_them_apart(client: httpx.AsyncClient) -> None:
    passive = {**ROW, "passive": True, "couplings": [{"axis": 1, "ratio": -1}]}
    await client.post(
        "/v1/arms",
        json=document(
            "b-arm", rows=[ROW, passive, ROW], title="Bender", status="approved", units="m-rad"
        ),
    )
    second = await client.post("/v1/arms", json=document("a-arm", convention="modified"))
    answer = await client.get("/v1/arms")
    assert answer.headers["cache-control"] == "no-cache"
    assert "link" not in answer.headers
    listed = answer.json()
    assert listed["next_page_token"] is None
    digest = listed["arms"][1].pop("digest")
    assert digest == (await client.get("/v1/arms/b-arm")).json()["digest"]
    assert listed["arms"] == [
        {
            "name": "a-arm",
            "title": None,
            "revision": 1,
            "digest": second.json()["digest"],
            "status": None,
            "joints": 1,
            "convention": "modified",
            "units": "mm-deg",
            "cell": None,
        },
        {
            "name": "b-arm",
            "title": "Bender",
            "revision": 1,
            "status": "approved",
            "joints": 2,
            "convention": "standard",
            "units": "m-rad",
            "cell": None,
        },
    ]


async def pages(client: httpx.AsyncClient, path: str, key: str) -> list[list[dict[str, Any]]]:
    found = []
    url: str | None = path
    while url is not None:
        answer = await client.get(url)
        body = answer.json()
        found.append(body[key])
        link = answer.links.get("next")
        assert (link is None) == (body["next_page_token"] is None)
        if link is not None:
            assert httpx.URL(link["url"]).params["page_token"] == body["next_page_token"]
        url = link["url"] if link else None
    return found


async def test_a_list_is_walked_by_its_links(client: httpx.AsyncClient) -> None:
    names = sorted(f"arm-{number}" for number in range(7))
    for name in reversed(names):
        await client.post("/v1/arms", json=document(name))
    found = await pages(client, "/v1/arms?page_size=3", "arms")
    assert [[arm["name"] for arm in page] for page in found] == [names[:3], names[3:6], names[6:]]
    found = await pages(client, "/v1/arms?page_size=7", "arms")
    assert len(found) == 1


async def test_a_page_holds_50_when_nothing_is_said(client: httpx.AsyncClient) -> None:
    for number in range(51):
        await client.post("/v1/arms", json=document(f"arm-{number:02}"))
    assert [len(page) for page in await pages(client, "/v1/arms", "arms")] == [50, 1]


async def test_revisions_are_walked_by_their_links(client: httpx.AsyncClient) -> None:
    await client.post("/v1/arms", json=document())
    for number in range(11):
        await client.put(
            ARM, json=document(), headers={"If-Match": "*"}, params={"reason": f"step {number}"}
        )
    found = await pages(client, f"{ARM}/revisions?page_size=5", "revisions")
    numbers = [[revision["revision"] for revision in page] for page in found]
    assert numbers == [[1, 2, 3, 4, 5], [6, 7, 8, 9, 10], [11, 12]]
    last = found[-1][-1]
    pinned = (await client.get(f"{ARM}/revisions/12")).json()
    assert last.pop("hidden") is None
    assert last == {key: pinned[key] for key in last}
    assert last["reason"] == "step 10"


@pytest.mark.parametrize("size", ["0", "201", "-1", "9" * 30])
async def test_a_page_size_out_of_range_is_422(client: httpx.AsyncClient, size: str) -> None:
    answer = await client.get("/v1/arms", params={"page_size": size})
    assert refused(answer, 422, "unusable-value", "/page_size", "query")


@pytest.mark.parametrize("token", ["", "x", "press-arm", "AAAA", "ä", "MQ==", "cHJlc3MtYXJt=", "/"])
@pytest.mark.parametrize("path", ["/v1/arms", f"{ARM}/revisions"])
async def test_a_page_token_of_no_page_is_422(
    client: httpx.AsyncClient, path: str, token: str
) -> None:
    await client.post("/v1/arms", json=document())
    answer = await client.get(path, params={"page_token": token})
    assert refused(answer, 422, "unusable-value", "/page_token", "query")


@pytest.mark.parametrize(
    ("method", "path", "wrong", "nearest"),
    [
        ("GET", "/v1/arms", "pagesize", "page_size"),
        ("POST", "/v1/arms", "autor", "author"),
        ("PUT", ARM, "reasons", "reason"),
        ("DELETE", ARM, "autor", "author"),
        ("GET", f"{ARM}/revisions", "page_tokens", "page_token"),
    ],
)
async def test_an_unknown_parameter_is_refused_with_the_nearest_name(
    client: httpx.AsyncClient, method: str, path: str, wrong: str, nearest: str
) -> None:
    await client.post("/v1/arms", json=document())
    answer = await client.request(
        method,
        path,
        params={wrong: "1"},
        json=document(title="2") if method in ("POST", "PUT") else None,
        headers={"If-Match": "*"},
    )
    assert refused(answer, 422, "unknown-field", f"/{wrong}", "query")
    assert nearest in answer.json()["errors"][0]["way_out"]
    assert (await client.get(ARM)).json()["arm"] == document()


@pytest.mark.parametrize("path", [ARM, f"{ARM}/revisions/1"])
async def test_an_arm_takes_no_parameters(client: httpx.AsyncClient, path: str) -> None:
    await client.post("/v1/arms", json=document())
    answer = await client.get(path, params={"units": "m-rad"})
    assert refused(answer, 422, "unknown-field", "/units", "query")


@pytest.mark.parametrize("text", ["x" * 201, "a\nb", "a\x00b"])
@pytest.mark.parametrize("name", ["author", "reason"])
async def test_author_and_reason_are_one_short_line(
    client: httpx.AsyncClient, name: str, text: str
) -> None:
    answer = await client.post("/v1/arms", json=document(), params={name: text})
    assert refused(answer, 422, "unusable-value", f"/{name}", "query")
    answer = await client.post("/v1/arms", json=document(), params={name: "x" * 200})
    assert answer.status_code == 201


async def test_of_two_writers_at_once_one_gets_412_and_nothing_is_lost(
    client: httpx.AsyncClient,
) -> None:
    etag = (await client.post("/v1/arms", json=document())).headers["etag"]

    async def put(title: str) -> httpx.Response:
        return await client.put(ARM, json=document(title=title), headers={"If-Match": etag})

    for step in range(15):
        titles = [f"{step}-{writer}" for writer in range(4)]
        answers = await asyncio.gather(*map(put, titles))
        statuses = [answer.status_code for answer in answers]
        assert sorted(statuses) == [200, 412, 412, 412]
        winner = answers[statuses.index(200)]
        head = await client.get(ARM)
        assert head.json() == winner.json()
        assert head.json()["revision"] == step + 2
        etag = head.headers["etag"]


async def test_of_two_creators_at_once_one_gets_409(client: httpx.AsyncClient) -> None:
    for step in range(10):
        body = document(f"arm-{step}")
        answers = await asyncio.gather(*(client.post("/v1/arms", json=body) for _ in range(4)))
        assert sorted(answer.status_code for answer in answers) == [201, 409, 409, 409]


async def test_a_full_database_answers_503_to_writes_and_goes_on_reading(
    app: FastAPI, client: httpx.AsyncClient
) -> None:
    await client.post("/v1/arms", json=document())

    @sa.event.listens_for(app.state.storage._engine, "checkout")
    def tell(connection: Any, _record: object, _proxy: object) -> None:
        connection.execute("PRAGMA max_page_count = 1")

    # More than the pages that the steps to the present layout leave free.
    frame = {"matrix": [[1, 0, 0, 0], [0, 1, 0, 0], [0, 0, 1, 0], [0, 0, 0, 1]]}
    body = document(frames={f"frame-{number}": frame for number in range(500)})
    for answer in (
        await client.put(ARM, json=body, headers={"If-Match": "*"}),
        await client.post("/v1/arms", json={**body, "name": "other"}),
    ):
        assert refused(answer, 503, "not-available", "", "body")
        assert "disk is full" in answer.json()["detail"]
    assert (await client.get(ARM)).json()["arm"] == document()
    assert len((await client.get("/v1/arms")).json()["arms"]) == 1


@pytest.mark.parametrize("settings", [Settings(database="/proc/armspan/arms.db")])
async def test_where_nothing_can_be_stored_a_write_is_503(client: httpx.AsyncClient) -> None:
    answer = await client.post("/v1/arms", json=document())
    assert refused(answer, 503, "not-available", "", "body")
    assert "nothing can be stored" in answer.json()["detail"]
    assert (await client.get("/v1/arms")).json() == {"arms": [], "next_page_token": None}
