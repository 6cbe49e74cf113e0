"""Spans of a joint to spare, held against self-motions that are followed step by step."""

from dataclasses import replace

import numpy as np
import pytest

from kinematics.chain import tool_in_base
from kinematics.inverse.families import families_of
from kinematics.inverse.redundant import Redundant, redundant_of
from kinematics.inverse.redundant_spans import Span, spans_of
from kinematics.table import Travel
from kinematics.travel_limits import travel_margin
from tests.kinematics.example_arms import AT_FLANGE, SEVEN, arm_of
from tests.kinematics.inverse.redundant_arms import ARMS
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import postures_within_travel


def made(name: str, random: np.random.Generator) -> tuple[Redundant, np.ndarray]:
    arm, tool = ARMS[name](random)
    redundant = redundant_of(arm, tool)
    assert redundant is not None
    return redundant, tool


def followed_once(redundant: Redundant, tool: np.ndarray, target: np.ndarray, span: Span) -> bool:
    """Tell whether the edges of a span are ends of the self-motion through its witness.

    Followed both ways by another method, for arms of which joint 1 is held. A curve that leaves
    travel in between is told there as several intervals: one of them must be this one.
    """
    families = families_of(redundant.arm, tool, "pose", target, span.witness[None])
    if len(families) != 1 or families[0].free_joints[0] != 1:
        return False
    low, high = span.interval[0][0], span.interval[-1][1]
    told = families[0].interval
    return any(abs(low - one) < 1e-6 and abs(high - other) < 1e-6 for one, other in told)


@pytest.mark.parametrize("name", ["shoulder and wrist", "on a track", "turntable under six"])
def test_most_spans_end_where_the_self_motion_through_their_witness_does(name: str) -> None:
    """Not all: a curve that passes the same held values twice has its pieces told as one there."""
    random = fresh()
    redundant, tool = made(name, random)
    postures = postures_within_travel(random, redundant.arm, 6)
    agree = [
        followed_once(redundant, tool, target, span)
        for target in tool_in_base(redundant.arm, postures, tool)
        for span in spans_of(redundant, target)
    ]
    assert len(agree) >= 6
    assert np.mean(agree) >= 0.4


@pytest.mark.parametrize("name", ARMS)
def test_witnesses_are_on_the_target_within_travel_and_within_their_interval(name: str) -> None:
    random = fresh()
    redundant, tool = made(name, random)
    postures = postures_within_travel(random, redundant.arm, 5)
    held = redundant.joint.row
    for target in tool_in_base(redundant.arm, postures, tool):
        spans = spans_of(redundant, target)
        shown = tool_in_base(redundant.arm, np.array([span.witness for span in spans]), tool)
        np.testing.assert_allclose(shown, np.stack([target] * len(spans)), atol=1e-8)
        margins = [float(travel_margin(redundant.arm, span.witness)) for span in spans]
        assert min(margins) >= 0.0
        assert (np.diff(margins) <= 1e-9).all()
        for span in spans:
            value = span.witness[held]
            assert any(low - 1e-9 <= value <= high + 1e-9 for low, high in span.interval)
            assert span.moving[0] == held


@pytest.mark.parametrize("name", ["shoulder and wrist", "coupled"])
def test_outermost_edges_are_those_of_a_fine_scan(name: str) -> None:
    """A hundred values within each step; but for a stretch so narrow that the steps missed it."""
    random = fresh()
    redundant, tool = made(name, random)
    ratio = float(redundant.arm.drive_map.matrix[redundant.joint.row, redundant.joint.row])
    low, high = redundant.joint.values[[0, -1]]
    fine = np.linspace(low, high, 100 * (len(redundant.joint.values) - 1) + 1)[:, None]
    apart, off = (high - low) / (len(fine) - 1), []
    for posture in postures_within_travel(random, redundant.arm, 5):
        target = tool_in_base(redundant.arm, posture, tool)
        intervals = [ends for span in spans_of(redundant, target) for ends in span.interval]
        told = [min(ends[0] for ends in intervals), max(ends[1] for ends in intervals)]
        carried = redundant.joint.locked.targets(np.broadcast_to(target, (len(fine), 4, 4)), fine)
        inner = redundant.joint.locked.solve(carried)
        motions = redundant.joint.locked.whole(inner.motions, fine[inner.target])
        postures = redundant.joint.drive.postures(motions)
        inside = inner.target[postures.source[postures.margin >= 0.0]]
        values = np.sort(fine[[inside.min(), inside.max()], 0] / ratio)
        # Edges lie between the last value within and the next one.
        off += [values[0] - told[0], told[1] - values[1]]
    right = [-1e-8 <= one <= apart + 1e-8 for one in off]
    assert np.mean(right) >= 0.8


def test_a_shoulder_and_wrist_without_travel_swivel_in_eight_families_all_around() -> None:
    """Elbow, shoulder and wrist either way; in half of them joint 1 passes half a turn."""
    arm = arm_of(*SEVEN)
    redundant = redundant_of(arm, AT_FLANGE)
    assert redundant is not None
    target = tool_in_base(arm, np.full(7, 0.4), AT_FLANGE)
    spans = spans_of(redundant, target)
    assert sorted(len(span.interval) for span in spans) == [1] * 4 + [2] * 4
    width = spans[0].interval[0][1] - spans[0].interval[0][0]
    for span in spans:
        assert span.moving == (0, 1, 2, 4, 5, 6)  # the elbow's bend is given by the distance
        widths = sum(high - low for low, high in span.interval)
        np.testing.assert_allclose(widths, width, atol=1e-6)


def test_out_of_travel_there_are_no_spans() -> None:
    random = fresh()
    arm, tool = ARMS["shoulder and wrist"](random)
    rows = list(arm.table.rows)
    rows[3] = replace(rows[3], travel=Travel(-0.2, 0.2))
    redundant = redundant_of(arm_of(*rows), tool)
    assert redundant is not None
    posture = np.array([0.3, 0.4, 0.2, 1.5, 0.1, 0.5, 0.2])
    assert spans_of(redundant, tool_in_base(redundant.arm, posture, tool)) == []
