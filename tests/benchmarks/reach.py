"""All solutions of arms with a special triple: what is missed, how exact, how fast.

Run: python -m tests.benchmarks.reach [--seed N] [--share S] [SECTION ...]. Sections: recall,
singular, folds, boundary, beyond, rounded, speed, scipy; all of them without any. Every target is
made by the chain from motions drawn anew (the seed is printed), so that a solution is known.
--share 0.01 draws a hundredth of the full sizes.
"""

import argparse
import os
import time
from collections.abc import Callable, Sequence
from functools import partial

import numpy as np
from scipy.optimize import least_squares

from kinematics.arm import Arm
from kinematics.inverse.geometry import meeting_point
from kinematics.inverse.landing import gap_to, land
from kinematics.inverse.screws import Screws, screws_of
from kinematics.inverse.special_triple import SpecialTriple, special_triple_of
from kinematics.table import FloatArray
from tests.kinematics.inverse.triple_arms import (
    FAMILIES,
    MORE_FAMILIES,
    Draw,
    random_motions,
    rounded,
)
from tests.kinematics.inverse.triple_sets import (
    OFF,
    centre_on_first_axis,
    folds,
    jacobians_at,
    lined_up,
    stretched,
    tools_at,
    turn_between,
)

RECALL, SINGULAR, FOLDS, BOUNDARY = 100_000, 20_000, 10_000, 10_000
ARMS = 10
REGULAR = 1e-6
"""Smallest singular value (lengths over L) above which a generating solution must come back."""

FOUND_AGAIN = 1e-6
"""Radians, or metres, within which it has."""

Change = Callable[[Screws, FloatArray], FloatArray]

WITHOUT = "elbow without offsets"
ELBOWS = ("elbow with offsets", WITHOUT, "slanted wrist")
WRISTS = (*ELBOWS, "wrist on any arm")
PARALLEL = "three parallel, right angles"


def solver_for(draw: Draw, random: np.random.Generator) -> SpecialTriple:
    """Return the solver of an arm drawn anew, its kernels compiled."""
    solver = special_triple_of(screws_of(draw(random), np.eye(4)))
    assert solver is not None
    solver.solve(np.eye(4)[None])
    return solver


def smallest_values(screws: Screws, motions: FloatArray) -> FloatArray:
    """Return the smallest singular value of each Jacobian, lengths over L."""
    if not len(motions):
        return np.empty(0)
    smallest: FloatArray = np.linalg.svd(jacobians_at(screws, motions), compute_uv=False)[:, -1]
    return smallest


def away(screws: Screws, motions: FloatArray, others: FloatArray) -> FloatArray:
    """Return the largest difference of each two motions, whole turns aside."""
    apart = np.abs(motions - others)
    turned = np.minimum(apart, np.abs(apart - 2 * np.pi))
    largest: FloatArray = np.where(screws.prismatic, apart, turned).max(axis=1)
    return largest


class Tally:
    """What a set of targets gave, over several arms."""

    def __init__(self) -> None:
        self.targets = self.solutions = self.none = self.closed = self.open = self.missed = 0
        self.singular = 0
        self.worst = self.seconds = 0.0

    def add(self, solver: SpecialTriple, motions: FloatArray, again: bool = False) -> None:
        """Solve for where motions bring the tool; ``again``: look for the motions themselves."""
        screws = solver.screws
        targets = tools_at(screws, motions)
        begin = time.perf_counter()
        found = solver.solve(targets)
        self.seconds += time.perf_counter() - begin
        none = found.count_per_target() == 0
        self.targets += len(targets)
        self.solutions += len(found.target)
        self.none += int(none.sum())
        self.closed += int((none & ~found.open).sum())
        self.open += int(found.open.sum())
        errors = [found.position_error / screws.length, found.angle_error]
        self.worst = max(self.worst, *(float(e.max(initial=0.0)) for e in errors))
        if again:
            best = np.full(len(targets), np.inf)
            np.minimum.at(best, found.target, away(screws, found.motions, motions[found.target]))
            lost = motions[best > FOUND_AGAIN]
            regular = smallest_values(screws, lost) > REGULAR
            self.missed += int(regular.sum())
            self.singular += len(lost) - int(regular.sum())

    def said(self) -> str:
        """Return the line of a table."""
        each = 1e6 * self.seconds / max(self.targets, 1)
        return (
            f"{self.targets:8d} {self.solutions / max(self.targets, 1):6.2f} {self.missed:7d}"
            f" {self.singular:8d} {self.none:6d} {self.closed:7d} {self.open:7d}"
            f" {self.worst:9.1e} {each:7.1f}"
        )


HEAD = (
    f"{'':44s} {'targets':>8s} {'each':>6s} {'missed':>7s} {'singular':>8s} {'none':>6s}"
    f" {'unproved':>7s} {'open':>7s} {'worst':>9s} {'us':>7s}"
).replace("unproved", "closed")
"""missed: generating motions, smallest singular value above 1e-6, that did not come back; singular:
those below. none: targets without any; closed: of these, told as proved. worst: over L, or rad."""


