"""One constant turn between what is shown and what is known, against scipy's mean of rotations."""

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from kinematics.constant_offsets import SIDES, Side, offsets
from kinematics.orientation_guesses import guesses
from kinematics.readouts import KnownDirection, KnownOrientation, Meaning
from tests.kinematics.screens import noisy, screen, tilted

TURN = Rotation.from_euler("zyx", [90, 0, 30], degrees=True)
ROUNDING = 1e-14


def wxyz(rotation: Rotation) -> np.ndarray:
    return np.roll(rotation.as_quat(), 1, axis=-1)


def put(side: Side, shown: Rotation, turn: Rotation) -> Rotation:
    return shown * turn if side == "tool" else turn * shown


@pytest.mark.parametrize("side", SIDES)
def test_the_turn_is_the_mean_and_the_rest_is_left(side: Side) -> None:
    rng = np.random.default_rng(4)
    shown = Rotation.random(5, rng=rng)
    noise = Rotation.from_rotvec(0.02 * rng.standard_normal((5, 3)))
    each = TURN * noise
    known = put(side, shown, each)
    turns, residuals = offsets(side, wxyz(shown)[None], wxyz(known))
    mean = each.mean()
    assert abs(turns[0] @ wxyz(mean)) == pytest.approx(1.0, abs=ROUNDING)
    np.testing.assert_allclose(residuals[0], (mean.inv() * each).magnitude(), atol=1e-12)


def test_maps_do_not_mix() -> None:
    rng = np.random.default_rng(5)
    shown = wxyz(Rotation.random(12, rng=rng)).reshape(3, 4, 4)
    known = wxyz(Rotation.random(4, rng=rng))
    for side in SIDES:
        _, together = offsets(side, shown, known)
        for one, residuals in zip(shown, together, strict=True):
            np.testing.assert_allclose(offsets(side, one[None], known)[1][0], residuals, atol=1e-12)


@pytest.mark.parametrize("side", SIDES)
@pytest.mark.parametrize("form", ["zyx-current", "zyz-current", "rotation-vector", "matrix"])
def test_a_screen_that_shows_another_frame_is_seen_through(form: str, side: Side) -> None:
    rng = np.random.default_rng(len(form))
    made = screen(form, rng, orders=False)
    tools = [tilted(made, rng, 15.0) for _ in range(4)]
    meanings: list[Meaning] = [
        KnownOrientation(put(side, tool, TURN).as_matrix()) for tool in tools
    ]
    found = guesses(np.array([noisy(made, tool, rng) for tool in tools]), meanings)
    assert found.fitting == 0
    assert found.offset is not None
    offset, guess = found.offset
    assert offset.side == side
    assert abs(offset.turn @ wxyz(TURN)) > np.cos(np.radians(0.25))
    assert guess.fits
    assert any(reading.form == form for reading in guess.readings)


def test_no_turn_is_looked_for_where_none_can_be_told() -> None:
    rng = np.random.default_rng(9)
    made = screen("zyx-current", rng, orders=False)
    tools = [tilted(made, rng, 15.0) for _ in range(3)]
    shown = np.array([made.shows(tool) for tool in tools])
    turned: list[Meaning] = [KnownOrientation((tool * TURN).as_matrix()) for tool in tools]
    assert guesses(shown, turned).offset is not None
    assert guesses(shown[:2], turned[:2]).offset is None, "two readouts"
    down = KnownDirection(np.array([0.0, 0.0, 1.0]), turned[2].tool_in_base[:, 2] * -1.0)  # type: ignore[union-attr]
    assert guesses(shown, [*turned[:2], down]).offset is None, "a direction"
    straight: list[Meaning] = [KnownOrientation(tool.as_matrix()) for tool in tools]
    assert guesses(shown, straight).offset is None, "it fits as it is"
