"""Equations in half-angle tangents say what they said in cosines, and known joints are roots."""

import numpy as np
import pytest

from kinematics.inverse.elimination_companion import ROOTS
from kinematics.inverse.elimination_orders import order_of
from kinematics.inverse.elimination_pencil import ANGLE_AT_ZERO, to_tangents, write_companions
from kinematics.inverse.elimination_sides import FADING, KEPT, LEFT, RIGHT, eliminate_sides
from kinematics.inverse.screws import screws_of
from tests.kinematics.inverse.general_arms import FAMILIES
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.inverse.test_elimination_sides import moved_by


@pytest.mark.parametrize("fourth_slides", [False, True])
@pytest.mark.parametrize("fifth_slides", [False, True])
def test_tangents_say_the_same(fourth_slides: bool, fifth_slides: bool) -> None:
    rng = fresh()
    kept, powers = rng.normal(size=(KEPT, LEFT)), np.empty((KEPT, LEFT))
    slides = np.array([False, False, False, fourth_slides, fifth_slides, False])
    to_tangents(slides, kept, powers)
    third, factor, as_turns, as_tangents = rng.normal(size=3), 1.0, [], []
    for slide in (fourth_slides, fifth_slides):
        v = rng.uniform(-2.5, 2.5)
        x = v if slide else np.tan(0.5 * v)
        as_turns.append([1.0, v, v * v] if slide else [1.0, np.cos(v), np.sin(v)])
        as_tangents.append([1.0, x, x * x])
        factor *= 1.0 if slide else 1.0 + x * x
    said = kept @ np.einsum("i,j,k", third, *as_turns).ravel()
    again = powers @ np.einsum("i,j,k", third, *as_tangents).ravel()
    np.testing.assert_allclose(again, factor * said, rtol=1e-11, atol=1e-11 * factor)


def test_the_third_joint_of_known_motions_is_an_eigenvalue() -> None:
    rng = fresh()
    order = order_of(screws_of(FAMILIES["general"](rng), np.eye(4)), 0, False)
    assert order is not None
    motions = rng.uniform(-np.pi, np.pi, (20, 6))
    moved = np.array([moved_by(order, one) for one in motions])
    tops, kept = np.empty((20, RIGHT, RIGHT + LEFT)), np.empty((20, KEPT, LEFT + FADING))
    arm = order.matrices, order.start, order.still_left, order.still_right, order.fading
    products, spans = np.empty((20, RIGHT), np.int64), np.empty(20)
    eliminate_sides(*arm, order.slot, moved, products, tops, kept, spans)
    powers, companions = np.empty((20, KEPT, LEFT)), np.empty((20, ROOTS, ROOTS))
    health, leftover = np.empty(20), np.empty(20)
    write_companions(order.slides, 0, kept, powers, companions, health, leftover)
    assert (leftover == 0.0).all()
    third = order.signs[2] * motions[:, order.positions[2]] - ANGLE_AT_ZERO
    # Compared as angles: x itself grows without end half a turn from where it is 0.
    found = 2.0 * np.arctan(np.linalg.eigvals(companions))
    apart = np.abs(np.exp(1j * found) - np.exp(1j * third)[:, None]).min(axis=1)
    sound = health > 1e-6
    assert sound.sum() >= 15
    assert apart[sound].max() < 1e-4
    assert np.median(apart[sound]) < 1e-8
