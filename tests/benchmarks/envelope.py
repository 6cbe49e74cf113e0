"""Envelopes of the demonstration arms: how long they take, how true their bounds are.

    python -m tests.benchmarks.envelope [samples] [seed]

Each arm with each of its tools: processor time of an answer for travel and for working travel, the
shares by which areas and volume may be off, and by how much they are off a grid eight times as
fine. Beside that brute force, which knows nothing of the method: squares of a grid that random
postures hit, as a share of the section told. It falls short where postures seldom go, at the
boundary, and no square that it hits may be farther than the bound outside.
"""

import sys
import time

import numpy as np

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.envelope.envelope import envelope_of
from kinematics.envelope.shapes import Envelope
from kinematics.number_checks import FloatArray
from kinematics.reach.travel_region import travel_region
from tests.benchmarks.travels import demo_arms

SAMPLES, SEED, PIECE, SQUARES = 20_000_000, 5, 4096, 256


def hit(envelope: Envelope, arm: Arm, tool: FloatArray, samples: int, seed: int) -> float:
    """Return the area of the squares that random postures hit, as a share of the section's."""
    random, region = np.random.default_rng(seed), travel_region(arm)
    box = envelope.section.box
    step = float((box[1] - box[0]).max()) / SQUARES
    marks = np.zeros((SQUARES + 3, SQUARES + 3), dtype=bool)
    for _ in range(samples // PIECE):
        drawn = random.uniform(region.lower, region.upper, (PIECE, arm.joint_count))
        drawn = drawn[region.holds(drawn)]
        positions = tool_in_base(arm, drawn, tool)[:, :3, 3]
        places = positions @ envelope.section.directions.T
        if envelope.axis is not None:
            places = envelope.axis.radius_and_height(positions)
        index = ((places - box[0]) / step + 1.0).astype(int)
        marks[np.clip(index[:, 0], 0, SQUARES + 2), np.clip(index[:, 1], 0, SQUARES + 2)] = True
    return float(marks.sum()) * step * step / envelope.section.area.value


def main(samples: int, seed: int) -> None:
    """Print a line for each arm and tool."""
    print("arm, tool | s travel, working | bounds: section, plan, volume | off a finer grid | hit")
    for name, arm in demo_arms().items():
        for tool_name in arm.tools:
            tool = arm.tool_in_flange(tool_name)
            seconds, told = [], []
            for working in (False, True):
                start = time.process_time()
                told.append(envelope_of(arm, tool, working=working))
                seconds.append(time.process_time() - start)
            envelope = told[0]
            measures = envelope.section.area, envelope.plan.area, envelope.volume
            bounds = [one.error_bound / max(one.value, 1e-300) for one in measures]
            off = []
            if not envelope.section.exact and envelope.section.resolution:
                finer = envelope_of(arm, tool, resolution=envelope.section.resolution / 8.0)
                for one, other in zip(
                    measures, (finer.section.area, finer.plan.area, finer.volume), strict=True
                ):
                    off.append(abs(one.value - other.value) / one.value)
            share = hit(envelope, arm, tool, samples, seed)
            print(
                f"{name}, {tool_name} | {seconds[0]:.2f} {seconds[1]:.2f} |",
                *(f"{bound:.1e}" for bound in bounds),
                "|",
                *(f"{part:.1e}" for part in off),
                f"| {share:.4f}",
                flush=True,
            )


if __name__ == "__main__":
    given = [int(value) for value in sys.argv[1:]]
    main(*(given + [SAMPLES, SEED][len(given) :]))
