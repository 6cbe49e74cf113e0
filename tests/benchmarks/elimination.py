"""Six joints in general position by elimination: recall, two orders compared, time.

Run: python -m tests.benchmarks.elimination [--seed N] [--share S] [SECTION ...]. Sections: general,
prismatic, special, sixteen, speed; all of them without any. Every target is made by the chain from
motions drawn anew (the seed is printed), so that a solution is known. --share 0.01 draws a
hundredth of the full sizes.
"""

import argparse
import os
import time
from collections.abc import Callable, Sequence

import numpy as np

from kinematics.inverse.elimination import Elimination, elimination_of
from kinematics.inverse.screws import screws_of
from kinematics.table import FloatArray
from tests.kinematics.inverse.general_arms import (
    FAMILIES,
    SIXTEEN,
    counts_by_order,
    sliding,
)
from tests.kinematics.inverse.triple_arms import Draw, random_motions
from tests.kinematics.inverse.triple_sets import jacobians_at, tools_at

ARMS, TARGETS = 1000, 100
FOUND_AGAIN = 1e-6
"""Radians, or metres, within which the generating motions must come back."""

REGULAR = 1e-6
"""Smallest singular value (lengths over L) above which they must."""

HEAD = (
    f"{'':32s} {'arms':>5s} {'none':>5s} {'targets':>8s} {'each':>6s} {'missed':>7s} {'below':>6s}"
    f" {'closed':>7s} {'open':>6s} {'agree':>9s} {'of':>8s} {'worst':>8s} {'us':>7s}"
)
"""none: arms without a sound order. missed: generating motions not found again, of these below:
with a smallest singular value below 1e-6. closed: targets told as having no solution, which all
have. agree: share of targets of which both orders alone find as many solutions; of: how many
targets belong to arms that have two sound orders."""


def missing(
    solver: Elimination, motions: FloatArray, targets: FloatArray
) -> tuple[FloatArray, ...]:
    """Return the motions not found again, and what was found: counts, open, errors."""
    found = solver.solve(targets)
    apart = np.abs(found.motions - motions[found.target])
    turned = np.minimum(apart, np.abs(apart - 2 * np.pi))
    away = np.where(solver.screws.prismatic, apart, turned).max(axis=1, initial=0.0)
    best = np.full(len(targets), np.inf)
    np.minimum.at(best, found.target, away)
    counts = found.count_per_target()
    errors = np.maximum(found.position_error / solver.screws.length, found.angle_error)
    return motions[best > FOUND_AGAIN], counts, found.open, errors


def measure(name: str, draw: Draw, random: np.random.Generator, arms: int, count: int) -> None:
    """Print a line for so many targets of each of so many arms."""
    none = targets_in_all = solutions = missed = below = closed = opened = agreed = twice = 0
    worst = seconds = 0.0
    for _ in range(arms):
        arm = draw(random)
        solver = elimination_of(screws_of(arm, np.eye(4)))
        if solver is None:
            none += 1
            continue
        motions = random_motions(random, arm, count)
        targets = tools_at(solver.screws, motions)
        begin = time.process_time()
        solver.solve(targets)
        seconds += time.process_time() - begin
        lost, counts, is_open, errors = missing(solver, motions, targets)
        counted = counts_by_order(solver, targets)
        if len(counted) == 2:
            twice += count
            agreed += int((counted[0] == counted[1]).sum())
        targets_in_all += count
        solutions += int(counts.sum())
        missed += len(lost)
        if len(lost):
            values = np.linalg.svd(jacobians_at(solver.screws, lost), compute_uv=False)[:, -1]
            below += int((values < REGULAR).sum())
        closed += int(((counts == 0) & ~is_open).sum())
        opened += int(is_open.sum())
        worst = max(worst, float(errors.max(initial=0.0)))
    total = max(targets_in_all, 1)
    print(
        f"{name:32s} {arms:5d} {none:5d} {targets_in_all:8d} {solutions / total:6.2f} {missed:7d}"
        f" {below:6d} {closed:7d} {opened:6d} {agreed / max(twice, 1):9.5f} {twice:8d} {worst:8.1e}"
        f" {1e6 * seconds / total:7.1f}",
        flush=True,
    )


