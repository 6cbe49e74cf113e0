"""Reach over HTTP: 1 000 targets against arithmetic plus JSON, and one target against one pose.

`python -m tests.benchmarks.reach_requests`. A real server; the sides take turns; medians and
ratios. Arithmetic is what the core does for the same targets in this process, one thread: all
solutions, their motion and singularity, and the words about those near singular. JSON is parsing
the question and printing the answer, by the fastest parser there is here. Targets are forward
generated within travel, fresh ones each run; the seed is printed.
"""

import os
import statistics
from collections.abc import Callable
from random import Random
from tempfile import TemporaryDirectory
from time import perf_counter
from typing import Any

import numpy as np
import orjson

from kinematics.arm import Arm
from kinematics.jacobian import motion_of
from kinematics.lost_motion import describe
from kinematics.reach.checks import Reacher
from kinematics.reach.targets import Target, Targets
from kinematics.singular_kinds import anatomy_of
from kinematics.singularity import REGULAR, judge
from kinematics.table import FloatArray
from kinematics.task_space import task_space
from service.wire.arms import read_arm
from service.wire.cells import no_cell
from tests.benchmarks.requests import (
    CONNECTIONS,
    REQUESTS,
    Connection,
    Question,
    busy,
    free_port,
    running,
)

ARMS = ("housing-loader", "lathe-tender", "seal-setter", "pallet-stacker")
TARGETS = 1000
ROUNDS = 7
SINGLE_ROUNDS = 20
SINGLE_ARM = "housing-loader"
POSTURE = (0.0, -30.0, 60.0, 20.0, 45.0, 10.0)
AROUND = 4.0
"""Degrees that the postures differ from the middle one; none is near singular."""

KEYS = ("x", "y", "z", "r1", "r2", "r3")


def stored(connection: Connection, name: str) -> Arm:
    """Return a stored arm as the core sees it, without its cell, which does not matter here."""
    document = orjson.loads(connection.ask(("GET", f"/v1/arms/{name}", b"")))["arm"]
    document.pop("cell", None)
    return read_arm({key: value for key, value in document.items() if key != "frames"}, no_cell).arm


def asked(path: str, body: object) -> Question:
    """Return a question with a body."""
    return "POST", path, orjson.dumps(body)


def targets_of(connection: Connection, arm: str, random: Random) -> list[dict[str, Any]]:
    """Return poses that the arm gets to, from random joint values within travel."""
    rows = orjson.loads(connection.ask(("GET", f"/v1/arms/{arm}", b"")))["arm"]["rows"]
    spans = [row["travel"] for row in rows if not row.get("passive")]
    joints = [[random.uniform(*span) for span in spans] for _ in range(TARGETS)]
    body = {"arm": arm, "joints": joints, "form": "matrix", "singularity": False}
    items = orjson.loads(connection.ask(asked("/v1/poses", body)))["poses"]
    return [
        {
            "name": f"p-{number}",
            "pose": {"position": item["position"], "orientation": item["orientation"]},
        }
        for number, item in enumerate(items)
    ]


def in_si(targets: list[dict[str, Any]]) -> Targets:
    """Return targets in millimetres as the core takes them."""
    poses = np.tile(np.eye(4), (len(targets), 1, 1))
    for pose, target in zip(poses, targets, strict=True):
        pose[:3, :3] = target["pose"]["orientation"]["values"]
        pose[:3, 3] = np.array(target["pose"]["position"]) / 1000.0
    return Targets.of([Target(pose) for pose in poses])


def arithmetic(arm: Arm, tool_in_flange: FloatArray, targets: Targets) -> Callable[[], int]:
    """Return what does the core's part of an answer, and says how many solutions there are."""
    reacher = Reacher(arm, tool_in_flange)
    space = task_space(arm, tool_in_flange, None)
    assert space is not None
    anatomy, turned = anatomy_of(arm, space, tool_in_flange), np.eye(3)

    def work() -> int:
        checks = reacher.check(targets)
        motion = motion_of(arm, checks.joint_values, tool_in_flange)
        judgement = judge(arm, space, motion)
        worded = (judgement.state != REGULAR) | bool(space.watched_position_rank)
        for index in np.flatnonzero(worded).tolist():
            describe(
                arm, space, anatomy, checks.joint_values[index], tool_in_flange,
                motion.of_posture(index), judgement.of_posture(index), turned, "base",
            )  # fmt: skip
        for index in range(len(checks)):
            checks.reason_of(index)
            checks.families_of(index)
        return len(checks.joint_values)

    return work


