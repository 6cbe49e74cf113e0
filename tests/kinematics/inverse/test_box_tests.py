"""Bounds over boxes: held against postures drawn from the boxes, and a bounded fit."""

import numpy as np
import pytest
from scipy.optimize import lsq_linear
from scipy.spatial.transform import Rotation

from kinematics.arm import Arm
from kinematics.inverse.box_tests import (
    bend_of_point,
    bend_of_turn,
    cannot_vanish,
    reaches_of_rows,
    stretch_of,
    turns_of_rows,
    widths_of_rows,
)
from kinematics.inverse.descent_arms import lines_of
from kinematics.inverse.landing import columns_of, land, land_all
from kinematics.inverse.screws import screws_of
from tests.kinematics.example_arms import random_arm, random_pose
from tests.kinematics.inverse.seeds import fresh

_DRAWN = 300


class _Boxed:
    """A box of an arm's row motions, what bounds say of it, and postures drawn from it."""

    def __init__(self, random: np.random.Generator, arm: Arm, wide: float) -> None:
        lines = lines_of(screws_of(arm, random_pose(random)), arm)
        rows, joints = lines.drive.shape
        half = wide * random.uniform(0.0, 1.0, joints)
        middle = random.uniform(-np.pi, np.pi, joints)
        self.widths, self.axis, point = np.empty(rows), np.empty((rows, 3)), np.empty((rows, 3))
        self.prismatic, self.pose, jacobian = lines.prismatic, np.eye(4), np.empty((6, rows))
        widths_of_rows(lines.drive, half, self.widths)
        of_arm = lines.axis, lines.point, lines.prismatic, lines.tool_at_zero
        land(*of_arm, lines.drive @ middle, self.axis, point, self.pose)
        columns_of(self.axis, point, lines.prismatic, self.pose, jacobian)
        far, self.reaches, self.turns = np.full(rows, 1e9), np.empty(rows), np.empty(rows)
        placed = self.axis, point, self.prismatic, self.pose, self.widths, far, self.reaches
        self.way = reaches_of_rows(*placed)
        self.turn_of_z = turns_of_rows(
            self.axis, self.prismatic, self.pose, self.widths, self.turns
        )
        # Corners bend most, the inside must hold as well.
        shares = random.uniform(-1.0, 1.0, (_DRAWN, joints))
        shares[::2] = np.sign(shares[::2])
        moved = shares * half @ lines.drive.T
        self.poses = np.empty((_DRAWN, 4, 4))
        land_all(*of_arm, np.ascontiguousarray(lines.drive @ middle + moved), self.poses)
        self.first_order = moved @ jacobian.T

    @property
    def shift(self) -> np.ndarray:
        return self.poses[:, :3, 3] - self.pose[:3, 3]

    @property
    def turned(self) -> np.ndarray:
        return Rotation.from_matrix(self.poses[:, :3, :3] @ self.pose[:3, :3].T).as_rotvec()


def _boxes(count: int, wide: float) -> list[_Boxed]:
    random = fresh()
    made = []
    for _ in range(count):
        arm = random_arm(random, int(random.integers(2, 8)), coupled=True)
        made.append(_Boxed(random, arm, wide))
    return made


@pytest.mark.parametrize("wide", [0.02, 0.3, 2.0])
def test_a_point_goes_no_further_than_said(wide: float) -> None:
    tightest = 0.0
    for boxed in _boxes(30, wide):
        far = np.linalg.norm(boxed.shift, axis=1)
        assert far.max() <= boxed.way * (1.0 + 1e-9)
        tightest = max(tightest, far.max() / boxed.way)
    assert tightest > 0.4, "a bound that no posture comes near to would prove little"