def general(random: np.random.Generator, share: float) -> None:
    """Recall of arms in general position: asked are 99.999 %, and 99.99 % agreement."""
    print(HEAD)
    measure("general", FAMILIES["general"], random, max(int(share * ARMS), 2), TARGETS)


def prismatic(random: np.random.Generator, share: float) -> None:
    """Recall with one sliding joint at each of the six places: asked are 100 % of 10 000."""
    print(HEAD)
    for place in range(6):
        arms = max(int(share * 100), 2)
        measure(f"joint {place + 1} slides", sliding(place), random, arms, TARGETS)


def special(random: np.random.Generator, share: float) -> None:
    """Recall of arms with pairs of axes that meet or are parallel, of right angles and offsets."""
    print(HEAD)
    for name, draw in FAMILIES.items():
        measure(name, draw, random, max(int(share * 100), 2), TARGETS)


def sixteen(random: np.random.Generator, share: float) -> None:
    """How many targets of the arm with sixteen solutions have 4, 8, 12 and 16: 27/39/24/10.5 %."""
    solver = elimination_of(screws_of(SIXTEEN, np.eye(4)))
    assert solver is not None
    motions = random.uniform(-np.pi, np.pi, (max(int(share * 20_000), 100), 6))
    lost, counts, _, _ = missing(solver, motions, tools_at(solver.screws, motions))
    shares = {int(n): round(float((counts == n).mean()), 4) for n in np.unique(counts)}
    print(f"{len(motions)} targets, missed {len(lost)}, share of each count {shares}")


def speed(random: np.random.Generator, share: float) -> None:
    """Time all solutions, warm, on one core: asked are 400 us, with a sliding joint 600 us."""
    count = max(int(share * 2000), 50)
    print(
        f"{'':32s} {'us, best of 5':>14s} {'beyond reach':>14s} {'alone':>8s} {'made in ms':>10s}"
    )
    draws = {"general": FAMILIES["general"], "joint 3 slides": sliding(2)}
    for name, draw in draws.items():
        arm = draw(random)
        begin = time.process_time()
        solver = elimination_of(screws_of(arm, np.eye(4)))
        made = 1e3 * (time.process_time() - begin)
        assert solver is not None
        targets = tools_at(solver.screws, random_motions(random, arm, count))
        beyond = targets.copy()
        beyond[:, 0, 3] += 3.0 * solver.screws.length
        took = [best_of(solver, each, count) for each in (targets, beyond)]
        alone = min(best_of(solver, each[None], 1) for each in targets[:50])
        print(f"{name:32s} {took[0]:14.1f} {took[1]:14.1f} {alone:8.1f} {made:10.1f}")


def best_of(solver: Elimination, targets: FloatArray, count: int) -> float:
    """Return the least microseconds a target of five runs."""
    took = []
    for _ in range(5):
        begin = time.process_time()
        solver.solve(targets)
        took.append(1e6 * (time.process_time() - begin) / count)
    return min(took)


SECTIONS: dict[str, Callable[[np.random.Generator, float], None]] = {
    "general": general,
    "prismatic": prismatic,
    "special": special,
    "sixteen": sixteen,
    "speed": speed,
}


def main(arguments: Sequence[str] | None = None) -> None:
    """Print the tables asked for."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("sections", nargs="*", choices=[*SECTIONS, []], metavar="SECTION")
    parser.add_argument("--seed", type=int, default=int.from_bytes(os.urandom(4), "big"))
    parser.add_argument("--share", type=float, default=1.0)
    asked = parser.parse_args(arguments)
    for section in asked.sections or SECTIONS:
        print(f"\n{section}, seed {asked.seed}", flush=True)
        SECTIONS[section](np.random.default_rng(asked.seed), asked.share)


if __name__ == "__main__":
    main()
