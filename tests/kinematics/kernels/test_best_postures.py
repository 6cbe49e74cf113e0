"""Postures in order: within travel alone where there are any, ties as they were found."""

import numpy as np

from kinematics.kernels.best_postures import best_first, in_steps, preferred
from kinematics.kernels.whole_turns import INSIDE


def order(
    target: list[int],
    flags: list[int],
    primary: list[float],
    secondary: list[float],
    most: int = 9,
    beyond: int = 9,
) -> tuple[list[int], list[int]]:
    source = np.arange(len(flags))
    offsets, found, reached, all_reached = best_first(
        max(target, default=-1) + 1,
        np.array(target, dtype=np.intp),
        source,
        np.array(flags),
        np.array(primary),
        np.array(secondary),
        most,
        beyond,
    )
    within = {t for t, bits in zip(target, flags, strict=True) if bits & INSIDE}
    assert np.flatnonzero(reached).tolist() == sorted(within)
    assert all_reached == reached.all()
    return offsets.tolist(), found.tolist()


def test_each_target_has_its_own_order() -> None:
    assert order([0, 0, 2], [1, 1, 1], [0.1, 0.2, 0.3], [0, 0, 0]) == ([0, 2, 2, 3], [1, 0, 2])


def test_postures_beyond_travel_are_left_out_beside_others() -> None:
    assert order([0, 0, 0], [0, INSIDE, 0], [0.9, 0.1, 0.8], [0, 0, 0]) == ([0, 1], [1])
    assert order([0, 0], [0, 0], [-0.9, -0.1], [0, 0]) == ([0, 2], [1, 0])


def test_what_differs_by_rounding_keeps_its_order() -> None:
    first = in_steps(np.array([0.3, 0.3 + 1e-12])).tolist()
    assert order([0, 0], [1, 1], first, in_steps(np.array([0.5, 0.5 + 1e-12])).tolist())[1] == [
        0,
        1,
    ]
    assert order([0, 0], [1, 1], first, [0.5, 0.6])[1] == [1, 0]


def test_of_equal_margins_those_within_working_travel_come_first() -> None:
    margins = np.array([0.3 + 1e-12, 0.3, 0.3 + 1e-12, 0.3 + 2e-9])
    told = preferred(margins, np.array([True, False, False, True]))
    assert order([0] * 4, [1] * 4, told.tolist(), [0.0] * 4)[1] == [3, 1, 2, 0]
    endless = preferred(np.full(2, np.inf), np.array([True, False]))
    assert order([0, 0], [1, 1], endless.tolist(), [0.9, 0.1])[1] == [1, 0]


def test_what_is_beyond_travel_stays_so() -> None:
    """Half a step for working travel does not bring the least that counts as beyond back within."""
    assert preferred(np.array([-1e-9]), np.array([False]))[0] < 0.0
    assert preferred(np.array([0.0]), np.array([True]))[0] >= 0.0


def test_infinite_margins_are_ranked_by_the_second() -> None:
    assert order([0, 0], [1, 1], [np.inf, np.inf], [0.1, 0.2])[1] == [1, 0]


def test_no_more_are_kept_than_are_listed() -> None:
    random = np.random.default_rng(1)
    ranks = random.uniform(size=50)
    found = order([0] * 50, [1] * 50, ranks.tolist(), [0.0] * 50, most=7)[1]
    assert found == np.argsort(-ranks)[:7].tolist()


def test_of_targets_beyond_travel_others_may_be_listed() -> None:
    flags, ranks = [INSIDE, INSIDE, 0, 0, 0], [0.1, 0.2, -0.3, -0.1, -0.2]
    of_all = order([0, 0, 1, 1, 1], flags, ranks, [0.0] * 5, most=1)
    assert of_all == ([0, 1, 4], [1, 3, 4, 2])
    of_best = order([0, 0, 1, 1, 1], flags, ranks, [0.0] * 5, most=2, beyond=1)
    assert of_best == ([0, 2, 3], [1, 0, 3])
