"""Points that drawings are marked with."""

import numpy as np
import pytest

from kinematics.arm import Arm
from kinematics.envelope.envelope import envelope_of
from kinematics.envelope.plan_marks import (
    arc,
    bearings_faced,
    on_bearings,
    place_in_section,
    plan_centre,
)
from kinematics.envelope.shapes import Turn
from kinematics.table import Convention, JointKind, Row, Table, Travel


def one_link(kind: JointKind) -> Arm:
    rows = (Row(kind, 0.4, 0.0, 0.1, 0.0, travel=Travel(-0.5, 1.0)),)
    return Arm("one", Table(Convention.STANDARD, rows))


def test_an_extreme_stands_at_its_radius_and_height() -> None:
    envelope = envelope_of(one_link(JointKind.REVOLUTE), np.eye(4))
    assert plan_centre(envelope) == pytest.approx([0.0, 0.0])
    for extreme in envelope.extremes:
        assert place_in_section(envelope, extreme) == pytest.approx([0.4, 0.1])


def test_without_an_axis_it_stands_at_its_x_and_z() -> None:
    envelope = envelope_of(one_link(JointKind.PRISMATIC), np.eye(4))
    assert plan_centre(envelope) == pytest.approx([0.0, 0.0])
    heights = [place_in_section(envelope, e)[1] for e in envelope.extremes if e.measure == "z"]
    assert heights == pytest.approx([-0.4, 1.1])


def test_what_is_faced_is_what_is_not_dead() -> None:
    begin, end = bearings_faced(Turn(-1.0, 2.0, 3.0, 2.0, 2 * np.pi - 1.0)) or (0.0, 0.0)
    assert (begin, end) == pytest.approx((-1.0, 2.0))
    assert bearings_faced(Turn(-4.0, 4.0, 2 * np.pi, None, None)) is None


def test_an_arc_runs_on_its_circle_from_end_to_end() -> None:
    points = arc(-1.0, 2.0)
    assert (points**2).sum(axis=1) == pytest.approx(np.ones(len(points)))
    assert points[[0, -1]] == pytest.approx(on_bearings([-1.0, 2.0]))
    assert np.abs(np.diff(points, axis=0)).max() <= 0.05
