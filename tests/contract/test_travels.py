"""Travels over HTTP: points lie on lines, speeds are those of the points, breaks are at limits.

The referee is the forward chain, asked for the poses of what is answered. Left out: bad input
(test_bad_travels), dense brute force (kinematics/travel), approaches of checks (test_approaches).
"""

import csv
import io
from itertools import pairwise
from typing import Any

import httpx
import numpy as np
import pytest

from service.settings import Settings

pytestmark = pytest.mark.anyio
TRAVELS = "/v1/reach/travels"
ARM = "housing-loader"
Body = dict[str, Any]
JOINTS = [25.0, -70.0, 95.0, 30.0, -40.0, 15.0]
POSE: Body = {
    "position": [914.57, 340.65, 753.03],
    "orientation": {"form": "xyz-fixed", "values": [-74.763, -46.542, -95.258]},
}
TOP_SPEEDS = [165, 140, 175, 290, 285, 410]
TRAVEL = [[-168, 168], [-152, 28], [-58, 156], [-178, 178], [-118, 118], [-352, 352]]


@pytest.fixture
def settings() -> Settings:
    """The demonstration cell."""
    return Settings(database=":memory:", demo=True)


async def travelled(client: httpx.AsyncClient, *travels: Body, **more: Any) -> list[Body]:
    body = {"arm": ARM, "travels": list(travels), **more}
    answer = await client.post(TRAVELS, json=body, timeout=120)
    assert answer.status_code == 200, answer.text
    items: list[Body] = answer.json()["travels"]
    return items


async def poses_of(client: httpx.AsyncClient, joints: Any, **more: Any) -> Any:
    """Return positions (count, 3) and rotations (count, 3, 3) at joint values."""
    body = {"arm": ARM, "form": "matrix", "joints": joints, "singularity": False, **more}
    answer = await client.post("/v1/poses", json=body)
    assert answer.status_code == 200, answer.text
    items = answer.json()["poses"]
    positions = np.array([item["position"] for item in items])
    return positions, np.array([item["orientation"]["values"] for item in items])


def turned(rotation: Any) -> float:
    """Return the angle of a rotation in degrees."""
    return float(np.rad2deg(np.arccos(np.clip((np.trace(rotation) - 1) / 2, -1, 1))))


def moved(x: float, y: float, z: float) -> Body:
    there = np.add(POSE["position"], [x, y, z]).tolist()
    return {"pose": {**POSE, "position": there}}


async def test_points_lie_evenly_on_the_line(client: httpx.AsyncClient) -> None:
    end = {"pose": {**POSE, "position": [800, 100, 900]}}
    end["pose"] = {**end["pose"], "orientation": {"form": "xyz-fixed", "values": [-60, -50, -90]}}
    (item,) = await travelled(
        client, {"start": {"joints": JOINTS}, "legs": [{"end": end, "speed": 200}]}, points=31
    )
    assert (item["ok"], item["verdict"], item["breaks"], item["started"]) == (
        *(True, "reachable", None),
        1,
    )
    (way,) = item["ways"]
    (leg,) = way["legs"]
    assert (leg["part"], leg["branch_kept"]) == ("leg", True)
    assert leg["start"]["joints"] == pytest.approx(JOINTS, abs=1e-9)
    shares = np.array([point["share"] for point in leg["points"]])
    np.testing.assert_allclose(shares, np.linspace(0, 1, 31), atol=1e-12)
    joints = np.array([point["joints"] for point in leg["points"]])
    positions, rotations = await poses_of(client, joints.tolist())
    wanted = positions[0] + shares[:, None] * (positions[-1] - positions[0])
    np.testing.assert_allclose(positions, wanted, atol=1e-5)
    np.testing.assert_allclose(positions[-1], [800, 100, 900], atol=1e-5)
    turns = [turned(rotations[0].T @ rotation) for rotation in rotations]
    np.testing.assert_allclose(turns, shares * leg["turn"], atol=1e-4)
    assert np.linalg.norm(positions[-1] - positions[0]) == pytest.approx(leg["length"], abs=1e-5)
    assert leg["gone"] == pytest.approx(leg["length"])
    assert leg["duration_s"] == pytest.approx(leg["length"] / 200)
    # One branch: no joint jumps.
    assert np.abs(np.diff(joints, axis=0)).max() < 10


