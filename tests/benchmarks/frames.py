"""Relations between frames over HTTP: a short question against an empty POST, and long ones.

`python -m tests.benchmarks.frames`. Both run as real servers with the same middleware and the same
server options; one client on one kept connection each takes turns between them.
"""

import json
import os
import statistics
from collections.abc import Callable
from tempfile import TemporaryDirectory
from time import perf_counter
from typing import Any

import numpy as np
from scipy.spatial.transform import Rotation

from tests.benchmarks.requests import (
    HELLO,
    ROUNDS,
    Connection,
    free_port,
    running,
    times,
)

EMPTY_POST = HELLO.replace("@app.get(", "@app.post(")
SEED = 20264
SHORT = (40, 50)
LONG = (2000, 10_000)
LONG_ROUNDS = 5
Ends = tuple[np.ndarray, np.ndarray]


def anywhere(draw: np.random.Generator, frames: int, relations: int) -> Ends:
    """Return ends of relations that connect any frame with any other."""
    more = relations - frames + 1
    inner = np.concatenate([draw.integers(0, np.arange(1, frames)), draw.integers(0, frames, more)])
    outer = np.concatenate([np.arange(1, frames), draw.integers(0, frames - 1, more)])
    return inner, np.where(outer == inner, frames - 1, outer)


def nearby(draw: np.random.Generator, frames: int, relations: int) -> Ends:
    """Return ends of relations along a line, each to one of the next five frames."""
    more = relations - frames + 1
    inner = np.concatenate([np.arange(frames - 1), draw.integers(0, frames - 5, more)])
    outer = np.concatenate([np.arange(1, frames), inner[frames - 1 :] + draw.integers(1, 6, more)])
    return inner, outer


def body_of(size: tuple[int, int], ends: Callable[..., Ends], **more: Any) -> bytes:
    """Return a question about frames in a hall of 10 m, measured to 1 mm and 1 mrad."""
    draw = np.random.default_rng(SEED)
    frames, relations = size
    inner, outer = ends(draw, frames, relations)
    rotations = Rotation.random(frames, random_state=SEED)
    places = draw.uniform(0.0, 10_000.0, (frames, 3))
    between = rotations[inner].inv()
    errors = draw.normal(0.0, 1.0, (relations, 3))
    positions = between.apply(places[outer] - places[inner]) + errors
    turned = between * rotations[outer] * Rotation.from_rotvec(1e-3 * errors[:, ::-1])
    quaternions = turned.as_quat(scalar_first=True)
    form = "quaternion-wxyz"
    given = [
        {
            "of": f"frame-{outer[k]}",
            "in": f"frame-{inner[k]}",
            "pose": {
                "position": positions[k].round(4).tolist(),
                "orientation": {"form": form, "values": quaternions[k].round(9).tolist()},
            },
        }
        for k in range(relations)
    ]
    find = [{"of": f"frame-{frames - 1}", "in": "frame-0"}]
    return json.dumps({"relations": given, "find": find, "units": "mm-deg", **more}).encode()


def main() -> None:
    """Print every ratio and every time."""
    ours, theirs = free_port(), free_port()
    with TemporaryDirectory() as folder:
        service = ("-m", "service", "serve", "--port", str(ours))
        with (
            running(*service, "--database", os.path.join(folder, "arms.db")),
            running("-c", EMPTY_POST, str(theirs)),
        ):
            asked, hello = Connection(ours), Connection(theirs)
            short = body_of(SHORT, anywhere)
            taken: dict[str, list[float]] = {"empty POST": [], "50 relations": []}
            for count in range(ROUNDS + 1):
                turn = {
                    "empty POST": times(hello, "POST", "/"),
                    "50 relations": times(asked, "POST", "/v1/frames", short),
                }
                if count:
                    for name, seconds in turn.items():
                        taken[name] += seconds
            medians = {name: statistics.median(seconds) for name, seconds in taken.items()}
            for name, median in medians.items():
                print(f"{name}: {median * 1e6:.0f} us")
            ratio = medians["50 relations"] / medians["empty POST"]
            print(f"50 relations ({len(short)} bytes): {ratio:.2f} times the empty POST")
            for ends in (anywhere, nearby):
                for more in ({}, {"estimate": True}):
                    long = body_of(LONG, ends, **more)
                    seconds = []
                    for _ in range(LONG_ROUNDS):
                        begun = perf_counter()
                        answer = json.loads(asked.ask("POST", "/v1/frames", long))
                        seconds.append(perf_counter() - begun)
                    assert len(answer["loops"]) == LONG[1] - LONG[0] + 1
                    assert not more or answer["estimate"]["converged"]
                    print(
                        f"{LONG[0]} frames, {LONG[1]} relations {ends.__name__}"
                        f"{', estimate' if more else ''}: {statistics.median(seconds):.2f} s"
                    )


if __name__ == "__main__":
    main()
