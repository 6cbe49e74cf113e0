"""Share of random postures called near or singular, for each arm of the demonstration cell.

Run: python -m tests.benchmarks.singular_share [--postures N] [--seed N]. Random postures fill the
whole travel evenly, which no work does; left out: postures along real paths.
"""

import argparse
from collections.abc import Sequence

import numpy as np

from kinematics.arm import Arm
from kinematics.jacobian import motion_of
from kinematics.singularity import judge
from kinematics.table import FloatArray
from kinematics.task_space import task_space
from kinematics.tolerances import NEAR_SINGULAR
from kinematics.travel_limits import travel_margin
from service import demo
from service.wire.arms import read_arm
from service.wire.cells import CellAt, read_cell

SHARES_OF_BEST = tuple(sorted({0.02, 0.04, 0.08, 0.12, NEAR_SINGULAR}))
POSTURES = 20_000
SEED = 20_251


def random_postures(arm: Arm, count: int, random: np.random.Generator) -> FloatArray:
    """Return postures (count, joints) spread evenly within travel, combined travel too.

    Raises
    ------
    ValueError : a joint without travel, over which nothing can be spread evenly.
    """
    bounds = [arm.table.rows[index].travel for index in arm.drive_map.driven]
    if None in bounds:
        raise ValueError(f"{arm.name} has a joint without travel")
    lower, upper = np.array(bounds, dtype=float).T
    found: list[FloatArray] = []
    while sum(map(len, found)) < count:
        drawn = lower + random.random((count, arm.joint_count)) * (upper - lower)
        found.append(drawn[travel_margin(arm, drawn) >= 0])
    return np.concatenate(found)[:count]


def smallest_values(arm: Arm, postures: FloatArray) -> tuple[FloatArray, float]:
    """Return each posture's smallest scaled singular value with the default tool, and the default
    threshold over NEAR_SINGULAR: the value of the best sample posture."""
    tool_in_flange = arm.tool_in_flange(None)
    space = task_space(arm, tool_in_flange)
    assert space is not None
    smallest = judge(arm, space, motion_of(arm, postures, tool_in_flange)).smallest
    return smallest, space.near / NEAR_SINGULAR


def main(arguments: Sequence[str] | None = None) -> None:
    """Print the table of shares."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--postures", type=int, default=POSTURES)
    parser.add_argument("--seed", type=int, default=SEED)
    given = parser.parse_args(arguments)
    print(f"{given.postures} random postures within travel for each arm, seed {given.seed}")
    print("share called near or singular below each share of the best sample posture's value")
    print(f"the default is {NEAR_SINGULAR}")
    print("  ".join(["arm".ljust(15), *(f"{at:>6}" for at in SHARES_OF_BEST), "median", "sample"]))
    cells = {cell["name"]: CellAt(read_cell(cell), 1) for cell in demo.documents("cell")}
    for document in demo.documents():
        arm = read_arm(document, cells.__getitem__).arm
        random = np.random.default_rng(given.seed)
        smallest, best = smallest_values(arm, random_postures(arm, given.postures, random))
        shares = [f"{(smallest <= at * best).mean():6.1%}" for at in SHARES_OF_BEST]
        values = [f"{np.median(smallest):6.3f}", f"{best:6.3f}"]
        print("  ".join([arm.name.ljust(15), *shares, *values]))


if __name__ == "__main__":
    main()
