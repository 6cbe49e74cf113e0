"""Whole turns within travel: products of lists, lattices of coupled rows, edges, too many turns."""

import itertools

import numpy as np
import pytest

from kinematics.arm import Arm
from kinematics.inverse.drive import CLIPPED, INSIDE, WORKING, Drive, drive_of
from kinematics.table import Coupling, Travel
from tests.kinematics.example_arms import arm_of, prismatic, revolute

TURN = 2.0 * np.pi


def one(low: float, high: float, **more: object) -> Drive:
    return Drive(arm_of(revolute(a=0.4, travel=Travel(low, high), **more)))


def values_of(drive: Drive, *motion: float) -> list[list[float]]:
    found: list[list[float]] = drive.postures(np.array([motion])).joint_values.round(9).tolist()
    return found


def test_both_ends_of_a_turn_are_told() -> None:
    assert values_of(one(-np.pi, np.pi), np.pi) == [[round(-np.pi, 9)], [round(np.pi, 9)]]


def test_a_joint_without_travel_is_told_once_within_a_turn() -> None:
    drive = Drive(arm_of(revolute(a=0.4)))
    assert values_of(drive, np.pi) == values_of(drive, -np.pi) == [[round(np.pi, 9)]]
    assert values_of(drive, 4.0) == [[round(4.0 - TURN, 9)]]


def test_a_joint_against_its_row() -> None:
    assert values_of(one(0.0, 3.0, direction=-1), -2.0) == [[2.0]]


def test_two_turns_of_two_joints_are_all_their_pairs() -> None:
    row = revolute(a=0.4, travel=Travel(-TURN, TURN))
    found = values_of(Drive(arm_of(row, row)), 1.0, -2.0)
    expected = itertools.product([1.0, 1.0 - TURN], [-2.0, TURN - 2.0])
    assert sorted(found) == sorted([round(a, 9), round(b, 9)] for a, b in expected)


def test_a_value_just_beyond_its_limit_is_put_onto_it() -> None:
    postures = one(-1.0, 1.0).postures(np.array([[1.0 + 5e-8], [1.0 + 2e-7]]))
    assert 1.0 - 1e-15 <= postures.joint_values[0, 0] <= 1.0
    assert postures.flags.tolist() == [INSIDE | CLIPPED, 0]
    assert postures.seen.tolist() == [1, 0]


def test_what_is_beyond_travel_exceeds_it_as_little_as_it_can() -> None:
    postures = one(2.0, 3.0).postures(np.array([[-3.0]]))
    np.testing.assert_allclose(postures.joint_values, [[TURN - 3.0]])
    np.testing.assert_allclose(postures.margin, [3.0 - (TURN - 3.0)])


def test_working_travel_is_a_flag_and_no_limit() -> None:
    drive = one(-3.0, 3.0, working_travel=Travel(-1.0, 1.0))
    assert drive.postures(np.array([[0.5], [2.0]])).flags.tolist() == [INSIDE, INSIDE | WORKING]


def lattice_by_hand(arm: Arm, motions: np.ndarray) -> list[list[float]]:
    """Return all joint values within travel, by trying many whole turns of every row."""
    square = arm.drive_map.matrix[list(arm.drive_map.driven)]
    found = []
    travels = [arm.table.rows[row].travel for row in arm.drive_map.driven]
    for turns in itertools.product(range(-6, 7), repeat=len(square)):
        values = np.linalg.solve(square, motions + TURN * np.array(turns))
        bounded = zip(values, travels, strict=True)
        within = [bounds is not None and bounds.lower <= q <= bounds.upper for q, bounds in bounded]
        if all(within):
            found.append(values.round(6).tolist())
    return sorted(found)


@pytest.mark.parametrize("ratio", [1.0, -1.0, 0.5, -1.5])
def test_coupled_rows_give_the_points_of_a_lattice(ratio: float) -> None:
    rows = (
        revolute(a=0.4, travel=Travel(-5.0, 4.0)),
        revolute(a=0.3, travel=Travel(-7.0, 6.0), couplings=(Coupling(1, ratio),)),
        revolute(a=0.3, travel=Travel(-2.0, 5.0), couplings=(Coupling(2, -ratio),)),
    )
    arm = arm_of(*rows)
    motions = np.array([0.3, -1.1, 2.2])
    found = drive_of(arm).postures(motions[None]).joint_values.round(6).tolist()
    assert sorted(found) == lattice_by_hand(arm, motions)
    assert len(found) >= 2


def test_a_passive_row_must_move_as_wanted() -> None:
    """A ratio of 0.5 turns it half around for a whole turn of its joint."""
    rows = (
        revolute(a=0.4, travel=Travel(-7.0, 7.0)),
        revolute(a=0.3, passive=True, couplings=(Coupling(1, 0.5),)),
    )
    drive = Drive(arm_of(*rows))
    assert values_of(drive, 1.0, 0.5) == [[1.0]]
    assert values_of(drive, 1.0, 0.5 - np.pi) == [[round(1.0 - TURN, 9)]]
    assert values_of(drive, 1.0, 0.7) == []


def test_a_slide_has_no_whole_turns() -> None:
    drive = Drive(arm_of(prismatic(travel=Travel(-20.0, 20.0)), prismatic()))
    assert values_of(drive, 7.0, 9.0) == [[7.0, 9.0]]


def test_too_many_turns_are_cut_to_those_in_the_middle_or_near() -> None:
    wide = revolute(a=0.4, travel=Travel(-1000.0, 1000.0))
    drive = Drive(arm_of(wide, wide))
    middle = drive.postures(np.array([[1.0, 1.0]]))
    assert middle.seen[0] == -len(middle.joint_values) - 1
    assert np.abs(middle.joint_values).max() < 60.0
    near = drive.postures(np.array([[1.0, 1.0]]), near=np.array([900.0, -900.0]))
    assert np.abs(near.joint_values - [900.0, -900.0]).max() < 60.0
    assert np.abs(near.joint_values - [900.0, -900.0]).min() < np.pi


def test_many_motions_keep_their_order() -> None:
    drive = one(-8.0, 8.0)
    motions = np.linspace(-3.0, 3.0, 50)[:, None]
    postures = drive.postures(motions)
    assert (np.diff(postures.source) >= 0).all()
    for index in range(50):
        alone = drive.postures(motions[index : index + 1]).joint_values
        np.testing.assert_array_equal(postures.joint_values[postures.source == index], alone)


def test_no_motions_give_no_postures() -> None:
    assert len(one(-1.0, 1.0).postures(np.empty((0, 1))).joint_values) == 0


def test_a_still_joint_is_not_turned() -> None:
    drive = one(-8.0, 8.0)
    still = drive.postures(np.array([[1.0]]), still=np.array([True]))
    assert still.joint_values.tolist() == [[1.0]]
