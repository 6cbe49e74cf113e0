"""Bad questions about reach: what is refused, with which code, pointing where.

Left out: single targets that spoil no other (service/wire/test_reach_targets, test_reach).
"""

from typing import Any

import httpx
import pytest

from service.bulk import limited
from service.settings import Settings
from tests.contract.refusals import AT_ORIGIN, arm, only_entry, refusal, sent

pytestmark = pytest.mark.anyio
CHECKS = "/v1/reach/checks"
HERE = {"position": [300, 200, 0]}
POSE = {"pose": AT_ORIGIN}
GOOD: dict[str, Any] = {"arm": arm(), "targets": [HERE]}


@pytest.fixture
def settings() -> Settings:
    """The demonstration cell."""
    return Settings(database=":memory:", demo=True)


def asked(**changes: Any) -> dict[str, Any]:
    """Return the good question with fields changed; None takes one out."""
    return {key: value for key, value in {**GOOD, **changes}.items() if value is not None}


async def test_the_good_question_is_answered(client: httpx.AsyncClient) -> None:
    answer = await sent(client, CHECKS, GOOD)
    assert answer.status_code == 200, answer.text
    assert answer.json()["results"][0]["verdict"] == "reachable"


BODIES: list[tuple[dict[str, Any], str, str]] = [
    (asked(arm=None), "missing-field", "/arm"),
    (asked(targets=None), "missing-field", "/targets"),
    (asked(arm="no-such-arm"), "unknown-arm", "/arm"),
    (asked(arm={"name": "housing-loader", "revision": 99}), "unknown-revision", "/arm/revision"),
    (asked(arm=arm(default_tool=None)), "tool-not-said", "/tool"),
    (asked(tool="saw"), "unknown-tool", "/tool"),
    (asked(frame="no-such-frame"), "unknown-frame", "/frame"),
    (asked(frame="tool"), "unknown-frame", "/frame"),
    (asked(units="mm"), "unusable-value", "/units"),
    (asked(solutions="some"), "unusable-value", "/solutions"),
    (asked(order="first"), "unusable-value", "/order"),
    (asked(order="nearness"), "missing-field", "/near"),
    (asked(near=[0]), "wrong-joint-count", "/near"),
    (asked(near=[0, "0"]), "unusable-value", "/near/1"),
    (asked(near=[0, float("nan")]), "not-finite", "/near/1"),
    (asked(near=5), "unusable-value", "/near"),
    (asked(targest=[]), "unknown-field", "/targest"),
    (asked(targets=[]), "unusable-value", "/targets"),
    (asked(targets=5), "unusable-value", "/targets"),
    (asked(targets=[{}]), "missing-field", "/targets/0/pose"),
    (asked(targets=[{"position": [1, 2, "x"]}]), "unusable-value", "/targets/0/position/2"),
    (asked(targets=[{**POSE, **HERE}]), "unusable-value", "/targets/0/position"),
    (asked(targets=[{**POSE, "freedom": {"cone": 200}}]),
     "unusable-value", "/targets/0/freedom/cone"),
    (asked(targets=[{"name": "a", **HERE}, {"name": "a", **HERE}]),
     "unusable-value", "/targets/1/name"),
    (asked(targets=[HERE, {**HERE, "colour": "red"}]), "unknown-field", "/targets/1/colour"),
    (asked(targets=[{**POSE, "approach": {"distance": 0, "along": "tool-z"}}]),
     "unusable-value", "/targets/0/approach/distance"),
    (asked(targets=[{**POSE, "approach": {"distance": 9, "along": [0, 0, 0]}}]),
     "unusable-value", "/targets/0/approach/along"),
    (asked(targets=[{**POSE, "approach": {"distance": 9, "along": "tool-x"}}]),
     "unusable-value", "/targets/0/approach/along"),
    (asked(targets=[{**POSE, "approach": {"distance": 9, "speed": 0}}]),
     "unusable-value", "/targets/0/approach/speed"),
    (asked(targets=[{**POSE, "approach": {"distance": 1e300}}]),
     "unusable-value", "/targets/0/approach/distance"),
    (asked(targets=[{**POSE, "approach": {"along": "tool-z"}}]),
     "missing-field", "/targets/0/approach/distance"),
    (asked(targets=[{**POSE, "approach": {"distance": 9, "dwell": 1}}]),
     "unknown-field", "/targets/0/approach/dwell"),
    (asked(targets=[HERE] * 10_001), "too-large", "/targets"),
    (asked(arm=arm(rows=[])), "unusable-value", "/arm"),
]  # fmt: skip


