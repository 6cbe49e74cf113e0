"""Quaternions of all maps at once against Hamilton's rules and each kind's own definition."""

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from kinematics.screen_rotations import PLACES, QUATERNIONS, SIGNS, product_of, turn_maps

ROUNDING = 1e-14  # some dozens of operations on numbers up to 1


def wxyz(rotation: Rotation) -> np.ndarray:
    return np.roll(rotation.as_quat(), 1, axis=-1)


def test_products_are_hamiltons() -> None:
    one, i, j, k = np.eye(4)
    for left, right, made in [(i, j, k), (j, k, i), (k, i, j), (i, i, -one), (one, k, k)]:
        assert np.array_equal(product_of(left, right), made)
    assert np.array_equal(product_of(j, i), -k)


def test_products_are_those_of_rotations() -> None:
    left, right = Rotation.random(20, rng=1), Rotation.random(20, rng=2)
    made = product_of(wxyz(left), wxyz(right))
    np.testing.assert_allclose(
        np.abs(np.sum(made * wxyz(left * right), axis=-1)), 1.0, atol=ROUNDING
    )


def test_every_choice_of_turns_is_there_once() -> None:
    axes, places, signs = turn_maps()
    assert len({(*a, *p, *s) for a, p, s in zip(axes, places, signs, strict=True)}) == 576
    assert (axes[:, 0] != axes[:, 1]).all()
    assert (axes[:, 1] != axes[:, 2]).all()
    assert {len(PLACES[3]), len(PLACES[4]), len(SIGNS)} == {6, 24, 8}


@pytest.mark.parametrize(
    ("kind", "shown", "maps"),
    [
        ("turns", [0.3, -1.2, 2.5], 576),
        ("rotation-vector", [0.3, -1.2, 2.5], 48),
        ("quaternion", [0.3, -0.7, 0.1, 0.64], 192),
        ("axis-angle", [0.36, -0.48, 0.8, 2.0], 192),
        ("matrix", Rotation.from_rotvec([1.0, 2.0, 0.5]).as_matrix().ravel().tolist(), 8),
    ],
)
def test_all_maps_give_unit_quaternions_and_differ(
    kind: str, shown: list[float], maps: int
) -> None:
    made = QUATERNIONS[kind](np.array([shown]), 1.0)[:, 0]
    assert made.shape == (maps, 4)
    np.testing.assert_allclose(np.linalg.norm(made, axis=-1), 1.0, atol=ROUNDING)
    alike = np.abs(made @ made.T)
    np.fill_diagonal(alike, 0.0)
    assert alike.max() < 1.0 - 1e-6, "two maps are one: they belong in one group"


def test_readouts_do_not_mix() -> None:
    """Of many at once each is as it is alone."""
    shown = np.random.default_rng(3).uniform(-2, 2, (7, 3))
    for kind in ("turns", "rotation-vector"):
        together = QUATERNIONS[kind](shown, 0.7)
        alone = np.concatenate([QUATERNIONS[kind](row[None], 0.7) for row in shown], axis=1)
        np.testing.assert_allclose(together, alone, atol=ROUNDING)


def test_nothing_shown_is_no_rotation() -> None:
    for kind, count in (("turns", 3), ("rotation-vector", 3), ("axis-angle", 4)):
        made = QUATERNIONS[kind](np.zeros((1, count)), 1.0)
        assert np.array_equal(np.abs(made), np.broadcast_to([1.0, 0, 0, 0], made.shape))
