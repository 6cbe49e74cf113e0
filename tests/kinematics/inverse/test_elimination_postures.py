"""From the third joint of known motions to all six."""

import numpy as np
import pytest

from kinematics.inverse.elimination_orders import order_of
from kinematics.inverse.elimination_pencil import to_tangents
from kinematics.inverse.elimination_postures import write_postures
from kinematics.inverse.elimination_sides import FADING, KEPT, LEFT, RIGHT, eliminate_sides
from kinematics.inverse.screws import screws_of
from kinematics.transforms import inverse
from tests.kinematics.inverse.general_arms import FAMILIES, sliding
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.inverse.test_elimination_sides import ORDERS, drawn, moved_by, over_length
from tests.kinematics.inverse.triple_sets import tools_at


@pytest.mark.parametrize(("shift", "reverse"), ORDERS)
@pytest.mark.parametrize("slide", [None, 3])
def test_the_other_joints_follow(shift: int, reverse: bool, slide: int | None) -> None:
    rng = fresh()
    made = FAMILIES["general"] if slide is None else sliding(slide)
    order = order_of(screws_of(made(rng), np.eye(4)), shift, reverse)
    if order is None:
        assert slide is not None
        return
    screws, near = order.screws, 0
    arm = order.matrices, order.start, order.still_left, order.still_right, order.fading
    for _ in range(10):
        motions = drawn(order, rng)
        tops, kept = np.empty((1, RIGHT, RIGHT + LEFT)), np.empty((1, KEPT, LEFT + FADING))
        products, powers = np.empty((1, RIGHT), np.int64), np.empty((1, KEPT, LEFT))
        moved = moved_by(order, motions)[None]
        eliminate_sides(*arm, order.slot, moved, products, tops, kept, np.empty(1))
        to_tangents(order.slides, kept[0], powers[0])
        tool = screws.scaled(tools_at(screws, motions[None])) @ inverse(screws.tool_at_zero)
        third, found = order.signs[[2]] * motions[order.positions[[2]]], np.empty((1, 6))
        write_postures(
            screws.axis, screws.prismatic, order.positions, order.signs, np.ascontiguousarray(tool),
            powers, tops, products, third, np.zeros(1, np.int64), found,
        )  # fmt: skip
        off = found[0] - over_length(order, motions)
        off = np.where(screws.prismatic, off, np.angle(np.exp(1j * off)))
        near += bool(np.abs(off).max() < 1e-6)
    assert near >= 8  # beside folds and where products nearly vanish digits are lost
