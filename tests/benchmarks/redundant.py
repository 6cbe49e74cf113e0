"""Arms with joints to spare, free spins and cones: witnesses for targets that postures were at.

    python -m tests.benchmarks.redundant [targets a line] [seed]

Each line: how many of the targets have a witness (asked: 99.9 % and more), how many are told to be
out of reach (asked: none), and milliseconds a target (seven joints, asked: 5 and less), the best of
three runs over all and of the first hundred one by one.
"""

import sys
import time
from collections.abc import Callable

import numpy as np

from kinematics.arm import Arm
from kinematics.reach.checks import Reacher
from kinematics.reach.spins import spun
from kinematics.reach.targets import (
    CONE,
    NONE,
    OUTSIDE_TRAVEL,
    REACHABLE,
    SPIN,
    UNREACHABLE,
    Targets,
)
from kinematics.rotations import rotation_about
from tests.kinematics.inverse.redundant_arms import ARMS
from tests.kinematics.reach.arm_classes import CLASSES, postures_within_travel, targets_at

ARMS_EACH, ONE_BY_ONE = 10, 10
OTHERS = (
    *("upright arm with wrist", "2, 3 and 4 parallel", "five, three parallel", "RRPR"),
    *("RPRR", "level wrist", "place by RRR"),
)

Make = Callable[[np.random.Generator], tuple[Arm, np.ndarray]]


def asked(
    random: np.random.Generator, arm: Arm, tool: np.ndarray, freedom: int, count: int
) -> Targets:
    """Return targets of a freedom that postures spread over travel are at."""
    targets = targets_at(arm, tool, freedom, postures_within_travel(random, arm, count))
    if freedom != NONE:
        turns = random.uniform(-np.pi, np.pi, count)
        targets.tool_in_base[:] = spun(targets.tool_in_base, turns)
    if freedom == CONE:
        targets.cone[:] = random.uniform(0.05, 0.6, count)
        for target, cone in zip(targets.tool_in_base, targets.cone, strict=True):
            across = np.append(random.normal(size=2), 0.0)
            off = float(cone * np.sqrt(random.uniform()))
            target[:3, :3] = target[:3, :3] @ rotation_about(across / np.linalg.norm(across), off)
    return targets


def line(name: str, make: Make, freedom: int, count: int, seed: int) -> None:
    """Print the line of a kind of arm."""
    random = np.random.default_rng([seed, freedom, *name.encode()])
    verdicts, seconds, alone = np.zeros(4, int), 0.0, []
    for _ in range(ARMS_EACH):
        arm, tool = make(random)
        targets, reacher = asked(random, arm, tool, freedom, count // ARMS_EACH), Reacher(arm, tool)
        reacher.check(targets.only(np.arange(1)))
        runs = []
        for _ in range(3):
            begin = time.perf_counter()
            checks = reacher.check(targets)
            runs.append(time.perf_counter() - begin)
        seconds += min(runs)
        verdicts += np.bincount(checks.verdict, minlength=4)
        for index in range(min(ONE_BY_ONE, len(targets))):
            begin = time.perf_counter()
            reacher.check(targets.only(np.array([index])))
            alone.append(time.perf_counter() - begin)
    total = int(verdicts.sum())
    wrong = int(verdicts[OUTSIDE_TRAVEL] + verdicts[UNREACHABLE])
    print(
        f"{name:24} {verdicts[REACHABLE]} of {total} ({100 * verdicts[REACHABLE] / total:.3f} %), "
        f"{wrong} false no; {1e3 * seconds / total:.2f} ms, alone {1e3 * np.median(alone):.2f} ms"
    )


def main() -> None:
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 10000
    seed = int(sys.argv[2]) if len(sys.argv) > 2 else int(time.time())
    print(f"seed {seed}")
    kinds: dict[str, Make] = dict(ARMS)
    for name in OTHERS:
        kinds[name] = lambda random, name=name: CLASSES[name](random)[:2]  # type: ignore[misc]
    for title, freedom in (("poses", NONE), ("free spin", SPIN), ("cones", CONE)):
        print(f"\n{title}")
        for name, make in kinds.items():
            if freedom != NONE or name in ARMS:
                line(name, make, freedom, count, seed)


if __name__ == "__main__":
    main()
