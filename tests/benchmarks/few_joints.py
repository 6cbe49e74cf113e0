"""Arms of two to five joints: false no's on typed poses they have been at, and time a target.

    python -m tests.benchmarks.few_joints [targets] [seed]

Each target is off by almost half of its tolerance in place and turn, as two decimals of a display
leave it, and half of them stand beside the end of travel or a fold. Each line: verdicts of those,
microseconds a target where all are exact (the least of five), and of targets turned away for good.
"""

import sys
import time
from collections.abc import Callable

import numpy as np

from kinematics.reach.checks import Reacher
from kinematics.reach.targets import NONE, NOT_FOUND, REACHABLE, SPIN, VERDICTS, Targets
from tests.kinematics.example_arms import arm_of, random_pose
from tests.kinematics.reach.arm_classes import CLASSES, Made, _row, targets_at
from tests.kinematics.reach.test_near_enough import typed, within

ARMS = 20
ASKED = "five joints <= 40 us, no false no"


def _general(kinds: str, **given: float) -> Callable[[np.random.Generator], Made]:
    def made(random: np.random.Generator) -> Made:
        arm = arm_of(*[_row(random, kind, **given) for kind in kinds])
        return arm, random_pose(random), NONE

    return made


MADE: dict[str, Callable[[np.random.Generator], Made]] = {
    **{kinds: _general(kinds) for kinds in ("RR", "RP", "RRR", "RRP", "PRR", "RPP")},
    "planar RRR": _general("RRR", alpha=0.0),
    **{kinds: _general(kinds) for kinds in ("RRRR", "PRRR", "RPRR", "RRPR", "RRRP", "PPRR")},
    "five, three parallel": CLASSES["five, three parallel"],
    "five, with wrist": CLASSES["five, with wrist"],
    "RRRRR": _general("RRRRR"),
}
"""General arms of two to four joints, a planar one, and both structures of five."""


def seconds_of(reacher: Reacher, targets: Targets, repeats: int) -> float:
    """Return the least time of some repeats, a target."""
    least = np.inf
    for _ in range(repeats):
        begin = time.perf_counter()
        reacher.check(targets)
        least = min(least, time.perf_counter() - begin)
    return least / max(len(targets), 1)


def measure(name: str, each: int, seed: int) -> bool:
    """Print the line of a class; return whether none of its targets is told to be out of reach."""
    random = np.random.default_rng([seed, *name.encode()])
    verdicts, micros, spins, noes = np.zeros(4, int), [], [], []
    for _ in range(ARMS):
        arm, tool, _ = MADE[name](random)
        reacher, postures = Reacher(arm, tool), within(random, arm, each)
        exact = targets_at(arm, tool, NONE, postures)
        reacher.check(exact.only(np.arange(min(2, each))))
        micros.append(seconds_of(reacher, exact, 5))
        if len(tool) and arm.joint_count >= 4:
            freed = targets_at(arm, tool, SPIN, postures[:20])
            reacher.check(freed.only(np.arange(1)))
            spins.append(seconds_of(reacher, freed, 2))
        away = targets_at(arm, tool, NONE, postures[:10])
        away.tool_in_base[:, :3, :3] = away.tool_in_base[:, :3, :3] @ np.diag([1.0, -1.0, -1.0])
        noes.append(seconds_of(reacher, away, 1))
        verdicts += np.bincount(reacher.check(typed(random, exact)).verdict, minlength=4)
    told = ", ".join(f"{n} {said}" for n, said in zip(verdicts, VERDICTS, strict=True) if n)
    spin = f"; spin free {np.median(spins) * 1e6:.0f} us" if spins else ""
    took = f"{np.median(micros) * 1e6:.1f} us{spin}; a no {np.median(noes) * 1e6:.0f} us"
    print(f"{name:22} {told}; {took}", flush=True)
    return int(verdicts[REACHABLE] + verdicts[NOT_FOUND]) == int(verdicts.sum())


def main() -> None:
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 100_000
    seed = int(sys.argv[2]) if len(sys.argv) > 2 else int(time.time())
    print(f"seed {seed}; asked: {ASKED}")
    each = max(1, count // (ARMS * len(MADE)))
    fine = sum(not measure(name, each, seed) for name in MADE) == 0
    print("no false no" if fine else "THERE IS A FALSE NO")


if __name__ == "__main__":
    main()
