"""Readouts of a screen: how far every map is from what they mean, against scipy's Rotation."""

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from kinematics.errors import InvalidOrientation, NotFinite
from kinematics.readouts import (
    Held,
    KnownDirection,
    KnownOrientation,
    checked_direction,
    held_against,
    rms_of,
)
from kinematics.screen_readings import families_of
from tests.kinematics.screens import Screen

LEVEL = KnownOrientation(np.eye(3))
HALF = 6e-10  # residuals are told to nine decimals


def screens_of(held: Held) -> list[Screen]:
    """One reading of each map as a screen that scipy works out."""
    readings = [each.family.readings()[each.place][0] for each in held.maps]
    return [Screen(r.form, r.order, r.signs, r.unit, r.inverse) for r in readings]


@pytest.mark.parametrize("count", [3, 4, 9])
def test_residuals_of_every_map(count: int) -> None:
    """A whole orientation, and two directions, for each of all maps."""
    shown = {
        3: [[0.3, -1.1, 0.8], [1.5, 0.2, 0.4], [-0.7, -0.9, 1.2]],
        4: [[0.5, -0.1, 0.7, 0.5], [0.1, 0.7, -0.7, 0.1], [0.5, 0.5, 0.5, 0.5]],
        9: [(np.array([6, 2, 3, -3, 6, 2, -2, -3, 6]) / 7.0).tolist()] * 3,
    }[count]
    rng = np.random.default_rng(count)
    tool = Rotation.random(rng=rng)
    of, at = (vector / np.linalg.norm(vector) for vector in rng.standard_normal((2, 3)))
    across = KnownDirection(np.array([1.0, 0.0, 0.0]), np.array([0.0, 0.0, -1.0]))
    meanings = [KnownOrientation(tool.as_matrix()), KnownDirection(of, at), across]
    held = held_against(np.array(shown), meanings, None)
    assert len(held.maps) == {3: 3 * 624, 4: 192, 9: 8}[count]
    for made, residuals in zip(screens_of(held), held.residuals, strict=True):
        first, second, third = (made.meaning(np.array(row)) for row in shown)
        assert residuals[0] == pytest.approx((first.inv() * tool).magnitude(), abs=HALF)
        assert np.cos(residuals[1]) == pytest.approx(second.apply(of) @ at, abs=1e-8)
        assert np.cos(residuals[2]) == pytest.approx(-third.as_matrix()[2, 0], abs=1e-8)


def test_small_angles_keep_their_digits() -> None:
    off = Rotation.from_rotvec([0.0, 3e-7, 0.0]).as_matrix()
    direction = KnownDirection(np.array([0.0, 0.0, 1.0]), off[:, 2])
    held = held_against(np.zeros((2, 3)), [KnownOrientation(off), direction], "rad")
    np.testing.assert_allclose(held.residuals, 3e-7, atol=HALF)


def test_half_turns_off_and_opposite_directions() -> None:
    up, down = np.array([0.0, 0.0, 1.0]), np.array([0.0, 0.0, -1.0])
    meanings = [KnownOrientation(np.diag([-1.0, 1.0, -1.0])), KnownDirection(up, down)]
    held = held_against(np.zeros((2, 3)), meanings, "rad")
    np.testing.assert_allclose(held.residuals, np.pi, atol=HALF)


def test_only_maps_that_could_be_are_held() -> None:
    held = held_against(np.array([[0.0, 0.0, 90.0], [1.0, 0.0, 0.0]]), [LEVEL] * 2, None)
    assert {each.family.unit for each in held.maps} == {"deg"}
    held = held_against(np.array([[0.0, 0.0, 90.0]]), [LEVEL], "half-turns")
    assert {each.family.unit for each in held.maps} == {"half-turns"}
    quaternion = held_against(np.array([[0.5, 0.5, 0.5, 0.5]]), [LEVEL], None)
    assert {each.family.kind for each in quaternion.maps} == {"quaternion"}


def test_rank_by_residual_then_by_plainness() -> None:
    maps = [each for family in families_of(9) for each in [family] * 3]
    held = Held(
        maps=maps,  # type: ignore[arg-type]  # ranking does not look at them
        keys=np.array([[0, 1, 0, 0], [0, 0, 2, 0], [0, 0, 0, 1]]),
        residuals=np.array([[0.1, 0.2], [0.2, 0.1], [0.3, 0.3]]),
    )
    assert held.ranked().tolist() == [1, 0, 2]
    assert held.by_plainness(np.array([0, 1, 2])).tolist() == [2, 1, 0]
    assert rms_of(np.array([[0.1, 0.2]])).tolist() == [round(float(np.sqrt(0.025)), 9)]


@pytest.mark.parametrize(
    ("shown", "where", "words"),
    [
        ([[0.0, 0, 1], [0, 5000, 0]], (1,), "two turns"),
        ([[1.0, 0, 0, 0], [0.3, 0.3, 0.3, 0.3]], (1,), "neither a quaternion"),
        ([[1.0, 0, 0, 0, 1, 0, 0, 0, -1]], (0,), "no rotation matrix"),
    ],
)
def test_numbers_that_mean_nothing(
    shown: list[list[float]], where: tuple[int, ...], words: str
) -> None:
    with pytest.raises(InvalidOrientation, match=words) as refused:
        held_against(np.array(shown), [LEVEL] * len(shown), None)
    assert refused.value.where == where
    assert refused.value.value == shown[where[0]]
    assert refused.value.way_out


def test_no_readout_and_other_counts() -> None:
    for shown in (np.empty((0, 3)), np.zeros((1, 5))):
        with pytest.raises(InvalidOrientation, match="readouts of"):
            held_against(shown, [LEVEL] * len(shown), None)


def test_directions_from_outside() -> None:
    assert checked_direction([3, 0, 4]).tolist() == [0.6, 0.0, 0.8]
    assert checked_direction([0, 1e-300, 0]).tolist() == [0.0, 1.0, 0.0]
    for values, refusal in [
        ([0, 0, 0], InvalidOrientation),
        ([1, 0], InvalidOrientation),
        ("down", InvalidOrientation),
        ([0, 0, np.nan], NotFinite),
    ]:
        with pytest.raises(refusal):
            checked_direction(values)
