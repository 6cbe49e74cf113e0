"""Branch and bound: false proofs on poses that arms have been at, proofs of what is out of reach.

    python -m tests.benchmarks.boxes [targets] [seed]

For each kind of arm: of poses within travel how many are wrongly proved out of reach (none may be)
and how many are met; of poses that are turned or moved away, and that a search does not find, how
many are proved within the budget of one target, with how many boxes and microseconds a box.
"""

import sys
import time
from typing import NamedTuple

import numpy as np

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.inverse.branch_and_bound import BranchAndBound
from kinematics.inverse.measured import DIRECTION, POSE, POSITION
from kinematics.inverse.several import Several
from kinematics.inverse.tolerances import BOX_BUDGET
from kinematics.tolerances import TARGET_ANGLE, TARGET_POSITION
from tests.kinematics.example_arms import arm_of, random_pose
from tests.kinematics.reach.arm_classes import _row, postures_within_travel

USUAL, EXACT = np.array([TARGET_POSITION, TARGET_ANGLE]), np.array([1e-9, 1e-9])
FEW_BOXES = 20_000
"""Boxes for poses within travel: most are met with fewer, and a wrong proof would need fewer."""


class Kind(NamedTuple):
    """Joints of an arm, what is asked of it, and by how much targets may be missed."""

    joints: str
    task: str
    tolerance: np.ndarray


KINDS = (
    Kind("RRR", POSITION, USUAL),
    Kind("RRRR", POSE, USUAL),
    Kind("PRRP", POSE, USUAL),
    Kind("RRRR", DIRECTION, USUAL),
    Kind("RRRRR", POSE, USUAL),
    Kind("RRRRR", DIRECTION, USUAL),
    Kind("RRPRRR", POSE, EXACT),
    Kind("RRRRRR", POSE, EXACT),
    Kind("RRRRRRR", POSE, EXACT),
)


def moved_away(random: np.random.Generator, poses: np.ndarray) -> np.ndarray:
    """Return places half way between those of two poses, with the orientation of a third."""
    away = poses.copy()
    away[:, :3, 3] = 0.75 * (poses[:, :3, 3] + np.roll(poses[:, :3, 3], 1, axis=0))
    away[:, :3, :3] = poses[random.permutation(len(poses)), :3, :3]
    return away


def measure(kind: Kind, count: int, seed: int) -> bool:
    """Print the line of a kind; return whether nothing that was met before is proved."""
    random = np.random.default_rng([seed, *f"{kind.joints} {kind.task}".encode()])
    wrong = met = proved = asked = total = 0
    boxes: list[int] = []
    seconds = 0.0
    for _ in range(max(1, count // 20)):
        arm: Arm = arm_of(*[_row(random, joint) for joint in kind.joints])
        tool = random_pose(random)
        by_boxes, search = BranchAndBound(arm, tool, kind.task), Several(arm, tool, kind.task)
        poses = tool_in_base(arm, postures_within_travel(random, arm, 20), tool)
        for pose in poses:
            outcome = by_boxes.ask(pose, kind.tolerance, FEW_BOXES)
            wrong, met, total = (
                wrong + outcome.proved,
                met + (outcome.witness is not None),
                total + 1,
            )
        away = moved_away(random, poses)[:2]
        found = search.solve(away)
        near = found.position_error <= kind.tolerance[0]
        near &= found.angle_error <= kind.tolerance[1]
        for index in np.setdiff1d(np.arange(2), found.target[near]):
            begin = time.perf_counter()
            outcome = by_boxes.ask(away[index], kind.tolerance)
            seconds += time.perf_counter() - begin
            asked, proved = asked + 1, proved + outcome.proved
            boxes.append(outcome.boxes)
    spread = np.quantile(boxes or [0], [0.5, 0.9, 1.0]).astype(int).tolist()
    print(
        f"{kind.joints:8} {kind.task:19} wrongly proved {wrong} of {total}, {met} met; "
        f"away: proved {proved} of {asked}, boxes {spread} (median, 0.9, most), "
        f"{seconds / max(sum(boxes), 1) * 1e6:.2f} us a box",
        flush=True,
    )
    return wrong == 0


def main() -> None:
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 200
    seed = int(sys.argv[2]) if len(sys.argv) > 2 else int(time.time())
    print(f"seed {seed}; budget {BOX_BUDGET} boxes")
    fine = sum(not measure(kind, count, seed) for kind in KINDS) == 0
    print("no false proof" if fine else "THERE IS A FALSE PROOF")


if __name__ == "__main__":
    main()
