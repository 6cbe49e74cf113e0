"""Verdicts on targets that arms of every class have just been at: a false no would be a fault.

    python -m tests.benchmarks.reach_checks [regular] [folds] [seed]

Regular targets come from postures spread over travel, folds from postures where two ways to a
target meet, boundary targets from stretched arms; and a hair (1e-6 of the length) beyond the
boundary nothing may be called reachable. "Not found" is no false no, but a search that missed: it
is what few random arms get whose axes are nearly, and not quite, in line. Each line: verdicts,
generating postures that were not among those told, the largest error, and microseconds a target
beside those of the solver alone.
"""

import sys
import time
from collections.abc import Callable

import numpy as np

from kinematics.arm import Arm
from kinematics.reach.checks import Reacher
from kinematics.reach.targets import OUTSIDE_TRAVEL, REACHABLE, UNREACHABLE, VERDICTS, Targets
from tests.kinematics.reach.arm_classes import (
    CLASSES,
    postures_within_travel,
    targets_at,
)
from tests.kinematics.reach.folds import folds
from tests.kinematics.reach.stretched import STRETCHED, hair_beyond

ARMS = 40
"""Arms of a class; each with an equal share of the targets."""

TELLING = 1e-6
"""Joint values within which a posture counts as the one that a target was made from."""

Counted = tuple[np.ndarray, int, float, float, float]


def counted(reacher: Reacher, targets: Targets, postures: np.ndarray) -> Counted:
    """Return verdicts, generating postures missed, worst error, and seconds with and without."""
    reacher.check(targets.only(np.arange(1)))  # what is made once for an arm
    begin = time.perf_counter()
    checks = reacher.check(targets)
    seconds = time.perf_counter() - begin
    method = reacher.answerer_of(int(targets.freedom[0])).method
    begin = time.perf_counter()
    method.solve(targets.tool_in_base, np.zeros(reacher.arm.joint_count))
    alone = time.perf_counter() - begin
    of = np.repeat(np.arange(len(targets)), np.diff(checks.offsets))
    off = np.abs(checks.joint_values - postures[of]).max(axis=1)
    met = np.zeros(len(targets), bool)
    met[of[off < TELLING]] = True
    worst = max(checks.position_error.max(initial=0.0), checks.angle_error.max(initial=0.0))
    return np.bincount(checks.verdict, minlength=4), int((~met).sum()), worst, seconds, alone


def told(name: str, results: list[Counted], missed_too: bool) -> bool:
    """Print the line of a class; return whether none of its targets is told to be out of reach."""
    verdicts = np.sum([result[0] for result in results], axis=0)
    total = max(int(verdicts.sum()), 1)
    said = ", ".join(f"{n} {verdict}" for n, verdict in zip(verdicts, VERDICTS, strict=True) if n)
    missed = f"; {sum(r[1] for r in results)} missed" if missed_too else ""
    micros = [sum(r[place] for r in results) / total * 1e6 for place in (3, 4)]
    worst = max((r[2] for r in results), default=0.0)
    print(f"{name:26} {said}{missed}; worst {worst:.1e}; {micros[0]:.1f} us ({micros[1]:.1f})")
    return not verdicts[UNREACHABLE] and not verdicts[OUTSIDE_TRAVEL]


def measure(
    title: str,
    count: int,
    seed: int,
    made: Callable[[np.random.Generator, Arm, np.ndarray, int], np.ndarray],
    missed_too: bool,
) -> bool:
    """Print a section over all classes."""
    print(f"\n{title}")
    fine, each = True, max(1, count // (ARMS * len(CLASSES)))
    for name, make in CLASSES.items():
        random, results = np.random.default_rng([seed, *name.encode()]), []
        for _ in range(ARMS):
            arm, tool, freedom = make(random)
            postures = made(random, arm, tool, each)
            if len(postures):
                reacher = Reacher(arm, tool)
                results.append(counted(reacher, targets_at(arm, tool, freedom, postures), postures))
        if results:
            fine &= told(name, results, missed_too)
    return fine


def regular_postures(
    random: np.random.Generator, arm: Arm, tool: np.ndarray, count: int
) -> np.ndarray:
    """Return postures spread over travel; the tool does not matter."""
    return postures_within_travel(random, arm, count)


def beyond(count: int, seed: int) -> bool:
    """Print the section of stretched arms, on the boundary and a hair beyond."""
    print("\nstretched arms: on the boundary, and 1e-6 of the length beyond")
    fine, each = True, max(1, count // (ARMS * len(STRETCHED)))
    for name, make in STRETCHED.items():
        random = np.random.default_rng([seed, *name.encode()])
        on, past = np.zeros(4, int), np.zeros(4, int)
        for _ in range(ARMS):
            arm, tool, freedom, postures, outward = make(random, each)
            reacher, targets = Reacher(arm, tool), targets_at(arm, tool, freedom, postures)
            on += np.bincount(reacher.check(targets).verdict, minlength=4)
            further = hair_beyond(arm, tool, targets, outward)
            past += np.bincount(reacher.check(further).verdict, minlength=4)
        print(f"{name:26} on: {on.tolist()}; beyond: {past.tolist()} ({', '.join(VERDICTS)})")
        fine &= on[REACHABLE] == on.sum() and past[REACHABLE] == 0
    return bool(fine)


def main() -> None:
    regular, folded = (int(text) for text in (*sys.argv[1:3], "1000000", "10000")[:2])
    seed = int(sys.argv[3]) if len(sys.argv) > 3 else int(time.time())
    print(f"seed {seed}")
    fine = measure(
        "regular targets",
        regular,
        seed,
        lambda r, arm, _, n: postures_within_travel(r, arm, n),
        True,
    )
    # Half of the pairs of postures that folds are looked for between have none between them.
    fine &= measure("folds", 3 * folded, seed, folds, False)
    fine &= beyond(folded, seed)
    print("\nno false no" if fine else "\nTHERE IS A FALSE NO")


if __name__ == "__main__":
    main()
