"""Directions and couplings by hand, and the refusals with where they point."""

import numpy as np
import pytest

from kinematics.chain import tool_in_base
from kinematics.drive_map import DriveMap
from kinematics.errors import InvalidArm, InvalidCoupling, SingularDriveMap
from kinematics.table import Coupling
from kinematics.tolerances import DRIVE_MAP_SINGULAR
from tests.kinematics.example_arms import AT_FLANGE, arm_of, prismatic, revolute

# A parallelogram: the motor of joint 3 turns the forearm against the horizontal, so its row turns
# back by joint 2; and a last row that keeps the hand level, with no motor of its own.
PARALLELOGRAM = (
    revolute(a=0.1),
    revolute(a=0.5),
    revolute(a=0.4, couplings=(Coupling(2, -1.0),)),
    revolute(a=0.2, passive=True, couplings=(Coupling(3, -1.0),)),
)


def test_parallelogram_matrix_by_hand() -> None:
    drive_map = DriveMap(PARALLELOGRAM)
    assert drive_map.matrix.tolist() == [[1, 0, 0], [0, 1, 0], [0, -1, 1], [0, 0, -1]]
    assert drive_map.driven == (0, 1, 2)
    assert drive_map.joint_count == 3


def test_parallelogram_motions_by_hand() -> None:
    motions = DriveMap(PARALLELOGRAM).motions(np.array([0.1, 0.3, 0.7]))
    np.testing.assert_allclose(motions, [0.1, 0.3, 0.4, -0.7], rtol=0.0, atol=1e-16)


@pytest.mark.parametrize("lift", [0.0, 0.4, -1.1])
def test_parallelogram_keeps_forearm_and_hand_where_they_point(lift: float) -> None:
    """In the plane: link 2 turns with joint 2, the forearm with joint 3 alone, the hand stays."""
    pose = tool_in_base(arm_of(*PARALLELOGRAM), np.array([0.0, lift, 0.6]), AT_FLANGE)
    out = 0.1 + 0.5 * np.exp(1j * lift) + 0.4 * np.exp(0.6j) + 0.2
    np.testing.assert_allclose(pose[:2, 3], [out.real, out.imag], rtol=0.0, atol=1e-15)
    np.testing.assert_allclose(pose[:3, :3], np.eye(3), rtol=0.0, atol=1e-15)


def test_direction_does_not_multiply_couplings() -> None:
    rows = (revolute(), revolute(direction=-1, couplings=(Coupling(1, 0.5),)))
    assert DriveMap(rows).matrix.tolist() == [[1, 0], [0.5, -1]]
    reversed_axis = (revolute(direction=-1), rows[1])
    assert DriveMap(reversed_axis).matrix.tolist() == [[-1, 0], [0.5, -1]]


def test_two_rows_may_couple_to_each_other() -> None:
    rows = (
        revolute(couplings=(Coupling(2, 0.25),)),
        revolute(couplings=(Coupling(1, -0.5),)),
    )
    assert DriveMap(rows).matrix.tolist() == [[1, 0.25], [-0.5, 1]]
    assert DriveMap(rows).motions(np.array([2.0, 4.0])).tolist() == [3.0, 3.0]


def test_a_passive_row_in_front_moves_the_numbers_of_the_joints_behind() -> None:
    """Axes are numbers of rows; joint values are given to driven rows in order."""
    rows = (revolute(passive=True, couplings=(Coupling(3, 2.0),)), revolute(), prismatic())
    drive_map = DriveMap(rows)
    assert drive_map.driven == (1, 2)
    assert drive_map.motions(np.array([0.1, 0.3])).tolist() == [0.6, 0.1, 0.3]


def test_a_passive_row_without_couplings_stands_still() -> None:
    assert DriveMap((revolute(), revolute(passive=True))).motions(np.ones(1)).tolist() == [1, 0]


def test_couplings_to_one_axis_add_up() -> None:
    rows = (revolute(), revolute(couplings=(Coupling(1, 0.5), Coupling(1, 0.25))))
    assert DriveMap(rows).matrix.tolist() == [[1, 0], [0.75, 1]]


@pytest.mark.parametrize("batch", [(), (0,), (3,), (2, 3)])
def test_shapes(batch: tuple[int, ...]) -> None:
    assert DriveMap(PARALLELOGRAM).motions(np.zeros((*batch, 3))).shape == (*batch, 4)
    assert DriveMap(()).motions(np.zeros((*batch, 0))).shape == (*batch, 0)
    only_passive = DriveMap((revolute(passive=True),))
    assert only_passive.joint_count == 0
    assert only_passive.motions(np.zeros((*batch, 0))).shape == (*batch, 1)


@pytest.mark.parametrize(
    ("axis", "problem"),
    [
        (2, "row 2 is coupled to itself"),
        (3, "row 2 is coupled to row 3, which is passive"),
        (0, "row 2 is coupled to row 0, which is missing"),
        (5, "row 2 is coupled to row 5, which is missing"),
        (-1, "row 2 is coupled to row -1, which is missing"),
    ],
)
def test_couplings_to_rows_that_cannot_drive(axis: int, problem: str) -> None:
    coupled = revolute(couplings=(Coupling(1, 1.0), Coupling(axis, 1.0)))
    rows = (revolute(), coupled, revolute(passive=True), revolute())
    with pytest.raises(InvalidCoupling) as caught:
        DriveMap(rows)
    assert caught.value.say == problem
    assert caught.value.where == ("rows", 1, "couplings", 1, "axis")
    assert caught.value.value == axis
    assert caught.value.way_out == "couple to a driven row: 1, 4"
    assert isinstance(caught.value, InvalidArm)


def test_a_passive_row_cannot_be_coupled_to_itself() -> None:
    with pytest.raises(InvalidCoupling, match="itself") as caught:
        DriveMap((revolute(passive=True, couplings=(Coupling(1, 1.0),)),))
    assert caught.value.where == ("rows", 0, "couplings", 0, "axis")
    assert caught.value.way_out == "couple to a driven row: there is none"


@pytest.mark.parametrize("off", [0.0, 1e-10, -1e-10])
def test_rows_that_move_only_together_are_refused(off: float) -> None:
    """[[1, 2], [1/2, 1 + off]] has determinant ``off`` and a largest singular value of 2.5."""
    rows = (
        revolute(couplings=(Coupling(2, 2.0),)),
        revolute(couplings=(Coupling(1, 0.5 * (1.0 + off)),)),
    )
    with pytest.raises(SingularDriveMap) as caught:
        DriveMap(rows)
    assert caught.value.where == ("rows",)
    assert np.shape(caught.value.value) == (2, 2)


def test_rows_that_nearly_move_together_are_taken() -> None:
    off = 10.0 * DRIVE_MAP_SINGULAR * 2.5**2
    rows = (
        revolute(couplings=(Coupling(2, 2.0),)),
        revolute(couplings=(Coupling(1, 0.5 * (1.0 + off)),)),
    )
    assert DriveMap(rows).joint_count == 2


def test_only_the_driven_rows_must_move_independently() -> None:
    """A passive row may well repeat what another does."""
    rows = (revolute(), revolute(passive=True, couplings=(Coupling(1, 1.0),)))
    assert DriveMap(rows).matrix.tolist() == [[1], [1]]
