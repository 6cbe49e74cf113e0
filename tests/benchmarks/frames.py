"""Relations between frames over HTTP: a short question against an empty POST, and long ones.

`python -m tests.benchmarks.frames`. Both run as real servers with the same middleware and the same
server options, and always have work (see requests.py).
"""

import json
import os
import statistics
from tempfile import TemporaryDirectory
from time import perf_counter

from tests.benchmarks.requests import (
    CONNECTIONS,
    HELLO,
    REQUESTS,
    ROUNDS,
    Connection,
    busy,
    free_port,
    running,
)
from tests.made_relations import LONG, SHORT, anywhere, body_of, nearby

EMPTY_POST = HELLO.replace("@app.get(", "@app.post(")
LONG_ROUNDS = 5


def against_empty_post(ours: int, theirs: int) -> None:
    """Print what a short question takes beside an empty POST."""
    asked = [Connection(ours) for _ in range(CONNECTIONS)]
    hello = [Connection(theirs) for _ in range(CONNECTIONS)]
    short = body_of(SHORT, anywhere)
    taken: dict[str, list[float]] = {"empty POST": [], "50 relations": []}
    for count in range(ROUNDS + 1):
        empty, _ = busy(hello, lambda: ("POST", "/", b""), REQUESTS)
        mine, _ = busy(asked, lambda: ("POST", "/v1/frames", short), REQUESTS)
        if count:
            taken["empty POST"].append(empty)
            taken["50 relations"].append(mine)
    medians = {name: statistics.median(seconds) for name, seconds in taken.items()}
    for name, median in medians.items():
        print(f"{name}: {median * 1e6:.0f} us")
    ratio = medians["50 relations"] / medians["empty POST"]
    print(f"50 relations ({len(short)} bytes): {ratio:.2f} times the empty POST")


def long_questions(ours: int) -> None:
    """Print what long questions take."""
    asked = Connection(ours)
    for ends in (anywhere, nearby):
        for more in ({}, {"estimate": True}):
            long = body_of(LONG, ends, **more)
            seconds = []
            for _ in range(LONG_ROUNDS):
                begun = perf_counter()
                answer = json.loads(asked.ask(("POST", "/v1/frames", long)))
                seconds.append(perf_counter() - begun)
            assert len(answer["loops"]) == LONG[1] - LONG[0] + 1
            assert not more or answer["estimate"]["converged"]
            print(
                f"{LONG[0]} frames, {LONG[1]} relations {ends.__name__}"
                f"{', estimate' if more else ''}: {statistics.median(seconds):.2f} s"
            )


def main() -> None:
    """Print every ratio and every time."""
    ours, theirs = free_port(), free_port()
    with TemporaryDirectory() as folder:
        service = ("-m", "service", "serve", "--port", str(ours))
        with (
            running(*service, "--database", os.path.join(folder, "arms.db")),
            running("-c", EMPTY_POST, str(theirs)),
        ):
            against_empty_post(ours, theirs)
            long_questions(ours)


if __name__ == "__main__":
    main()
