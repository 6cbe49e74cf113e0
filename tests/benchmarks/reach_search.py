"""The search and the arms that turn about one direction: time, shares found, scipy beside them.

Run: python -m tests.benchmarks.reach_search [--targets N] [--seed N]. All targets are tool poses of
random postures within travel, so that each is reachable; without a seed each run draws its own. One
core; medians of some runs. Left out: the classes with a closed form of their own (reach.py).
"""

import argparse
import secrets
import statistics
from collections.abc import Callable, Sequence
from dataclasses import replace
from time import perf_counter

import numpy as np
from scipy.optimize import least_squares

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.inverse.descent import POSE, gap_at
from kinematics.inverse.descent_arms import room_of, slopes_of, start_box
from kinematics.inverse.descent_arrays import desk_for
from kinematics.inverse.families import families_of
from kinematics.inverse.found import Solver
from kinematics.inverse.four_axes import four_axes_of
from kinematics.inverse.iterative import Search
from kinematics.table import Convention, FloatArray, JointKind, Row, Table, Travel
from kinematics.travel_limits import travel_margin
from service import demo
from service.wire.arms import read_arm
from service.wire.cells import CellAt, read_cell

TARGETS = 10_000
BESIDE = 30
"""Targets for the fit by scipy, which takes a tenth of a second for each."""
STARTS = 20
TURNS = 5
FLANGE = np.eye(4)


def random_six(random: np.random.Generator, travel: Travel | None) -> Arm:
    """Return an arm of six turning rows, all lengths and angles drawn."""
    rows = tuple(
        Row(
            JointKind.REVOLUTE,
            a=float(random.uniform(-0.6, 0.6)),
            alpha=float(random.uniform(-np.pi, np.pi)),
            d=float(random.uniform(-0.6, 0.6)),
            theta=float(random.uniform(-np.pi, np.pi)),
            travel=travel,
        )
        for _ in range(6)
    )
    return Arm("six rows drawn", Table(Convention.STANDARD, rows))


def without_travel(arm: Arm) -> Arm:
    """Return an arm whose turning rows are not bounded."""
    rows = (replace(row, travel=None, working_travel=None) for row in arm.table.rows)
    table = Table(arm.table.convention, tuple(rows))
    return Arm(f"{arm.name}, no travel", table)


def postures(random: np.random.Generator, arm: Arm, count: int) -> FloatArray:
    """Return postures within travel, combined travel too, evenly spread."""
    lower, upper = start_box(arm, room_of(arm, np.ones(arm.joint_count)))
    found: list[FloatArray] = []
    while sum(map(len, found)) < count:
        drawn = random.uniform(lower, upper, (count, arm.joint_count))
        found.append(drawn[travel_margin(arm, drawn) >= 0.0])
    return np.concatenate(found)[:count]


def seconds(run: Callable[[], object]) -> float:
    """Return the median seconds of a run."""
    taken = []
    for _ in range(TURNS):
        started = perf_counter()
        run()
        taken.append(perf_counter() - started)
    return statistics.median(taken)


def search(arm: Arm, drawn: FloatArray) -> None:
    """Print time and shares found by the search."""
    solver = Search(arm, FLANGE)
    targets = tool_in_base(arm, drawn, FLANGE)
    found, used = solver.solve(targets), solver.starts_used(targets)
    met = found.count_per_target() > 0
    each = seconds(lambda: solver.solve(targets)) / len(targets)
    errors = np.maximum(found.position_error / solver.screws.length, found.angle_error)
    driven = list(arm.drive_map.driven)
    values = np.linalg.solve(arm.drive_map.matrix[driven], found.motions[:, driven].T).T
    room = room_of(arm, solver.scale)
    smallest = np.array(
        [
            np.linalg.svd(slopes_of(solver.lines, room, POSE, q), compute_uv=False)[
                min(6, arm.joint_count) - 1
            ]
            for q in values[:1000] / solver.scale
        ]
    )
    regular = errors[:1000][smallest > 1e-3]
    shares = [f"{(met & (used <= most)).mean():8.4%}" for most in (1, 10, 100)]
    print(
        f"{arm.name:28} {each * 1e6:6.1f} us, found from 1, 10, 100 starts: {' '.join(shares)}, "
        f"starts {used.mean():.2f}, error of regular ones {regular.max():.1e}"
    )


