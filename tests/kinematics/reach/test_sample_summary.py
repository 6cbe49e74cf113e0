"""Summaries: extremes of the whole from pieces in any order, and shares of states."""

import numpy as np

from kinematics.jacobian import motion_of
from kinematics.reach.sample_summary import first_axis, states_of, summary_of
from kinematics.reach.samples import JointSamples
from kinematics.singularity import judge
from kinematics.task_space import task_space
from tests.kinematics.example_arms import arm_of, prismatic, revolute


def test_pieces_in_any_order_say_what_the_whole_says() -> None:
    arm = arm_of(revolute(a=0.4, d=0.2))
    positions = np.random.default_rng(4).integers(-9, 9, (600, 3)) / 10.0  # with many ties
    axis = first_axis(arm)
    whole = summary_of(positions, axis, 0)
    pieces = [summary_of(positions[at : at + 100], axis, at) for at in range(0, 600, 100)]
    merged = pieces[3]
    for place in (5, 0, 2, 4, 1):
        merged = merged.merged(pieces[place])
    for name in ("least", "greatest", "least_at", "greatest_at"):
        np.testing.assert_array_equal(getattr(merged, name), getattr(whole, name))
    radius = np.hypot(positions[:, 0], positions[:, 1])
    np.testing.assert_allclose(whole.greatest[3], radius.max(), atol=1e-15)
    np.testing.assert_array_equal(whole.least[:3], positions.min(axis=0))


def test_nothing_turns_about_an_axis_that_slides() -> None:
    assert first_axis(arm_of(prismatic())) is None
    assert np.isnan(summary_of(np.ones((2, 3)), None, 0).least[3:]).all()


def test_states_are_counted_as_they_are_judged() -> None:
    arm = arm_of(revolute(a=0.4), revolute(a=0.3))
    samples, tool = JointSamples(arm, 6000, 2), np.eye(4)
    space = task_space(arm, tool)
    assert space is not None
    states = judge(arm, space, motion_of(arm, samples.piece(0, 6000), tool)).state
    expected = (int((states == 1).sum()), int((states == 2).sum()))
    assert states_of(samples, space, tool, 0, 6000) == expected
    assert 0 < expected[0] < 6000
