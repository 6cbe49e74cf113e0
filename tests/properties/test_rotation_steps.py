"""What holds for all turns: every way to say them leads to the same orientation."""

import numpy as np
from hypothesis import given, seed, settings
from hypothesis import strategies as st

from kinematics.rewritten_steps import rewritten
from kinematics.rotation_steps import RotationStep, between, checked_step, turned
from kinematics.rotations import angle_of, rotation_from_vector

EXACT = 1e-12

# Few axes and round angles, so that turns meet, cancel and come to whole turns.
AXES = st.one_of(
    st.sampled_from([(1, 0, 0), (0, 1, 0), (0, 0, 1), (0, 0, -2), (1, 1, 0), (-3, -3, 0)]),
    st.tuples(*[st.floats(-1, 1).map(lambda part: round(part, 3))] * 3).filter(any),
)
ANGLES = st.one_of(
    st.sampled_from([0.0, 30.0, -30.0, 90.0, 180.0, -180.0, 360.0, 720.0]).map(np.deg2rad),
    st.floats(-1000, 1000),
    st.floats(-1e-12, 1e-12),
)


@st.composite
def turns(draw: st.DrawFn) -> RotationStep:
    return checked_step(list(draw(AXES)), float(draw(ANGLES)), about_fixed=draw(st.booleans()))


STEPS = st.lists(turns(), max_size=12)
STARTS = st.one_of(
    st.just(np.eye(3)),
    st.sampled_from([0, 1, 2]).map(lambda axis: rotation_from_vector(np.eye(3)[axis] * np.pi / 2)),
    st.tuples(*[st.floats(-3, 3)] * 3).map(lambda vector: rotation_from_vector(list(vector))),
)
a_fixed_run = settings(max_examples=150, deadline=None, database=None)


@seed(20261204)
@a_fixed_run
@given(start=STARTS, steps=STEPS)
def test_every_way_to_say_turns_leads_to_the_same_orientation(
    start: np.ndarray, steps: list[RotationStep]
) -> None:
    said = rewritten(start, steps)
    goal = turned(start, steps)
    assert len(said.merged) <= len(steps)
    assert len(said.merged) == len(said.all_fixed) == len(said.all_current)
    for made in (said.merged, said.all_fixed, said.all_current):
        np.testing.assert_allclose(turned(start, made), goal, rtol=0, atol=EXACT)


@seed(20261205)
@a_fixed_run
@given(start=STARTS, steps=STEPS)
def test_turns_of_both_kinds_do_not_disturb_each_other(
    start: np.ndarray, steps: list[RotationStep]
) -> None:
    parted = sorted(steps, key=lambda step: step.about_fixed)
    np.testing.assert_allclose(turned(start, parted), turned(start, steps), rtol=0, atol=EXACT)


@seed(20261206)
@a_fixed_run
@given(start=STARTS, steps=STEPS)
def test_one_turn_does_what_all_do(start: np.ndarray, steps: list[RotationStep]) -> None:
    goal = turned(start, steps)
    fixed, current = between(start, goal)
    np.testing.assert_allclose(fixed.rotation @ start, goal, rtol=0, atol=EXACT)
    np.testing.assert_allclose(start @ current.rotation, goal, rtol=0, atol=EXACT)
    assert abs(fixed.angle - current.angle) <= EXACT
    assert abs(float(angle_of(fixed.rotation)) - fixed.angle) <= EXACT
