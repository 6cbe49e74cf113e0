"""What postures cost as their number and the number of joints grow: time and memory.

`python -m tests.benchmarks.cost [PICTURE.svg]` prints two tables and draws them. Postures are
worked on in pieces, as the service does; memory is the most that numpy holds at a time beside the
postures themselves, seen by tracemalloc in a run of its own.
"""

import sys
import tracemalloc
from collections.abc import Callable, Sequence
from pathlib import Path
from statistics import median
from time import perf_counter

import numpy as np

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.jacobian import motion_of
from kinematics.singularity import judge
from kinematics.table import Convention, FloatArray, JointKind, Row, Table
from kinematics.task_space import task_space
from tests.benchmarks.picture import Chart, picture

COUNTS = (1, 10, 100, 1000, 10_000, 100_000, 1_000_000)
JOINTS = (1, 2, 3, 6, 7, 12, 32)
SIX, MANY = 6, 10_000
PIECE = 4096
TURNS = 3
SEED = 20_261_201
TOOL = np.eye(4)
TOOL[2, 3] = 0.15

Work = Callable[[FloatArray], object]
Costs = dict[str, list[tuple[float, float]]]
"""Seconds and MiB of each work, one pair for each step."""


def arm_of(joints: int) -> Arm:
    """Return an arm whose axes turn by quarters, made up for every number of joints."""
    rows = tuple(
        Row(JointKind.REVOLUTE, 0.1 + 0.05 * (index % 3), (-1) ** index * np.pi / 2, 0.2, 0.0)
        for index in range(joints)
    )
    return Arm("measured", Table(Convention.STANDARD, rows))


def works(arm: Arm) -> dict[str, Work]:
    """Return what is measured, by its column."""
    space = task_space(arm, TOOL)
    assert space is not None

    def poses(values: FloatArray) -> object:
        return tool_in_base(arm, values, TOOL)

    def jacobians(values: FloatArray) -> object:
        return motion_of(arm, values, TOOL)

    def judgements(values: FloatArray) -> object:
        return judge(arm, space, motion_of(arm, values, TOOL))

    return {"pose": poses, "and Jacobian": jacobians, "and singularity": judgements}


def in_pieces(work: Work, values: FloatArray) -> None:
    """Work through all postures, letting go of each piece before the next."""
    for begin in range(0, len(values), PIECE):
        work(values[begin : begin + PIECE])


def seconds(work: Work, values: FloatArray) -> float:
    """Return the time of one pass, the median of some; short ones are repeated."""
    times = max(1, 2000 // len(values))
    taken = []
    for _ in range(TURNS):
        started = perf_counter()
        for _ in range(times):
            in_pieces(work, values)
        taken.append((perf_counter() - started) / times)
    return median(taken)


def mebibytes(work: Work, values: FloatArray) -> float:
    """Return the most memory held at a time."""
    tracemalloc.start()
    in_pieces(work, values)
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    return peak / 2**20


def measured(arms: Sequence[Arm], values: Sequence[FloatArray]) -> Costs:
    """Return seconds and MiB of each work, for each arm with its postures."""
    found: Costs = {}
    for arm, postures in zip(arms, values, strict=True):
        for name, work in works(arm).items():
            work(postures[:1])
            cost = seconds(work, postures), mebibytes(work, postures)
            found.setdefault(name, []).append(cost)
    return found


def table(title: str, steps: Sequence[int], counts: Sequence[int], found: Costs) -> str:
    """Return a Markdown table: microseconds a posture and MiB."""
    lines = [f"| {title} | {' | '.join(f'{name}: us a posture, MiB' for name in found)} |"]
    lines.append("|---" * (len(found) + 1) + "|")
    for place, step in enumerate(steps):
        costs = [of[place] for of in found.values()]
        cells = [f"{1e6 * time / counts[place]:.3g}, {memory:.2g}" for time, memory in costs]
        lines.append(f"| {step} | {' | '.join(cells)} |")
    return "\n".join(lines)


def charts(by_count: Costs, by_joints: Costs) -> list[Chart]:
    """Return what the tables say as charts."""
    of_postures, of_joints = f"postures, {SIX} joints", f"joints, {MANY} postures"
    each = {
        name: [1e6 * time / count for (time, _), count in zip(costs, COUNTS, strict=True)]
        for name, costs in by_count.items()
    }
    wider = {name: [1e6 * time / MANY for time, _ in costs] for name, costs in by_joints.items()}
    held = {name: [memory for _, memory in costs] for name, costs in by_count.items()}
    return [
        Chart("us a posture", of_postures, COUNTS, each),
        Chart("us a posture", of_joints, JOINTS, wider),
        Chart("MiB held", of_postures, COUNTS, held),
    ]


def main() -> None:
    """Print both tables and draw them."""
    random = np.random.default_rng(SEED)
    by_count = measured(
        [arm_of(SIX)] * len(COUNTS), [random.uniform(-3.0, 3.0, (n, SIX)) for n in COUNTS]
    )
    by_joints = measured(
        [arm_of(n) for n in JOINTS], [random.uniform(-3.0, 3.0, (MANY, n)) for n in JOINTS]
    )
    print(table(f"postures, {SIX} joints", COUNTS, COUNTS, by_count), end="\n\n")
    print(table(f"joints, {MANY} postures", JOINTS, [MANY] * len(JOINTS), by_joints), end="\n\n")
    path = Path(sys.argv[1] if len(sys.argv) > 1 else "cost.svg")
    path.write_text(picture(charts(by_count, by_joints)), encoding="utf-8")
    print(f"drawn in {path}")


if __name__ == "__main__":
    main()
