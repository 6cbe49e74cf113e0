"""Moves against brute force on three demonstration arms, and what they take.

    python -m tests.benchmarks.travels [moves] [seed]

Each move goes straight from one posture within travel to the pose of another, or part of the way
there. Brute force (tests/kinematics/travel/dense.py) knows all solutions at each millimetre, and at
each tenth of a micrometre where it matters. Asked for: the same verdict, breaks within 0.5 mm; 300
mm within 2 ms for one posture. Then how often arms with few or spare joints get along 100 mm, and
what all postures of an approach take.
"""

import sys
import time
from collections import Counter
from collections.abc import Mapping

import numpy as np

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.reach.checks import Reacher
from kinematics.reach.targets import Target
from kinematics.travel.courses import Courses
from kinematics.travel.lines import line_between
from kinematics.travel.moves import (
    BEYOND_TRAVEL,
    BREAKS,
    Approach,
    Course,
    Leg,
    Place,
)
from kinematics.travel.to_targets import approached, back_along
from service import demo
from service.wire.arms import read_arm
from service.wire.cells import CellAt, read_cell
from tests.kinematics.reach.arm_classes import postures_within_travel
from tests.kinematics.travel.dense import ARRIVES, ENDS, LEAVES_TRAVEL, BruteForce

MOVES = 1000
SIX = ("housing-loader", "lathe-tender", "wash-arm")
SHARES = (0.1, 0.3, 1.0)
"""Of the way in joint values to the other posture: short moves arrive more often."""
SPACINGS = (1e-3, 1e-4)
"""Metres (rad) between the places of brute force. Where two branches pass within hundredths of a
radian of each other it may change over at the wider; then it is asked again."""
SAME, CLOSE = 1e-6, 5e-4
TIMED = 200
REPEATS = 5


def demo_arms() -> Mapping[str, Arm]:
    """Return the demonstration arms by name."""
    cells = {cell["name"]: CellAt(read_cell(cell), 1) for cell in demo.documents("cell")}
    return {d["name"]: read_arm(d, cells.__getitem__).arm for d in demo.documents()}


def against_brute_force(random: np.random.Generator, arm: Arm, moves: int) -> bool:
    """Print how moves of an arm compare; return whether all are the same."""
    tool = arm.tool_in_flange(arm.default_tool)
    courses, brute = Courses(Reacher(arm, tool)), BruteForce(arm, tool)
    kinds, different, denser, worst, last = Counter[str](), 0, 0, 0.0, 0.0
    for index, (start, other) in enumerate(
        postures_within_travel(random, arm, 2 * moves).reshape(moves, 2, -1)
    ):
        goal = start + SHARES[index % len(SHARES)] * (other - start)
        poses = tool_in_base(arm, np.stack([start, goal]), tool)
        (way,) = courses.follow(Course(Place(start), (Leg(Place(target=Target(poses[1]))),))).ways
        line = line_between(*poses)
        broken = way.broken
        how = ARRIVES if broken is None else ENDS
        if broken is not None and broken.kind == BEYOND_TRAVEL:
            how = LEAVES_TRAVEL
        share = 1.0 if broken is None else broken.share
        for spacing in SPACINGS:
            dense = brute.follow(line, start, spacing)
            apart = float(np.abs(way.legs[0].end - dense.joint_values).max())
            off = abs(share - dense.share) * max(line.length, line.angle)
            if how == dense.how and off < CLOSE and (broken is not None or apart < SAME):
                break
            denser += spacing == SPACINGS[0]
        kinds["arrives" if broken is None else BREAKS[broken.kind]] += 1
        different += how != dense.how
        if how == dense.how:
            worst = max(worst, off)
        if broken is None:
            last = max(last, apart)
    said = ", ".join(f"{count} {kind}" for kind, count in kinds.most_common())
    print(
        f"{arm.name:16} {moves} moves: {said}; {different} differ from brute force, "
        f"breaks within {worst * 1e6:.2f} um (or urad), joint values at the end within {last:.1e}; "
        f"{denser} took brute force ten times as dense"
    )
    return not different and worst < CLOSE and last < SAME


def timed(random: np.random.Generator, arm: Arm) -> None:
    """Print what 300 mm take from joint values, and what all postures of an approach do."""
    tool = arm.tool_in_flange(arm.default_tool)
    courses = Courses(Reacher(arm, tool))
    took, asked, ends, ways = [], [], Counter[str](), []
    for start in postures_within_travel(random, arm, TIMED):
        target = Target(tool_in_base(arm, start, tool))
        end = back_along(target, Approach(0.3), "retract")
        course = Course(Place(start), (Leg(Place(target=end), speed=0.25),))
        best = np.inf
        for _ in range(REPEATS):
            begin = time.perf_counter()
            followed = courses.follow(course)
            best = min(best, time.perf_counter() - begin)
        took.append(best * 1e3)
        ends["arrives" if followed.broken is None else BREAKS[followed.broken.kind]] += 1
        whole = approached(target, Approach(0.1, speed=0.1))
        begin = time.perf_counter()
        many = courses.follow(whole)
        asked.append((time.perf_counter() - begin) * 1e3)
        ways.append(len(many.ways))
    said = ", ".join(f"{count} {kind}" for kind, count in ends.most_common())
    print(
        f"{arm.name:16} 300 mm: median {np.median(took):.2f} ms, 99 % {np.quantile(took, 0.99):.2f}"
        f", most {max(took):.2f} ({said}); 100 mm approach by all of {np.mean(ways):.1f} postures: "
        f"median {np.median(asked):.2f} ms"
    )


def main() -> None:
    """Print every figure."""
    moves = int(sys.argv[1]) if len(sys.argv) > 1 else MOVES
    seed = int(sys.argv[2]) if len(sys.argv) > 2 else int(time.time())
    print(f"seed {seed}")
    random, arms = np.random.default_rng(seed), demo_arms()
    fine = [against_brute_force(random, arms[name], -(-moves // len(SIX))) for name in SIX]
    print("asked for: same verdict, breaks within 500 um:", "met" if all(fine) else "NOT MET")
    for arm in arms.values():
        timed(random, arm)
    print("asked for: 300 mm for one posture within 2 ms")


if __name__ == "__main__":
    main()
