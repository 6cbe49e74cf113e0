"""Both sides of the loop agree wherever the joints stand, and nothing is left of the right one."""

import numpy as np
import pytest

from kinematics.inverse.elimination_orders import Order, order_of
from kinematics.inverse.elimination_sides import (
    AFTER_FIRST,
    AFTER_SECOND,
    BEFORE_FIRST,
    FADING,
    KEPT,
    LEFT,
    RIGHT,
    eliminate_sides,
    write_sides,
)
from kinematics.inverse.line_forms import FORM
from kinematics.inverse.screws import screws_of
from kinematics.transforms import inverse
from tests.kinematics.inverse.general_arms import FAMILIES, sliding
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.inverse.triple_sets import tools_at

ORDERS = [(shift, reverse) for shift in range(6) for reverse in (False, True)]


def terms(order: Order, motions: np.ndarray) -> np.ndarray:
    """Return 1, cos, sin (1, v, v^2) of each joint, (6, 3), by position."""
    unknown = order.signs * over_length(order, motions)[order.positions]
    turning = np.stack([np.ones(6), np.cos(unknown), np.sin(unknown)], axis=1)
    sliding = np.stack([np.ones(6), unknown, unknown**2], axis=1)
    return np.where(order.slides[:, None], sliding, turning)


def over_length(order: Order, motions: np.ndarray) -> np.ndarray:
    """Return row motions with slides as shares of the arm's length, (..., 6)."""
    shares: np.ndarray = motions / np.where(order.screws.prismatic, order.screws.length, 1.0)
    return shares


def moved_by(order: Order, motions: np.ndarray) -> np.ndarray:
    """Return by what the target moves the line where it stands in the order, (4, 4)."""
    screws = order.screws
    move = screws.scaled(tools_at(screws, motions[None]))[0] @ inverse(screws.tool_at_zero)
    shift = np.eye(4)
    shift[:3, 3] = order.origin
    move = inverse(shift) @ move @ shift
    on_right = order.slot in (BEFORE_FIRST, AFTER_FIRST, AFTER_SECOND)
    return np.ascontiguousarray(inverse(move) if on_right == order.reverse else move)


def drawn(order: Order, rng: np.random.Generator) -> np.ndarray:
    return rng.uniform(-np.pi, np.pi, 6) * np.where(order.screws.prismatic, 0.2, 1.0)


@pytest.mark.parametrize(("shift", "reverse"), ORDERS)
@pytest.mark.parametrize("slide", [None, 1, 4])
def test_known_motions_make_both_sides_the_same(
    shift: int, reverse: bool, slide: int | None
) -> None:
    rng = fresh()
    made = FAMILIES["general"] if slide is None else sliding(slide)
    order = order_of(screws_of(made(rng), np.eye(4)), shift, reverse)
    if order is None:
        assert slide is not None
        return
    motions = drawn(order, rng)
    of, moved = terms(order, motions), moved_by(order, motions)
    left, right = np.empty((FORM, LEFT)), np.empty((FORM, LEFT))
    work = np.empty((2, FORM, LEFT)), np.empty((FORM, FORM))
    arm = order.matrices, order.start, order.still_left, order.still_right
    write_sides(*arm, order.slot, moved, *work, left, right)
    three = np.einsum("i,j,k", of[2], of[3], of[4]).ravel()
    two = np.einsum("i,j", of[1], of[0]).ravel()
    both = left @ three, right[:, :9] @ two
    assert np.abs(both[0] - both[1]).max() < 1e-11 * max(1.0, np.abs(both[0]).max())

    tops, kept = np.empty((1, RIGHT, RIGHT + LEFT)), np.empty((1, KEPT, LEFT + FADING))
    products, spans = np.empty((1, RIGHT), np.int64), np.empty(1)
    eliminate_sides(*arm, order.fading, order.slot, moved[None], products, tops, kept, spans)
    size = np.abs(kept[0, :, :LEFT]).max()
    assert np.abs(kept[0, :, :LEFT] @ three).max() < 1e-10 * max(1.0, size)
    # The triangle gives the products of the right side back, where it is not nearly singular.
    if spans[0] > 1e-6:
        triangle, rest = np.triu(tops[0, :, :RIGHT]), tops[0, :, RIGHT:] @ three
        got = np.linalg.solve(triangle, rest)
        assert np.abs(got - two[1:][products[0]]).max() < 1e-9 / spans[0]