def timed(work: Callable[[], Any]) -> float:
    """Return the seconds that some work takes."""
    started = perf_counter()
    work()
    return perf_counter() - started


def many(connection: Connection, random: Random) -> None:
    """Print what 1 000 targets take over HTTP, against arithmetic plus JSON."""
    for name in ARMS:
        arm = stored(connection, name)
        tool_in_flange = arm.tool_in_flange(None)
        targets = targets_of(connection, name, random)
        work = arithmetic(arm, tool_in_flange, in_si(targets))
        solutions = work()
        body = {"arm": name, "targets": targets, "solutions": "all"}
        question = asked("/v1/reach/checks", body)
        answer = orjson.loads(connection.ask(question))
        assert answer["summary"]["targets"] == TARGETS

        def json_alone(question: Question = question, answer: object = answer) -> None:
            orjson.loads(question[2])
            orjson.dumps(answer)

        taken: dict[str, list[float]] = {"HTTP": [], "arithmetic": [], "JSON": []}
        for _ in range(ROUNDS):
            taken["HTTP"].append(timed(lambda q=question: connection.ask(q)))  # type: ignore[misc]
            taken["arithmetic"].append(timed(work))
            taken["JSON"].append(timed(json_alone))
        ms = {side: statistics.median(each) * 1e3 for side, each in taken.items()}
        ratio = ms["HTTP"] / (ms["arithmetic"] + ms["JSON"])
        print(
            f"{name}: {TARGETS} targets, {solutions} solutions: HTTP {ms['HTTP']:.0f} ms, "
            f"arithmetic {ms['arithmetic']:.0f}, JSON {ms['JSON']:.1f}: {ratio:.2f} times"
        )


def single(connections: list[Connection], random: Random) -> None:
    """Print what GET reach takes against GET pose, another posture each time."""
    address = f"/v1/arms/{SINGLE_ARM}"
    poses, places = list[str](), list[str]()
    for _ in range(REQUESTS):
        joints = [round(value + random.uniform(-AROUND, AROUND), 3) for value in POSTURE]
        poses.append(f"{address}/pose?q={','.join(map(str, joints))}")
        told = orjson.loads(connections[0].ask(("GET", f"{poses[-1]}&format=flat", b"")))
        places.append(
            f"{address}/reach?" + "&".join(f"{key}={round(told[key], 4)}" for key in KEYS)
        )

    def questions(urls: list[str], more: str) -> Callable[[], Question]:
        endless = iter(range(10**9))
        return lambda: ("GET", urls[next(endless) % len(urls)] + more, b"")

    for more in ("&format=flat", "&format=txt", "&format=json"):
        taken: dict[str, list[float]] = {"pose": [], "reach": []}
        sides = {"pose": questions(poses, more), "reach": questions(places, more)}
        for made in sides.values():
            busy(connections, made, REQUESTS)
        for _ in range(SINGLE_ROUNDS):
            for side, made in sides.items():
                taken[side].append(busy(connections, made, REQUESTS)[0])
        us = {side: statistics.median(each) * 1e6 for side, each in taken.items()}
        print(
            f"GET reach{more}: {us['reach']:.0f} us, GET pose {us['pose']:.0f} us: "
            f"{us['reach'] / us['pose']:.2f} times"
        )


def main() -> None:
    """Print every ratio."""
    seed = Random().randrange(10**6)
    print(f"seed {seed}")
    port = free_port()
    with TemporaryDirectory() as folder:
        service = ("-m", "service", "serve", "--demo", "--port", str(port))
        with running(*service, "--database", os.path.join(folder, "arms.db")):
            connections = [Connection(port) for _ in range(CONNECTIONS)]
            many(connections[0], Random(seed))
            single(connections, Random(seed))


if __name__ == "__main__":
    main()