async def test_speeds_are_those_of_the_points(client: httpx.AsyncClient) -> None:
    travel = {"start": {"joints": JOINTS}, "legs": [{"end": moved(-150, -250, 100), "speed": 300}]}
    (item,) = await travelled(client, travel, points=1000)
    (leg,) = item["ways"][0]["legs"]
    joints = np.array([point["joints"] for point in leg["points"]])
    step_s = leg["duration_s"] / (len(joints) - 1)
    peaks = np.abs(np.diff(joints, axis=0)).max(axis=0) / step_s
    np.testing.assert_allclose(leg["peak_speeds"], peaks, rtol=2e-2, atol=1e-2)
    share = (np.array(leg["peak_speeds"]) / TOP_SPEEDS).max()
    told = leg["share_of_top_speed"]
    assert told["value"] == pytest.approx(share, rel=1e-6)
    assert told["joint"] == 1 + int(np.argmax(np.array(leg["peak_speeds"]) / TOP_SPEEDS))
    # Twice the speed takes twice the share: at the top speed it is all of it.
    assert leg["top_speed"] == pytest.approx(300 / share, rel=1e-3)
    assert leg["shortest_s"] == pytest.approx(leg["length"] / leg["top_speed"], rel=1e-6)
    low, high = np.array(TRAVEL).T
    margins = np.minimum((joints - low) / (high - low), (high - joints) / (high - low)).min(axis=1)
    assert leg["margin"]["value"] == pytest.approx(min(margins), abs=1e-3)
    at = leg["margin"]["at"] / leg["length"]
    assert margins[round(at * 999)] == pytest.approx(min(margins), abs=1e-3)


async def test_a_break_at_a_limit(client: httpx.AsyncClient) -> None:
    """Every way is followed up to where a joint is at its limit, and no way gets on from there."""
    away = {"target": {"pose": POSE}, "retract": {"distance": 900, "along": [-1, 0, 0.2]}}
    (item,) = await travelled(client, away, solutions="all", points=200)
    assert not item["ok"]
    assert item["whole"] == 0 < item["started"] == len(item["ways"])
    limits = 0
    for way in item["ways"]:
        breaks, (leg,) = way["breaks"], way["legs"]
        assert breaks["distance"] == pytest.approx(leg["gone"])
        assert breaks["share"] == pytest.approx(leg["gone"] / leg["length"])
        positions, _ = await poses_of(client, [leg["start"]["joints"], breaks["joints"]])
        gone = float(np.linalg.norm(positions[1] - positions[0]))
        assert gone == pytest.approx(breaks["distance"], abs=0.01)
        np.testing.assert_allclose(breaks["pose"]["position"], positions[1], atol=0.01)
        if breaks["code"] == "travel-limit":
            limits += 1
            bounds = TRAVEL[breaks["joint"] - 1]
            value = breaks["joints"][breaks["joint"] - 1]
            assert min(abs(value - bound) for bound in bounds) < 0.01
            assert f"joint {breaks['joint']}" in breaks["say"]
        for point in leg["points"]:
            for value, (low, high) in zip(point["joints"], TRAVEL, strict=True):
                assert low - 1e-6 <= value <= high + 1e-6
            assert point["share"] <= breaks["share"] + 1e-9
    assert limits
    furthest = max(way["breaks"]["distance"] for way in item["ways"])
    assert item["breaks"]["distance"] == pytest.approx(furthest)
    assert item["code"] in (200, 201, 202)


async def test_beyond_all_reach_the_branch_ends(client: httpx.AsyncClient) -> None:
    travel = {"start": {"joints": JOINTS}, "legs": [{"end": moved(4000, 0, 0)}]}
    (item,) = await travelled(client, travel)
    assert (item["ok"], item["ways"][0]["ok"]) == (False, False)
    assert 0 < item["breaks"]["distance"] < 2000
    assert item["breaks"]["code"] in ("branch-ends", "singular", "travel-limit")


async def test_there_and_back_in_two_directions(client: httpx.AsyncClient) -> None:
    travel = {
        "name": "lug-1",
        "target": {"pose": POSE},
        "approach": {"distance": 60, "along": "tool-z", "speed": 50},
        "retract": {"distance": 80, "along": [0, 0, -1], "speed": 200},
    }
    (item,) = await travelled(client, travel)
    assert (item["name"], item["ok"]) == ("lug-1", True)
    to, back = item["ways"][0]["legs"]
    assert (to["part"], back["part"]) == ("approach", "retract")
    assert to["end"]["joints"] == pytest.approx(back["start"]["joints"], abs=1e-9)
    rows = [to["start"]["joints"], to["end"]["joints"], back["end"]["joints"]]
    positions, rotations = await poses_of(client, rows)
    np.testing.assert_allclose(positions[1], POSE["position"], atol=1e-5)
    np.testing.assert_allclose(positions[1] - positions[0], 60 * rotations[1][:, 2], atol=1e-5)
    # Back along (0, 0, -1) is up.
    np.testing.assert_allclose(positions[2] - positions[1], [0, 0, 80], atol=1e-5)
    np.testing.assert_allclose(rotations[0], rotations[2], atol=1e-8)
    assert (to["duration_s"], back["duration_s"]) == (pytest.approx(1.2), pytest.approx(0.4))


