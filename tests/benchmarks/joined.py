"""Arms that two methods share: two slides at each pair of places, and tables as measured.

    python -m tests.benchmarks.joined [targets of a pair] [targets of a size of errors] [seed]

Asked: two slides at each pair 99.9 %; special tables off by 1e-6 to 5e-3, 99.99 %. Every target is
made by the chain from motions drawn anew, so that a solution is known; regular ones must come back.
"""

import sys
import time
from itertools import combinations

import numpy as np

from kinematics.inverse.screws import Screws, screws_of
from kinematics.inverse.six_joints import six_joints_of
from tests.kinematics.inverse.six_rows import drawn_motions, lost, targets_of
from tests.kinematics.inverse.triple_arms import FAMILIES, _rows, arm_of

ARMS = 20
"""Arms of a pair, or of a family at one size of errors."""


def counted(random: np.random.Generator, screws: Screws, count: int) -> np.ndarray:
    """Return targets, motions that did not come back, targets left open, and seconds."""
    solver = six_joints_of(screws)
    assert solver is not None
    motions = drawn_motions(random, screws, count)
    targets = targets_of(screws, motions)
    begin = time.perf_counter()
    found = solver.solve(targets)
    seconds = time.perf_counter() - begin
    return np.array([count, lost(solver, screws, motions).sum(), found.open.sum(), seconds])


def told(name: str, asked: str, counts: np.ndarray) -> None:
    """Print one line."""
    share = 100.0 * (1.0 - counts[1] / counts[0])
    micros = 1e6 * counts[3] / counts[0]
    print(
        f"{name:10} {counts[0]:.0f} targets, {counts[1]:.0f} lost: {share:.4f} % (asked {asked}); "
        f"{counts[2]:.0f} open; {micros:.0f} us",
        flush=True,
    )


def main() -> None:
    """Print both tables."""
    pair, measured = (int(text) for text in (*sys.argv[1:3], "10000", "110000")[:2])
    seed = int(sys.argv[3]) if len(sys.argv) > 3 else int(time.time())
    random = np.random.default_rng(seed)
    print(f"seed {seed}\ntwo slides")
    for slides in combinations(range(6), 2):
        kinds = "".join("P" if row in slides else "R" for row in range(6))
        arms = (screws_of(arm_of(_rows(random), kinds), np.eye(4)) for _ in range(ARMS))
        told(kinds, "99.9", np.sum([counted(random, arm, pair // ARMS) for arm in arms], axis=0))
    print("tables as measured")
    for off in (1e-6, 1e-5, 1e-4, 1e-3, 5e-3):
        counts = np.zeros(4)
        for draw in FAMILIES.values():
            for _ in range(ARMS):
                given = draw(random).table.rows
                rows = np.array([[row.a, row.alpha, row.d, row.theta] for row in given])
                rows += random.uniform(-off, off, rows.shape)
                arm = screws_of(arm_of(rows), np.eye(4))
                counts += counted(random, arm, measured // (ARMS * len(FAMILIES)))
        told(f"{off:g}", "99.99", counts)


if __name__ == "__main__":
    main()
