"""Wrist centres of tables read by hand, and the reasons of those that have none."""

import numpy as np
import pytest

from kinematics.chain import walk
from kinematics.envelope.wrist import wrist_in_flange
from kinematics.errors import KinematicsError
from tests.kinematics.example_arms import (
    QUARTER,
    SELECTIVE,
    SIX,
    arm_of,
    prismatic,
    random_joint_values,
    revolute,
)


def test_it_stands_still_when_the_wrist_turns() -> None:
    arm = arm_of(*SIX)
    wrist = wrist_in_flange(arm)
    np.testing.assert_allclose(wrist[:3, 3], [0.0, 0.0, -0.09], atol=1e-15)
    joint_values = random_joint_values(np.random.default_rng(2), arm, 5)
    joint_values[:, :3] = joint_values[0, :3]
    places = (walk(arm, joint_values).flange_in_base @ wrist)[:, :3, 3]
    np.testing.assert_allclose(places, np.broadcast_to(places[0], (5, 3)), atol=1e-14)


def test_two_axes_make_the_wrist_of_a_smaller_arm() -> None:
    rows = (revolute(alpha=QUARTER), revolute(a=0.4), revolute(alpha=QUARTER), revolute(d=0.2))
    wrist = wrist_in_flange(arm_of(*rows))
    np.testing.assert_allclose(wrist[:3, 3], [0.0, 0.0, -0.2], atol=1e-15)


NONE = {
    "slides": (*SIX[:5], prismatic()),
    "parallel": SELECTIVE[:2] * 2,
    "off": (*SIX[:4], revolute(a=0.1, alpha=QUARTER), revolute()),
    "leave no wrist": (revolute(), revolute(alpha=QUARTER)),
}


@pytest.mark.parametrize("why", NONE)
def test_what_has_none_says_why(why: str) -> None:
    with pytest.raises(KinematicsError, match=why) as refused:
        wrist_in_flange(arm_of(*NONE[why]))
    assert refused.value.where == ("point",)
    assert refused.value.way_out == "ask for the tool point"