async def test_a_move_in_joint_values_says_whether_the_branch_is_kept(
    client: httpx.AsyncClient,
) -> None:
    elbow = [25, -70, 95, 30, 40, 15]
    travels = [
        {"start": {"joints": JOINTS}, "legs": [{"end": {"joints": row}, "move": "joints"}]}
        for row in (elbow, [35, -60, 90, 20, -50, 25])
    ]
    crossing, keeping = await travelled(client, *travels, points=5)
    (leg,) = crossing["ways"][0]["legs"]
    assert (crossing["ok"], leg["branch_kept"]) == (True, False)
    assert leg["start"]["branch"] != leg["end"]["branch"]
    assert leg["smallest_singular_value"]["value"] < 1e-6
    assert {finding["code"] for finding in leg["findings"]} & {1, 2}
    (leg,) = keeping["ways"][0]["legs"]
    assert leg["branch_kept"]
    assert leg["start"]["branch"] == leg["end"]["branch"]
    rows = [point["joints"] for point in leg["points"]]
    steps = np.diff(rows, axis=0)
    np.testing.assert_allclose(steps, np.broadcast_to(steps[0], steps.shape), atol=1e-9)
    # The path of the tool point is curved: longer than the line between its ends.
    positions, _ = await poses_of(client, rows)
    assert leg["length"] > np.linalg.norm(positions[-1] - positions[0])
    chords = sum(float(np.linalg.norm(b - a)) for a, b in pairwise(positions))
    assert leg["length"] == pytest.approx(chords, rel=0.02)


async def test_units_and_frames_do_not_matter(client: httpx.AsyncClient) -> None:
    (line,) = await travelled(
        client,
        {"start": {"joints": JOINTS}, "legs": [{"end": moved(-150, -250, 100), "speed": 300}]},
    )
    metres = {
        "position": (np.add(POSE["position"], [-150, -250, 100]) / 1000).tolist(),
        "orientation": {
            "form": "xyz-fixed",
            "values": np.deg2rad(POSE["orientation"]["values"]).tolist(),
        },
    }
    (same,) = await travelled(
        client,
        {
            "start": {"joints": np.deg2rad(JOINTS).tolist()},
            "legs": [{"end": {"pose": metres}, "speed": 0.3}],
        },
        units="m-rad",
    )
    one, other = line["ways"][0]["legs"][0], same["ways"][0]["legs"][0]
    assert other["length"] == pytest.approx(one["length"] / 1000)
    np.testing.assert_allclose(np.rad2deg(other["peak_speeds"]), one["peak_speeds"], rtol=1e-6)
    for name in ("margin", "smallest_singular_value", "share_of_top_speed"):
        assert other[name]["value"] == pytest.approx(one[name]["value"], rel=1e-6)
    assert other["duration_s"] == pytest.approx(one["duration_s"])
    inside = (await client.post("/v1/poses", json={
        "arm": ARM, "joints": [one["end"]["joints"]], "frame": "fixture-a", "form": "xyz-fixed",
    })).json()["poses"][0]  # fmt: skip
    there = {"position": inside["position"], "orientation": inside["orientation"]}
    (framed,) = await travelled(
        client, {"start": {"joints": JOINTS}, "legs": [{"end": {"pose": there}}]}, frame="fixture-a"
    )
    end = framed["ways"][0]["legs"][0]["end"]["joints"]
    np.testing.assert_allclose(end, one["end"]["joints"], atol=1e-6)


