"""Samples over HTTP: the three formats agree, and what is refused."""

import io
from typing import Any

import httpx
import numpy as np
import pytest

from service.settings import Settings
from tests.contract.refusals import refusal, sent

pytestmark = pytest.mark.anyio
SAMPLES = "/v1/reach/samples"


@pytest.fixture
def settings() -> Settings:
    """The demonstration cell."""
    return Settings(database=":memory:", demo=True)


async def test_three_formats_tell_the_same(client: httpx.AsyncClient) -> None:
    body = {"arm": "wash-arm", "count": 40_000, "seed": 5, "joints": True}
    told = (await sent(client, SAMPLES, body)).json()
    listed = np.array([[*item["position"], *item["joints"]] for item in told["samples"]])
    npy = await client.post(f"{SAMPLES}?format=npy", json=body)
    assert npy.headers["x-columns"] == "x,y,z,q1,q2,q3,q4,q5,q6"
    assert int(npy.headers["content-length"]) == len(npy.content)
    np.testing.assert_array_equal(np.load(io.BytesIO(npy.content)), listed)
    text = (await client.post(SAMPLES, json=body, headers={"Accept": "text/csv"})).text
    assert text.splitlines()[0] == npy.headers["x-columns"]
    np.testing.assert_array_equal(np.loadtxt(io.StringIO(text), delimiter=",", skiprows=1), listed)
    greatest = told["summary"]["extremes"]["z"]["greatest"]
    assert greatest["value"] == listed[:, 2].max()
    assert greatest["joints"] == listed[greatest["sample"], 3:].tolist()


async def test_a_sample_is_where_poses_says(client: httpx.AsyncClient) -> None:
    frame = {"arm": "pallet-stacker", "frame": "pallet-left"}
    body = {**frame, "count": 3, "joints": True, "orientations": True}
    (first, *_) = (await sent(client, SAMPLES, body)).json()["samples"]
    answer = await sent(client, "/v1/poses", {**frame, "joints": [first["joints"]]})
    (pose,) = answer.json()["poses"]
    np.testing.assert_allclose(first["position"], pose["position"], atol=1e-9)
    assert abs(np.dot(first["orientation"], pose["orientation"]["values"])) > 1 - 1e-12


GOOD: dict[str, Any] = {"arm": "wash-arm", "count": 10}


@pytest.mark.parametrize(
    ("change", "query", "code", "pointer"),
    [
        ({"count": 0}, "", "unusable-value", "/count"),
        ({"count": 10**9}, "?format=npy", "too-large", "/count"),
        ({"count": 100_001}, "", "too-large", "/count"),
        ({"count": 1.5}, "", "unusable-value", "/count"),
        ({"count": 10**30}, "", "too-large", "/count"),
        ({"seed": -1}, "", "unusable-value", "/seed"),
        ({"seed": 10**400}, "?format=npy", "unusable-value", "/seed"),
        ({"seed": 2**53}, "", "unusable-value", "/seed"),
        ({"seed": 10**30}, "?format=csv", "unusable-value", "/seed"),
        ({"form": "roll-pitch"}, "", "unusable-value", "/form"),
        ({"arm": "no-such-arm"}, "", "unknown-arm", "/arm"),
        ({"within": "limits"}, "", "unusable-value", "/within"),
        ({"number": 3}, "", "unknown-field", "/number"),
        ({"positions": False}, "?format=csv", "unusable-value", "/positions"),
        ({"orientations": True, "form": "matrix"}, "?format=csv", "form-not-flat", "/form"),
    ],
)
async def test_what_cannot_be_asked(
    client: httpx.AsyncClient, change: dict[str, Any], query: str, code: str, pointer: str
) -> None:
    answer = await sent(client, SAMPLES + query, {**GOOD, **change})
    assert refusal(answer, code, 422)["errors"][0]["pointer"] == pointer


async def test_the_way_out_of_no_samples_is_one(client: httpx.AsyncClient) -> None:
    for query, most in (("", 100_000), ("?format=npy", 1_000_000)):
        answer = await sent(client, SAMPLES + query, {**GOOD, "count": 0})
        (error,) = refusal(answer, "unusable-value", 422)["errors"]
        assert error["way_out"] == f"ask for 1 to {most}"


async def test_limits_that_leave_too_little_are_refused_before_a_table_begins(
    client: httpx.AsyncClient,
) -> None:
    row = {"joint": "revolute", "a": 300, "alpha": 0, "d": 0, "theta": 0, "travel": [-170, 170]}
    arm = {"name": "thin", "convention": "standard", "units": "mm-deg", "rows": [row, row, row]}
    arm["combined_travel"] = [{"ratios": {"1": 1, "2": 1, "3": 0.5}, "travel": [0, 0.05]}]
    for query in ("", "?format=npy", "?format=csv"):
        answer = await sent(client, SAMPLES + query, {"arm": arm, "count": 5000})
        assert refusal(answer, "unusable-value", 422)["errors"][0]["pointer"].startswith("/arm")