def beside_scipy(arm: Arm, drawn: FloatArray) -> None:
    """Print how the search compares with scipy's fit from 20 starts until one is there."""
    solver = Search(arm, FLANGE)
    targets = tool_in_base(arm, drawn, FLANGE)
    ours = seconds(lambda: solver.solve(targets)) / len(targets)
    found = int((solver.solve(targets).count_per_target() > 0).sum())
    lines, room = solver.lines, room_of(arm, solver.scale)
    desk, joints = desk_for(lines.drive.shape[0], arm.joint_count, len(room.least)), arm.joint_count
    lower, upper = start_box(arm, room)
    random = np.random.default_rng(1)
    scaled, theirs_found = solver.screws.scaled(targets), 0
    started = perf_counter()
    for target in scaled:

        def gap(q: FloatArray, target: FloatArray = target) -> FloatArray:
            gap_at(lines, room, desk, POSE, 1.0, target, np.ascontiguousarray(q))
            return desk.gap.copy()

        def slopes(q: FloatArray) -> FloatArray:
            return -slopes_of(lines, room, POSE, np.ascontiguousarray(q))[: len(desk.gap)]

        for start in random.uniform(lower, upper, (STARTS, joints)):
            bounds = room.lower, room.upper
            fit = least_squares(gap, start, slopes, bounds, xtol=1e-14, ftol=1e-14, gtol=1e-14)
            if fit.cost < 1e-18:
                theirs_found += 1
                break
    theirs = (perf_counter() - started) / len(targets)
    print(
        f"{arm.name:28} scipy {theirs * 1e3:.1f} ms, {theirs / ours:.0f} times the search's "
        f"{ours * 1e6:.1f} us; found {theirs_found} and {found} of {len(targets)}"
    )


def closed_form(arm: Arm, drawn: FloatArray) -> None:
    """Print time and what is missed by the closed form of an arm that turns one way."""
    tool_in_flange = arm.tool_in_flange(None)
    solver = four_axes_of(arm, tool_in_flange)
    assert solver is not None
    targets = tool_in_base(arm, drawn, tool_in_flange)
    found = solver.solve(targets)
    each = seconds(lambda: solver.solve(targets)) / len(targets)
    single = seconds(lambda: solver.solve(targets[:1]))
    motions = arm.drive_map.motions(drawn)
    apart = found.motions - motions[found.target]
    turned = (apart + np.pi) % (2.0 * np.pi) - np.pi
    apart = np.abs(np.where(solver.screws.prismatic, apart, turned)).max(axis=1)
    nearest = np.full(len(targets), np.inf)
    np.minimum.at(nearest, found.target, apart)
    print(
        f"{arm.name:28} {solver.geometry.regime}, {each * 1e6:.2f} us, one alone "
        f"{single * 1e6:.0f} us, missed {int((nearest > 1e-6).sum())} of {len(targets)}, error "
        f"{found.position_error.max() / solver.screws.length:.1e} of the length, "
        f"{found.angle_error.max():.1e} rad"
    )


def singular(arm: Arm, drawn: FloatArray) -> None:
    """Print the share found of targets at and beside an aligned wrist."""
    solver: Solver = Search(arm, FLANGE)
    for beside in (0.0, 1e-9, 1e-7, 1e-5, 1e-3):
        at = drawn.copy()
        at[:, 4] = beside
        targets = tool_in_base(arm, at, FLANGE)
        each = seconds(lambda targets=targets: solver.solve(targets)) / len(targets)  # type: ignore[misc]
        missed = int((solver.solve(targets).count_per_target() == 0).sum())
        print(
            f"{arm.name:28} wrist {beside:.0e} rad from aligned: {each * 1e6:.1f} us, missed "
            f"{missed} of {len(at)}"
        )
    target = tool_in_base(arm, at[0], FLANGE)
    at[0, 4] = 0.0
    took = seconds(lambda: families_of(arm, FLANGE, "pose", target, at[:1]))
    print(f"{arm.name:28} its family: {took * 1e3:.1f} ms")


def main(arguments: Sequence[str] | None = None) -> None:
    """Print every figure."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--targets", type=int, default=TARGETS)
    parser.add_argument("--seed", type=int, default=secrets.randbits(32))
    given = parser.parse_args(arguments)
    print(f"{given.targets} reachable targets an arm, seed {given.seed}")
    random = np.random.default_rng(given.seed)
    cells = {cell["name"]: CellAt(read_cell(cell), 1) for cell in demo.documents("cell")}
    arms = {d["name"]: read_arm(d, cells.__getitem__).arm for d in demo.documents()}
    six = [arms["housing-loader"], arms["lathe-tender"], arms["wash-arm"]]
    six += [random_six(random, Travel(-2.5, 2.5)) for _ in range(3)]
    for arm in [*six, *map(without_travel, six), arms["line-runner"]]:
        search(arm, postures(random, arm, given.targets))
    for arm in six[2:4]:
        beside_scipy(arm, postures(random, arm, BESIDE))
    singular(six[0], postures(random, six[0], given.targets))
    for name in ("seal-setter", "pallet-stacker"):
        arm, typed = arms[name], arms[name].table.rows
        closed_form(arm, postures(random, arm, given.targets))
        rounded = tuple(replace(row, alpha=round(row.alpha, 4)) for row in typed)
        table = Table(arm.table.convention, rounded)
        closed_form(replace(arm, table=table), postures(random, arm, given.targets))


if __name__ == "__main__":
    main()