@pytest.mark.parametrize(("body", "code", "pointer"), BODIES)
async def test_a_bad_body(
    client: httpx.AsyncClient, body: dict[str, Any], code: str, pointer: str
) -> None:
    answer = await sent(client, CHECKS, body)
    assert refusal(answer, code, answer.status_code)["errors"][0]["pointer"] == pointer
    assert answer.status_code == 422


@pytest.mark.parametrize(
    ("raw", "media", "code", "status"),
    [
        (b"", "application/json", "unparseable", 400),
        (b"{", "application/json", "unparseable", 400),
        (b'{"arm": "a", "arm": "b"}', "application/json", "duplicate-key", 400),
        (b"\x93NUMPY", "application/x-npy", "wrong-media-type", 415),
        (b"[]", "application/json", "unusable-value", 422),
        (b" " * 8_000_001, "application/json", "too-large", 413),
    ],
)
async def test_a_bad_request(
    client: httpx.AsyncClient, raw: bytes, media: str, code: str, status: int
) -> None:
    answer = await client.post(CHECKS, content=raw, headers={"content-type": media})
    refusal(answer, code, status)


TABLE = b"name,x,y,z\r\na,300,200,100\r\n"


@pytest.mark.parametrize(
    ("query", "code", "pointer"),
    [
        ("", "missing-field", "/arm"),
        ("arm=no-such-arm", "unknown-arm", "/arm"),
        ("arm=housing-loader&tool=saw", "unknown-tool", "/tool"),
        ("arm=housing-loader&frame=tool", "unknown-frame", "/frame"),
        ("arm=housing-loader&form=matrix", "form-not-flat", "/form"),
        ("arm=housing-loader&units=mm", "unusable-value", "/units"),
        ("arm=housing-loader&solutions=some", "unusable-value", "/solutions"),
        ("arm=housing-loader&order=some", "unusable-value", "/order"),
        ("arm=housing-loader&order=nearness", "missing-field", "/near"),
        ("arm=housing-loader&near=1,2", "wrong-joint-count", "/near"),
        ("arm=housing-loader&near=1,2,x,4,5,6", "unparseable", "/near"),
        ("arm=housing-loader&format=npy", "unusable-value", "/format"),
        ("arm=housing-loader&q=1", "unknown-field", "/q"),
        ("arm=housing-loader&arm=wash-arm", "unusable-value", "/arm"),
        ("arm=housing-loader&revision=99", "unknown-revision", "/revision"),
    ],
)
async def test_a_bad_query_beside_a_table(
    client: httpx.AsyncClient, query: str, code: str, pointer: str
) -> None:
    headers = {"content-type": "text/csv"}
    answer = await client.post(f"{CHECKS}?{query}", content=TABLE, headers=headers)
    entry = only_entry(answer, code, answer.status_code)
    assert answer.status_code in (400, 422)
    assert (entry["pointer"], entry["in"]) == (pointer, "query")


async def test_a_body_says_all_itself(client: httpx.AsyncClient) -> None:
    answer = await client.post(f"{CHECKS}?arm=housing-loader", json=GOOD)
    assert only_entry(answer, "unknown-field")["pointer"] == "/arm"


async def test_more_work_than_one_answer_may_take(client: httpx.AsyncClient) -> None:
    """Seven axes, of which no closed form is known here: a search for each target."""
    targets = [{"pose": {**AT_ORIGIN, "position": [number, 0, 900]}} for number in range(10_000)]
    answer = await sent(client, CHECKS, {"arm": "line-runner", "targets": targets})
    entry = only_entry(answer, "too-large", 422)
    assert entry["pointer"] == "/targets"
    assert "at most" in entry["way_out"]
    assert " s," in entry["say"]


async def test_work_that_was_not_foreseen_ends(
    client: httpx.AsyncClient, monkeypatch: pytest.MonkeyPatch
) -> None:
    body = asked(targets=[HERE] * 100)
    assert (await sent(client, CHECKS, body)).status_code == 200
    monkeypatch.setattr(limited, "LONGEST_S", 0.0)
    entry = only_entry(await sent(client, CHECKS, body), "too-large", 422)
    assert entry["pointer"] == "/targets"
    assert "fewer than" in entry["way_out"]


