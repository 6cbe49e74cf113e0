"""Travels over HTTP: straight moves against the following alone, targets with and without approach.

`python -m tests.benchmarks.travel_requests`. A real server; the sides take turns; medians and
ratios. Moves of 300 mm between random postures of the demonstration arm, those that get to their
end; fresh ones each run; the seed is printed.
"""

import os
import statistics
from random import Random
from tempfile import TemporaryDirectory
from typing import Any

import numpy as np
import orjson

from kinematics.reach.checks import Reacher
from kinematics.reach.targets import Target
from kinematics.travel.courses import Courses
from kinematics.travel.moves import Course, Leg, Place
from tests.benchmarks.reach_requests import KEYS, asked, stored, timed
from tests.benchmarks.requests import Connection, free_port, running

ARM = "housing-loader"
MOVES = 100
LENGTH = 300.0
ROUNDS = 7
SINGLES = 200
NEAR_HOME = (0.0, -60.0, 90.0, 20.0, 60.0, 10.0)
AROUND = 25.0
"""Degrees that postures differ from the middle one."""

TRAVELS = "/v1/reach/travels"


def moves(connection: Connection, random: Random) -> list[dict[str, Any]]:
    """Return straight moves that get to their end."""
    found = list[dict[str, Any]]()
    while len(found) < MOVES:
        joints = [value + random.uniform(-AROUND, AROUND) for value in NEAR_HOME]
        body = {"arm": ARM, "joints": [joints], "form": "matrix", "singularity": False}
        pose = orjson.loads(connection.ask(asked("/v1/poses", body)))["poses"][0]
        way = np.array([random.gauss(0, 1) for _ in range(3)])
        end = (np.array(pose["position"]) + LENGTH * way / np.linalg.norm(way)).tolist()
        leg = {"end": {"pose": {"position": end, "orientation": pose["orientation"]}}}
        travel = {"start": {"joints": joints}, "legs": [{**leg, "speed": 250}]}
        body = {"arm": ARM, "travels": [travel]}
        if orjson.loads(connection.ask(asked(TRAVELS, body)))["travels"][0]["ok"]:
            found.append(travel)
    return found


def courses_of(travels: list[dict[str, Any]]) -> list[Course]:
    """Return the same moves as the core takes them."""
    courses = []
    for travel in travels:
        given = travel["legs"][0]["end"]["pose"]
        pose = np.eye(4)
        pose[:3, :3] = given["orientation"]["values"]
        pose[:3, 3] = np.array(given["position"]) / 1000.0
        leg = Leg(Place(target=Target(pose)), speed=0.25)
        courses.append(Course(Place(np.deg2rad(travel["start"]["joints"])), (leg,)))
    return courses


def many(connection: Connection, random: Random) -> None:
    """Print what straight moves take over HTTP, together and one by one, against the core."""
    travels = moves(connection, random)
    arm = stored(connection, ARM)
    core, courses = Courses(Reacher(arm, arm.tool_in_flange(None))), courses_of(travels)
    assert all(core.follow(course).done for course in courses)
    together = asked(TRAVELS, {"arm": ARM, "travels": travels})
    alone = [asked(TRAVELS, {"arm": ARM, "travels": [travel]}) for travel in travels]
    taken: dict[str, list[float]] = {"core": [], "together": [], "alone": []}
    for _ in range(ROUNDS):
        taken["core"].append(timed(lambda: [core.follow(course) for course in courses]))
        taken["together"].append(timed(lambda: connection.ask(together)))
        taken["alone"].append(timed(lambda: [connection.ask(question) for question in alone]))
    ms = {side: statistics.median(each) / MOVES * 1e3 for side, each in taken.items()}
    print(
        f"a straight move of {LENGTH:.0f} mm, medians: core {ms['core']:.2f} ms, over HTTP "
        f"{ms['together']:.2f} ms of {MOVES} together ({ms['together'] / ms['core']:.2f} times), "
        f"{ms['alone']:.2f} ms alone ({ms['alone'] / ms['core']:.2f} times); asked: 2 ms"
    )


def single(connection: Connection, random: Random) -> None:
    """Print what GET reach takes with an approach, against without."""
    places = []
    while len(places) < SINGLES:
        joints = [round(value + random.uniform(-AROUND, AROUND), 3) for value in NEAR_HOME]
        pose = f"/v1/arms/{ARM}/pose?q={','.join(map(str, joints))}&format=flat"
        told = orjson.loads(connection.ask(("GET", pose, b"")))
        place = "&".join(f"{key}={round(told[key], 4)}" for key in KEYS)
        places.append(f"/v1/arms/{ARM}/reach?{place}&format=flat")
    taken: dict[str, list[float]] = {"": [], "&approach=100": []}
    for _ in range(ROUNDS):
        for more, times in taken.items():
            times += [
                timed(lambda url=url, more=more: connection.ask(("GET", url + more, b"")))  # type: ignore[misc]
                for url in places
            ]
    plain, approach = (statistics.median(each) * 1e3 for each in taken.values())
    print(
        f"GET reach, medians: {plain:.2f} ms, with an approach of 100 mm {approach:.2f} ms: "
        f"{approach - plain:.2f} ms more"
    )


def main() -> None:
    """Print every figure."""
    seed = Random().randrange(10**6)
    print(f"seed {seed}")
    port = free_port()
    with TemporaryDirectory() as folder:
        service = ("-m", "service", "serve", "--demo", "--port", str(port))
        with running(*service, "--database", os.path.join(folder, "arms.db")):
            connection = Connection(port)
            many(connection, Random(seed))
            single(connection, Random(seed))


if __name__ == "__main__":
    main()