async def test_one_bad_travel_fails_no_others(client: httpx.AsyncClient) -> None:
    good = {"name": "good", "target": {"pose": POSE}, "approach": {"distance": 20}}
    bad = {**good, "name": "bad", "approach": {"distance": 0}}
    far = {"name": "far", "target": {"position": [0, 0, 9000]},
           "approach": {"distance": 5, "along": [0, 0, 1]}}  # fmt: skip
    answer = await client.post(TRAVELS, json={"arm": ARM, "travels": [bad, good, far]}, timeout=60)
    told = answer.json()
    first, second, third = told["travels"]
    assert (first["name"], first["ok"], first["code"], first["verdict"]) == (
        *("bad", False),
        *(105, None),
    )
    assert first["problem"]["pointer"] == "/travels/0/approach/distance"
    assert first["problem"]["way_out"]
    assert (second["ok"], second["verdict"]) == (True, "reachable")
    assert (third["ok"], third["breaks"]["code"]) == (False, "start-out-of-reach")
    assert (third["code"], third["ways"], third["started"]) == (200, [], 0)
    assert told["summary"] == {
        "travels": 3, "reachable": 1, "outside_travel": 0, "unreachable": 1, "not_found": 0,
        "refused": 1,
    }  # fmt: skip


async def test_a_leg_that_goes_nowhere_is_whole(client: httpx.AsyncClient) -> None:
    for end in ({"joints": JOINTS}, {"joints": [*JOINTS[:5], JOINTS[5] + 1e-10]}):
        travel = {"start": {"joints": JOINTS}, "legs": [{"end": end, "speed": 5}]}
        (item,) = await travelled(client, travel, points=2)
        assert (item["ok"], item["breaks"]) == (True, None)
        (leg,) = item["ways"][0]["legs"]
        assert (leg["length"], leg["margin"]["value"] > 0) == (pytest.approx(0, abs=1e-6), True)


async def test_lines_say_the_same(client: httpx.AsyncClient) -> None:
    travels = [
        {"name": "to", "target": {"pose": POSE}, "approach": {"distance": 20, "speed": 100}},
        {"name": "far", "start": {"joints": JOINTS}, "legs": [{"end": moved(4000, 0, 0)}]},
        {"name": "bad", "start": {"joints": [1]}, "legs": [{"end": moved(4000, 0, 0)}]},
    ]
    body = {"arm": ARM, "travels": travels, "solutions": "all"}
    nested = (await client.post(TRAVELS, json=body, timeout=60)).json()["travels"]
    answer = await client.post(f"{TRAVELS}?format=csv&tag=5", json=body, timeout=60)
    assert answer.headers["content-type"].startswith("text/csv")
    assert answer.headers["x-bad-rows"] == "1"
    rows = list(csv.DictReader(io.StringIO(answer.text)))
    legs = [(item, leg) for item in nested for way in item["ways"] for leg in way["legs"]]
    assert len(rows) == len(legs) + 1
    for row, (item, leg) in zip(rows, legs, strict=False):
        assert (row["name"], row["part"], row["tag"]) == (item["name"], leg["part"], "5")
        np.testing.assert_allclose(
            [float(row[f"q{n}"]) for n in range(1, 7)], leg["end"]["joints"], atol=1e-6
        )
        assert float(row["gone"]) == pytest.approx(leg["gone"])
        assert row["duration_s"] == ("" if leg["duration_s"] is None else f"{leg['duration_s']!r}")
    assert (rows[-1]["name"], rows[-1]["code"], rows[-1]["way"]) == ("bad", "101", "0")
    assert rows[-2]["reason"].startswith("leg 1 breaks after")


@pytest.mark.parametrize(
    ("arm", "start", "end"),
    [
        ("seal-setter", [20, 40, 60, 10], [-20, 50, 90, 30]),
        ("pallet-stacker", None, None),
        ("line-runner", [3000, 20, 30, 40, 10, 50, 0], [3200, 25, 35, 45, 15, 55, 5]),
    ],
)
async def test_other_arms_travel_too(
    client: httpx.AsyncClient, arm: str, start: list[float] | None, end: list[float] | None
) -> None:
    """To the pose of another posture, straight, from a posture nearby."""
    if start is None or end is None:
        start, end = [10, 20, 40, 0], [20, 25, 50, 10]
    item = (await client.post("/v1/poses", json={"arm": arm, "joints": [end]})).json()["poses"][0]
    pose = {"position": item["position"], "orientation": item["orientation"]}
    travel = {"start": {"joints": start}, "legs": [{"end": {"pose": pose}}]}
    (told,) = await travelled(client, travel, arm=arm)
    assert told["ok"], told["breaks"]
    (leg,) = told["ways"][0]["legs"]
    body = {"arm": arm, "joints": [leg["end"]["joints"]]}
    landed = (await client.post("/v1/poses", json=body)).json()["poses"][0]
    np.testing.assert_allclose(landed["position"], item["position"], atol=0.01)
