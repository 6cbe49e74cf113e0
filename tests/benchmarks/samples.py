"""A million samples of reach, the sampling included, against the plain NumPy chain alone.

    python -m tests.benchmarks.samples [count] [seed]

The chain multiplies one 4 x 4 matrix for each row over all postures at once. Minima of repeats, the
sides taking turns; asked for is 20 times, on one core.
"""

import sys
import time

import numpy as np

from kinematics.arm import Arm
from kinematics.reach.samples import JointSamples, tool_positions
from tests.kinematics.example_arms import arm_of, revolute

REPEATS = 5
ASKED = 20.0


def plain_chain(arm: Arm, joint_values: np.ndarray) -> np.ndarray:
    """Return tool positions of a standard table of revolute rows."""
    poses = np.broadcast_to(np.eye(4), (len(joint_values), 4, 4))
    for row, theta in zip(arm.table.rows, joint_values.T, strict=True):
        link = np.zeros((len(theta), 4, 4))
        cosine, sine = np.cos(theta + row.theta), np.sin(theta + row.theta)
        ca, sa = np.cos(row.alpha), np.sin(row.alpha)
        link[:, 0, 0], link[:, 0, 1], link[:, 0, 2] = cosine, -sine * ca, sine * sa
        link[:, 1, 0], link[:, 1, 1], link[:, 1, 2] = sine, cosine * ca, -cosine * sa
        link[:, 2, 1], link[:, 2, 2], link[:, 3, 3] = sa, ca, 1.0
        link[:, 0, 3], link[:, 1, 3], link[:, 2, 3] = row.a * cosine, row.a * sine, row.d
        poses = poses @ link
    return poses[:, :3, 3]


def main() -> None:
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 1_000_000
    seed = int(sys.argv[2]) if len(sys.argv) > 2 else int(time.time())
    print(f"seed {seed}, {count} postures of six joints")
    rows = [revolute(a=0.1 * k, alpha=0.7, d=0.2) for k in range(6)]
    arm = arm_of(*rows)
    ours, plain = [], []
    tool_positions(JointSamples(arm, 10, seed), np.eye(4), 0, 10)
    for _ in range(REPEATS):
        begin = time.perf_counter()
        samples = JointSamples(arm, count, seed)
        found = tool_positions(samples, np.eye(4), 0, count)
        ours.append(time.perf_counter() - begin)
        joint_values = samples.piece(0, count)
        begin = time.perf_counter()
        expected = plain_chain(arm, joint_values)
        plain.append(time.perf_counter() - begin)
    worst = np.abs(found - expected).max()
    ratio = min(plain) / min(ours)
    print(
        f"samples {min(ours):.3f} s, plain chain {min(plain):.3f} s, worst difference {worst:.1e}"
    )
    print(f"{ratio:.1f} times (asked {ASKED:.0f})")


if __name__ == "__main__":
    main()