async def test_an_unbounded_slide_cannot_be_searched(client: httpx.AsyncClient) -> None:
    turn = {"joint": "revolute", "a": 200, "alpha": 70, "d": 50, "theta": 0}
    slide = {"joint": "prismatic", "a": 100, "alpha": 50, "d": 0, "theta": 0}
    endless = arm(rows=[turn, turn, slide, turn, turn, turn, turn])
    answer = await sent(client, CHECKS, asked(arm=endless, targets=[POSE]))
    problem = refusal(answer, "unusable-value", 422)
    assert "travel" in problem["errors"][0]["way_out"]


# --- one target by query string --------------------------------------------------------------

REACH = "/v1/arms/housing-loader/reach"


@pytest.mark.parametrize(
    ("query", "code", "pointer"),
    [
        ("", "missing-field", "/x"),
        ("x=1&y=2", "missing-field", "/z"),
        ("x=1&y=2&z=3&r1=4", "missing-field", "/r2"),
        ("x=1&y=2&z=nan", "not-finite", "/z"),
        ("x=1&y=2&z=1,5", "unparseable", "/z"),
        ("x=1&y=2&z=1e14", "out-of-range", "/z"),
        ("x=1&y=2&z=3&r1=0&r2=1e12&r3=0", "out-of-range", "/r2"),
        ("x=1&y=2&z=3&freedom=spin", "unusable-value", "/freedom"),
        ("x=1&y=2&z=3&r1=0&r2=0&r3=0&freedom=cone", "missing-field", "/cone"),
        ("x=1&y=2&z=3&r1=0&r2=0&r3=0&cone=200", "unusable-value", "/cone"),
        ("x=1&y=2&z=3&r1=0&r2=0&r3=0&cone=0", "unusable-value", "/cone"),
        ("x=1&y=2&z=3&near=1,2,3", "wrong-joint-count", "/near"),
        ("x=1&y=2&z=3&near=1,2,3,4,5,1e14", "out-of-range", "/near"),
        ("x=1&y=2&z=3&form=matrix", "form-not-flat", "/form"),
        ("x=1&y=2&z=3&tool=saw", "unknown-tool", "/tool"),
        ("x=1&y=2&z=3&frame=flange", "unknown-frame", "/frame"),
        ("x=1&y=2&z=3&expect=00000000", "digest-differs", "/expect"),
        ("x=1&y=2&z=3&revision=99", "unknown-revision", "/revision"),
        ("x=1&y=2&z=3&q=1", "unknown-field", "/q"),
        ("x=1&y=2&z=3&x=1", "unusable-value", "/x"),
        ("x=1&y=2&z=3&solutions=all", "unknown-field", "/solutions"),
        ("x=1&y=2&z=3&approach=0", "unusable-value", "/approach"),
        ("x=1&y=2&z=3&approach=1e300", "unusable-value", "/approach"),
        ("x=1&y=2&z=3&along=0,0,1", "missing-field", "/approach"),
        ("x=1&y=2&z=3&approach=9&along=0,0,0", "unusable-value", "/along"),
    ],
)
async def test_a_bad_query(client: httpx.AsyncClient, query: str, code: str, pointer: str) -> None:
    answer = await client.get(f"{REACH}?{query}")
    entry = only_entry(answer, code, answer.status_code)
    assert (entry["pointer"], entry["in"]) == (pointer, "query")
    flat = await client.get(f"{REACH}?{query}&format=flat&errors=inline")
    assert flat.status_code == 200
    told = flat.json()
    assert (told["ok"], told["code"]) == (0, answer.json()["number"])
    assert {told[f"q{joint}"] for joint in range(1, 7)} == {-999999.9999}
    line = await client.get(f"{REACH}?{query}&format=txt")
    assert line.status_code == answer.status_code
    assert line.text.startswith(f"0;{answer.json()['number']:<3d};")


async def test_an_unknown_arm(client: httpx.AsyncClient) -> None:
    answer = await client.get("/v1/arms/no-such-arm/reach?x=1&y=2&z=3")
    refusal(answer, "unknown-arm", 404)
    flat = await client.get("/v1/arms/no-such-arm/reach?x=1&y=2&z=3&format=flat")
    assert flat.status_code == 404
    assert flat.json()["code"] == 103