def measure(
    name: str,
    draw: Draw,
    random: np.random.Generator,
    count: int,
    change: Change | None = None,
    again: bool = False,
) -> Tally:
    """Print a line for targets of several arms at motions drawn and changed."""
    tally = Tally()
    for _ in range(ARMS):
        arm = draw(random)
        solver = special_triple_of(screws_of(arm, np.eye(4)))
        assert solver is not None
        solver.solve(np.eye(4)[None])
        motions = random_motions(random, arm, max(count // ARMS, 2))
        tally.add(solver, motions if change is None else change(solver.screws, motions), again)
    print(f"{name:44s} {tally.said()}", flush=True)
    return tally


def recall(random: np.random.Generator, share: float) -> None:
    """Have every generating solution back."""
    print(HEAD)
    for name, draw in {**FAMILIES, **MORE_FAMILIES}.items():
        measure(name, draw, random, int(share * RECALL), again=True)


def centre_of(screws: Screws) -> FloatArray:
    """Return the wrist centre at zero motion, over L."""
    return meeting_point(screws.axis[3:], screws.point[3:])


def singular(random: np.random.Generator, share: float) -> None:
    """Have a witness at and near each kind of singular posture."""
    print(HEAD)
    count = int(share * SINGULAR)
    for off in OFF:
        sets: list[tuple[str, str, Change]] = [
            *(("wrist lined up", name, partial(lined_up_wrist, off)) for name in WRISTS),
            *(("stretched", name, partial(stretched_elbow, off, False)) for name in ELBOWS),
            *(("folded", name, partial(stretched_elbow, off, True)) for name in ELBOWS),
            ("wrist centre on axis 1", WITHOUT, partial(centred, off)),
            ("all three", WITHOUT, partial(every_way, off)),
            ("axis 6 along axes 2, 3, 4", PARALLEL, partial(sixth_along, off)),
        ]
        for what, name, change in sets:
            measure(f"{what} but {off:g}, {name}", FAMILIES[name], random, count, change)


def lined_up_wrist(off: float, screws: Screws, motions: FloatArray) -> FloatArray:
    """Return motions with axis 6 along axis 4."""
    return lined_up(screws, 3, motions, off)


def stretched_elbow(off: float, folded: bool, screws: Screws, motions: FloatArray) -> FloatArray:
    """Return motions with axis 2, axis 3 and the wrist centre in line."""
    return stretched(screws, centre_of(screws), motions, off, folded)


def centred(off: float, screws: Screws, motions: FloatArray) -> FloatArray:
    """Return motions with the wrist centre on axis 1."""
    return centre_on_first_axis(screws, centre_of(screws), motions, off)


def every_way(off: float, screws: Screws, motions: FloatArray) -> FloatArray:
    """Return motions that are singular in three ways at once, but for ``off``."""
    centre = centre_of(screws)
    both = centre_on_first_axis(screws, centre, stretched(screws, centre, motions, off, False), off)
    return lined_up(screws, 3, both, off)


def sixth_along(off: float, screws: Screws, motions: FloatArray) -> FloatArray:
    """Return motions with axis 6 along axis 4, but for ``off``."""
    along = motions.copy()
    along[:, 4] = turn_between(screws, 4, screws.axis[3], screws.axis[5]) + off
    return along


def at_folds(random: np.random.Generator, share: float) -> None:
    """Have a witness where two solutions fall together, to the last digit."""
    print(HEAD)
    for name, draw in {**FAMILIES, **MORE_FAMILIES}.items():
        measure(
            f"folds, {name}",
            draw,
            random,
            2 * int(share * FOLDS),
            partial(folds, random),
        )


def boundary(random: np.random.Generator, share: float) -> None:
    """Have a witness where the arm is stretched, and none a millionth of L further out."""
    print(HEAD)
    for name in (WITHOUT, PARALLEL):
        measure(
            f"at the edge, {name}",
            FAMILIES[name],
            random,
            int(share * BOUNDARY),
            partial(at_edge, name),
        )


def at_edge(name: str, screws: Screws, motions: FloatArray) -> FloatArray:
    """Return motions with the elbow stretched."""
    centre = screws.point[3] if name == PARALLEL else centre_of(screws)
    return stretched(screws, centre, motions, 0.0, False)


def beyond(random: np.random.Generator, share: float) -> None:
    """Find nothing a little beyond reach, and tell by how much it is."""
    print("beyond reach: targets, with a solution (must be 0), open, nearest pose is off by (L)")
    for hair in (1e-6, 1e-4, 1e-1):
        for _ in range(ARMS):
            solver = solver_for(FAMILIES[WITHOUT], random)
            screws = solver.screws
            motions = random.uniform(-np.pi, np.pi, (max(int(share * BOUNDARY) // ARMS, 2), 6))
            motions = at_edge(WITHOUT, screws, motions)
            targets = tools_at(screws, motions)
            # The wrist centre moves straight away from the shoulder; the turn stays.
            out = np.linalg.inv(screws.tool_at_zero) @ np.append(centre_of(screws), 1.0)
            scaled = screws.scaled(targets)
            centres = (scaled @ out)[:, :3]
            away_from = centres - screws.point[1]
            away_from /= np.linalg.norm(away_from, axis=1)[:, None]
            targets[:, :3, 3] += hair * screws.length * away_from
            found = solver.solve(targets)
            few = targets[:20]
            nearest = tools_at(screws, solver.nearest(few))
            off = np.linalg.norm(nearest[:, :3, 3] - few[:, :3, 3], axis=1) / screws.length
            print(
                f"{hair:8.0e} {len(targets):8d} {len(found.motions):6d}"
                f" {int(found.open.sum()):6d} {off.min():12.4e} {off.max():12.4e}"
            )


def of_rounded(random: np.random.Generator, share: float) -> None:
    """Solve tables whose angles are typed with so many decimals of a radian."""
    print(HEAD)
    for decimals in (4, 3):
        for name, draw in FAMILIES.items():
            measure(
                f"{decimals} decimals of a radian, {name}",
                partial(typed, draw, decimals),
                random,
                int(0.2 * share * RECALL),
                again=True,
            )


def typed(draw: Draw, decimals: int, random: np.random.Generator) -> Arm:
    """Return an arm drawn anew with its angles typed."""
    return rounded(draw(random), decimals)


def speed(random: np.random.Generator, share: float) -> None:
    """Time all solutions, warm, on one core: median of nine runs."""
    count = max(int(share * 10_000), 100)
    print(f"{'all solutions':44s} {'each':>6s} {'us':>8s} {'best':>8s} {'alone':>8s}")
    for name, draw in {**FAMILIES, **MORE_FAMILIES}.items():
        solver = solver_for(draw, random)
        motions = random.uniform(-np.pi, np.pi, (count, 6))
        targets = tools_at(solver.screws, motions * np.where(solver.screws.prismatic, 0.15, 1.0))
        took = []
        for _ in range(9):
            begin = time.process_time()
            found = solver.solve(targets)
            took.append(1e6 * (time.process_time() - begin) / count)
        alone = []
        for each in targets[:200]:
            begin = time.perf_counter()
            solver.solve(each[None])
            alone.append(1e6 * (time.perf_counter() - begin))
        print(
            f"{name:44s} {len(found.motions) / count:6.2f} {np.median(took):8.2f} {min(took):8.2f}"
            f" {np.median(alone):8.1f}"
        )


def against_scipy(random: np.random.Generator, share: float) -> None:
    """Hold against scipy's least_squares from 20 starts: time and solutions found."""
    count = max(int(share * 50), 3)
    print(f"{'':44s} {'ours us':>9s} {'each':>6s} {'scipy us':>10s} {'each':>6s} {'ratio':>8s}")
    for name in (*ELBOWS, "wrist on any arm", PARALLEL, "axes 1 2 3 meet"):
        solver = solver_for(FAMILIES[name], random)
        targets = tools_at(solver.screws, random.uniform(-np.pi, np.pi, (count, 6)))
        begin = time.perf_counter()
        for _ in range(20):
            found = solver.solve(targets)
        ours = (time.perf_counter() - begin) / 20 / count * 1e6
        begin, solutions = time.perf_counter(), 0
        for target in targets:
            scaled = solver.screws.scaled(target)
            solutions += len(by_scipy(solver.screws, scaled, random))
        theirs = (time.perf_counter() - begin) / count * 1e6
        print(
            f"{name:44s} {ours:9.1f} {len(found.motions) / count:6.2f} {theirs:10.0f}"
            f" {solutions / count:6.2f} {theirs / ours:8.0f}"
        )


def by_scipy(screws: Screws, target: FloatArray, random: np.random.Generator) -> list[FloatArray]:
    """Return the different solutions that 20 starts lead to; residual and Jacobian are compiled."""
    axis, point, pose, gap = np.empty((6, 3)), np.empty((6, 3)), np.eye(4), np.empty(6)

    def residual(motions: FloatArray) -> FloatArray:
        lines = screws.axis, screws.point, screws.prismatic
        land(*lines, screws.tool_at_zero, motions, axis, point, pose)
        gap_to(pose, target, gap)
        return gap.copy()

    def slope(motions: FloatArray) -> FloatArray:
        towards: FloatArray = -jacobians_at(screws, motions[None])[0]
        return towards

    found: list[FloatArray] = []
    for start in random.uniform(-np.pi, np.pi, (20, 6)):
        tried = least_squares(residual, start, slope, method="lm", xtol=1e-14, ftol=1e-14)
        if np.linalg.norm(tried.fun) < 1e-9:
            apart = [away(screws, tried.x[None] % (2 * np.pi), f[None]) for f in found]
            if not any(a[0] < 1e-5 for a in apart):
                found.append(tried.x % (2 * np.pi))
    return found


SECTIONS: dict[str, Callable[[np.random.Generator, float], None]] = {
    "recall": recall,
    "singular": singular,
    "folds": at_folds,
    "boundary": boundary,
    "beyond": beyond,
    "rounded": of_rounded,
    "speed": speed,
    "scipy": against_scipy,
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
