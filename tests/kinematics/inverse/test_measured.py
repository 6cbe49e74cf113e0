"""Errors of motions by what is asked, against the chain of the arm itself."""

import numpy as np

from kinematics.chain import tool_in_base
from kinematics.inverse.measured import DIRECTION, POSE, POSITION, errors_of, wrapped
from kinematics.inverse.screws import screws_of
from kinematics.rotations import rotation_about
from tests.kinematics.example_arms import AT_FLANGE, random_arm, random_joint_values
from tests.kinematics.inverse.seeds import fresh


def test_errors_are_those_of_the_chain() -> None:
    random = fresh()
    arm = random_arm(random, 4)
    screws, values = screws_of(arm, AT_FLANGE), random_joint_values(random, arm, 6)
    targets = tool_in_base(arm, values, AT_FLANGE)
    axis = np.array([0.3, -0.4, 0.5])
    targets[:, :3, :3] = targets[:, :3, :3] @ rotation_about(axis, 0.3)
    targets[:, :3, 3] += [0.03, 0.04, 0.0]
    motions, each = arm.drive_map.motions(values), np.arange(6)
    for task, turned in ((POSE, 0.3), (POSITION, 0.0)):
        position, angle = errors_of(screws, motions, targets, each, task)
        np.testing.assert_allclose(position, 0.05, atol=1e-12)
        np.testing.assert_allclose(angle, turned, atol=1e-12)
    _, angle = errors_of(screws, motions, targets, each, DIRECTION)
    tilt = np.arccos(rotation_about(axis, 0.3)[2, 2])
    np.testing.assert_allclose(angle, tilt, atol=1e-9)


def test_turns_are_wrapped_and_slides_are_not() -> None:
    motions = np.array([[np.pi, -np.pi, 7.0, 7.0]])
    expected = [[np.pi, np.pi, 7.0 - 2.0 * np.pi, 7.0]]
    np.testing.assert_allclose(wrapped(motions, np.array([False, False, False, True])), expected)
