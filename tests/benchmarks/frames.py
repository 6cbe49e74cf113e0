"""Relations between frames over HTTP: a short question against an empty POST, and long ones.

`python -m tests.benchmarks.frames`. Both run as real servers with the same middleware and the same
server options, and always have work (see requests.py). Relations are measured anew for each
question: of the same frames, as whoever has a hall does, or each time of other ones.
"""

import itertools
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
MEASURED = 500
"""Questions of each kind; the other halls are more than a server keeps."""


def against_empty_post(ours: int, theirs: int) -> None:
    """Print what a short question takes beside an empty POST."""
    asked = [Connection(ours) for _ in range(CONNECTIONS)]
    hello = [Connection(theirs) for _ in range(CONNECTIONS)]
    same = [body_of(SHORT, anywhere, measured=number) for number in range(MEASURED)]
    others = [body_of(SHORT, anywhere, hall=number) for number in range(MEASURED)]
    kinds = {
        f"50 relations ({len(same[0])} bytes) of the same frames": itertools.cycle(same),
        "50 relations of other frames each time": itertools.cycle(others),
    }
    empty: list[float] = []
    taken: dict[str, list[float]] = {name: [] for name in kinds}
    for count in range(ROUNDS + 1):
        seconds, _ = busy(hello, lambda: ("POST", "/", b""), REQUESTS)
        empty += [seconds] if count else []
        for name, bodies in kinds.items():
            seconds, _ = busy(asked, lambda of=bodies: ("POST", "/v1/frames", next(of)), REQUESTS)
            taken[name] += [seconds] if count else []
    usual = statistics.median(empty)
    print(f"empty POST: {usual * 1e6:.0f} us")
    for name, each in taken.items():
        ratio = statistics.median(each) / usual
        print(f"{name}: {ratio * usual * 1e6:.0f} us, {ratio:.2f} times the empty POST")


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