@pytest.mark.parametrize("wide", [0.02, 0.3, 1.0])
def test_a_point_leaves_its_tangent_no_further_than_said(wide: float) -> None:
    tightest = 0.0
    for boxed in _boxes(30, wide):
        bend = bend_of_point(boxed.prismatic, boxed.widths, boxed.reaches)
        off = np.linalg.norm(boxed.shift - boxed.first_order[:, :3], axis=1)
        assert off.max() <= bend * (1.0 + 1e-9) + 1e-14
        tightest = max(tightest, off.max() / max(bend, 1e-12))
    assert tightest > 0.2


@pytest.mark.parametrize("wide", [0.02, 0.3, 1.0])
def test_tool_z_turns_no_further_than_said(wide: float) -> None:
    for boxed in _boxes(30, wide):
        z, now = boxed.poses[:, :3, 2], boxed.pose[:3, 2]
        angle = np.arctan2(np.linalg.norm(np.cross(z, now), axis=1), z @ now)
        assert angle.max() <= boxed.turn_of_z * (1.0 + 1e-9) + 1e-7
        bend = bend_of_point(boxed.prismatic, boxed.widths, boxed.turns)
        off = np.linalg.norm(z - now - np.cross(boxed.first_order[:, 3:], now), axis=1)
        assert off.max() <= bend * (1.0 + 1e-9) + 1e-14


@pytest.mark.parametrize("wide", [0.02, 0.1, 0.25])
def test_a_turn_leaves_that_of_the_jacobian_no_further_than_said(wide: float) -> None:
    seen, tightest = 0, 0.0
    for boxed in _boxes(40, wide):
        turned = boxed.widths[~boxed.prismatic].sum()
        if turned < 1.5:
            bend = bend_of_turn(boxed.axis, boxed.prismatic, boxed.widths)
            off = np.linalg.norm(boxed.turned - boxed.first_order[:, 3:], axis=1)
            assert off.max() <= bend * stretch_of(turned) * (1.0 + 1e-9) + 1e-12
            seen, tightest = seen + 1, max(tightest, off.max() / max(bend, 1e-12))
    assert seen >= 20
    assert tightest > 0.3


def test_what_motions_can_close_is_never_called_impossible() -> None:
    random = fresh()
    for _ in range(400):
        rows, joints = int(random.integers(6, 8)), int(random.integers(1, 9))
        columns, half = random.normal(size=(rows, joints)), random.uniform(0.0, 2.0, joints)
        rest = np.zeros(rows)
        for part in (slice(0, 3), slice(3, 6)):
            ball = random.normal(size=3)
            rest[part] = ball / np.linalg.norm(ball) * random.uniform(0.9, 1.0)
        gap = columns @ (half * np.sign(random.normal(size=joints))) + rest
        assert not cannot_vanish(columns, gap, half, np.empty(rows), np.empty(joints))


def test_what_is_called_impossible_is_far_for_a_bounded_fit() -> None:
    """Where both parts stay within 1 a fit leaves less than the root of 2."""
    random, proved, far = fresh(), 0, 0
    for _ in range(300):
        joints = int(random.integers(2, 8))
        columns, half = random.normal(size=(6, joints)), random.uniform(0.1, 1.0, joints)
        gap = random.normal(size=6) * random.uniform(0.5, 4.0)
        fitted = lsq_linear(columns, gap, (-half, half), tol=1e-12)
        least = float(np.linalg.norm(columns @ fitted.x - gap))
        is_proved = cannot_vanish(columns, gap, half, np.empty(6), np.empty(joints))
        assert not is_proved or least > 1.0
        proved, far = proved + is_proved, far + (least > 1.5)
    assert proved >= 0.9 * far > 50, "and hardly anything that is far is missed"


def test_a_row_that_must_be_closed_altogether() -> None:
    """A bounded sum is the seventh row: missed by a hair is missed."""
    columns, gap = np.zeros((7, 2)), np.zeros(7)
    columns[6], gap[6] = [1.0, 1.0], 3.0
    for wide, expected in ((1.4, True), (1.6, False)):
        half = np.full(2, wide)
        assert cannot_vanish(columns, gap * 10.0, half * 10.0, np.empty(7), np.empty(2)) == expected
