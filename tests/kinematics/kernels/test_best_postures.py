"""Postures in order: within travel alone where there are any, ties as they were found."""

import numpy as np

from kinematics.kernels.best_postures import best_first
from kinematics.kernels.whole_turns import INSIDE


def order(
    target: list[int], flags: list[int], primary: list[float], secondary: list[float], most: int = 9
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
    assert order([0, 0], [1, 1], [0.3, 0.3 + 1e-12], [0.5, 0.5 + 1e-12])[1] == [0, 1]
    assert order([0, 0], [1, 1], [0.3, 0.3 + 1e-12], [0.5, 0.6])[1] == [1, 0]


def test_infinite_margins_are_ranked_by_the_second() -> None:
    assert order([0, 0], [1, 1], [np.inf, np.inf], [0.1, 0.2])[1] == [1, 0]


def test_no_more_are_kept_than_are_listed() -> None:
    random = np.random.default_rng(1)
    ranks = random.uniform(size=50)
    found = order([0] * 50, [1] * 50, ranks.tolist(), [0.0] * 50, most=7)[1]
    assert found == np.argsort(-ranks)[:7].tolist()
