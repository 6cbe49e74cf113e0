"""The drive map read backwards: what it keeps of an arm (postures: kernels/test_whole_turns.py)."""

import numpy as np

from kinematics.inverse.drive import Drive, drive_of
from kinematics.table import Coupling, Travel
from kinematics.travel_limits import beyond_travel, travel_margin
from tests.kinematics.example_arms import arm_of, prismatic, random_arm, revolute
from tests.kinematics.inverse.seeds import fresh


def test_boxes_are_travel_one_turn_or_endless() -> None:
    drive = Drive(arm_of(revolute(travel=Travel(-1.0, 3.0)), revolute(), prismatic()))
    assert drive.box.tolist() == [[-1.0, -np.pi, -np.inf], [3.0, np.pi, np.inf]]
    assert drive.spans.tolist() == [4.0, 2.0 * np.pi, 1.0]
    assert drive.middle_of_travel.tolist() == [1.0, 0.0, 0.0]


def test_an_arm_has_one_drive() -> None:
    arm = arm_of(revolute())
    assert drive_of(arm) is drive_of(arm)


def test_postures_make_the_motions_whatever_the_couplings() -> None:
    random = fresh()
    for _ in range(20):
        arm = random_arm(random, 5, coupled=True, passive=1)
        drive = Drive(arm)
        values = random.uniform(-1.0, 1.0, size=(10, 5))
        motions = arm.drive_map.motions(values)
        postures = drive.postures(motions)
        made = arm.drive_map.motions(postures.joint_values)
        off = made - motions[postures.source]
        turning = arm.table.chain.revolute
        off[:, turning] -= 2.0 * np.pi * np.round(off[:, turning] / (2.0 * np.pi))
        np.testing.assert_allclose(off, 0.0, atol=1e-9)
        assert set(postures.source.tolist()) == set(range(10))


def test_margins_are_those_of_travel() -> None:
    rows = (
        revolute(a=0.4, travel=Travel(-2.0, 4.0)),
        revolute(a=0.3, travel=Travel(-5.0, 4.0), couplings=(Coupling(1, -1.0),)),
    )
    arm = arm_of(*rows)
    postures = drive_of(arm).postures(fresh().uniform(-3.0, 3.0, size=(50, 2)))
    np.testing.assert_allclose(postures.margin, travel_margin(arm, postures.joint_values))


def test_a_posture_at_a_limit_is_within_travel_after_degrees_and_back() -> None:
    limits = np.radians(np.arange(-359.0, 360.0, 7.0))
    for limit in limits.tolist():
        arm = arm_of(revolute(a=0.4, travel=Travel(min(limit, 0.0), max(limit, 0.0))))
        # As a closed form gives it, wrapped, and a rounding beyond.
        motion = (limit + np.pi) % (2 * np.pi) - np.pi + np.sign(limit) * 1e-15
        postures = Drive(arm).postures(np.array([[motion]]))
        at = np.abs(postures.joint_values - limit).argmin()
        back = np.radians(np.degrees(postures.joint_values[at]))
        assert abs(back[0] - limit) < 1e-14
        assert not beyond_travel(arm, back)
