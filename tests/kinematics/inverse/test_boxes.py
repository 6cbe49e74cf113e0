"""Boxes of joint values: none is left only where a dense grid comes nowhere near the target."""

import numpy as np
import pytest

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.inverse.boxes import COUNT, EMPTY, LOOKED_AT, SMALL, SPENT, bench_for, explore
from kinematics.inverse.descent import POSITION
from kinematics.inverse.descent_arms import lines_of, room_of
from kinematics.inverse.screws import screws_of
from kinematics.kernels.compiler import for_kernel
from tests.kinematics.example_arms import AT_FLANGE, revolute
from tests.kinematics.inverse.bounded_arms import bounded
from tests.kinematics.inverse.seeds import fresh

ROWS = tuple(revolute(a=length) for length in (0.5, 0.4))
ARM: Arm = bounded(ROWS, (-1.2, 0.9), (-2.0, 1.0))
SCREWS = screws_of(ARM, AT_FLANGE)
SMALLEST = 1e-6


class Asked:
    """One search that can be gone on with."""

    def __init__(self, place: np.ndarray, tolerance: float = 0.0) -> None:
        target = np.eye(4)
        target[:3, 3] = place
        lines, room = lines_of(SCREWS, ARM), room_of(ARM, np.ones(2))
        furthest = np.full(2, 0.9 / SCREWS.length)
        bench = bench_for(2, 2, len(room.least), furthest)
        goal, missed = for_kernel(SCREWS.scaled(target[None])[0]), np.array([tolerance, 0.0])
        self._first = lines, room, bench, POSITION, goal, missed
        self.boxes, self.counts = np.zeros((64, 2, 2)), np.array([1, 0])
        self.boxes[0] = 0.5 * (room.upper + room.lower), 0.5 * (room.upper - room.lower)

    def go_on(self, most: int) -> int:
        return explore(*self._first, self.boxes, self.counts, most, SMALLEST)


def test_a_dense_grid_says_the_same() -> None:
    """A step of the grid moves the tool by 6 mm at most, so it comes within 5 mm of what is met."""
    random, outcomes = fresh(), []
    q = np.stack(np.meshgrid(np.linspace(-1.2, 0.9, 400), np.linspace(-2.0, 1.0, 400)), axis=-1)
    places = tool_in_base(ARM, q.reshape(-1, 2), AT_FLANGE)[:, :2, 3]
    for x, y in random.uniform(-0.9, 0.9, size=(30, 2)):
        near = np.hypot(*(places - [x, y]).T).min()
        ended = Asked(np.array([x, y, 0.0])).go_on(100_000)
        assert ended in ((EMPTY,) if near > 0.005 else (SMALL, EMPTY))
        outcomes.append(ended)
    assert {EMPTY, SMALL} <= set(outcomes)


def test_no_place_that_a_posture_is_at_is_given_up() -> None:
    random = fresh()
    inside = random.uniform([-1.2, -2.0], [0.9, 1.0], size=(200, 2))
    corners = np.array([[-1.2, -2.0], [0.9, 1.0], [0.9, 0.0], [-1.2, 0.0]])
    for place in tool_in_base(ARM, np.concatenate([inside, corners]), AT_FLANGE)[:, :3, 3]:
        assert Asked(place).go_on(100_000) == SMALL


@pytest.mark.parametrize("hair", [1e-3, 1e-5])
def test_a_hair_beyond_the_stretched_arm_is_proved_unless_tolerated(hair: float) -> None:
    beyond = np.array([0.9 + hair, 0.0, 0.0])
    assert Asked(beyond).go_on(1_000_000) == EMPTY
    assert Asked(beyond, 2.0 * hair / SCREWS.length).go_on(1_000_000) == SMALL


def test_a_search_goes_on_where_it_stopped() -> None:
    beyond = np.array([0.9 + 1e-4, 0.0, 0.0])
    whole = Asked(beyond)
    assert whole.go_on(1_000_000) == EMPTY
    pieces = Asked(beyond)
    for most in range(1, 10_000):
        ended = pieces.go_on(most)
        assert pieces.counts[LOOKED_AT] <= most
        if ended != SPENT:
            break
    assert ended == EMPTY
    assert pieces.counts.tolist() == whole.counts.tolist()
    assert whole.counts[COUNT] == 0
