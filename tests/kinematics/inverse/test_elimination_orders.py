"""The twelve orders of six joints: which are sound, and that all say the same."""

import numpy as np
import pytest

from kinematics.inverse.candidates import land_candidates
from kinematics.inverse.elimination_companion import ROOTS
from kinematics.inverse.elimination_orders import Order, order_of
from kinematics.inverse.screws import screws_of
from tests.kinematics.inverse.general_arms import FAMILIES, sliding
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.inverse.triple_sets import tools_at


def targets_of(order: Order, rng: np.random.Generator, count: int) -> np.ndarray:
    slides = order.screws.prismatic
    motions = rng.uniform(-np.pi, np.pi, (count, 6)) * np.where(slides, 0.15, 1.0)
    return np.ascontiguousarray(order.screws.scaled(tools_at(order.screws, motions)))


def test_all_twelve_orders_find_as_many_of_an_arm_in_general_position() -> None:
    rng = fresh()
    screws = screws_of(FAMILIES["general"](rng), np.eye(4))
    counts = []
    for reverse in (False, True):
        for shift in range(6):
            order = order_of(screws, shift, reverse)
            assert order is not None
            targets = targets_of(order, np.random.default_rng(7), 40)
            tried = order.candidates(targets)
            counts.append(land_candidates(screws, targets, tried.motions, tried.of).counts())
            assert np.median(tried.health) > 1e-4
            assert np.bincount(tried.of).max() <= ROOTS
    forward = [order_of(screws, shift, False) for shift in range(6)]
    assert {order.slot for order in forward if order is not None} == set(range(1, 7))
    same = np.array(counts) == np.median(counts, axis=0)
    # One order may miss one of a pair beside a fold; that is what the other is asked for.
    assert same.mean() > 0.98


def test_orders_whose_first_pair_is_parallel_are_not_sound() -> None:
    rng = fresh()
    screws = screws_of(FAMILIES["axes 2 3 parallel"](rng), np.eye(4))
    unsound = []
    for reverse in (False, True):
        for shift in range(6):
            order = order_of(screws, shift, reverse)
            assert order is not None
            if np.median(order.candidates(targets_of(order, rng, 8)).health) < 1e-10:
                unsound.append(tuple(sorted(order.positions[:2].tolist())))
    assert set(unsound) == {(1, 2)}
    assert len(unsound) == 2


def test_equations_without_the_third_joint_are_told_apart() -> None:
    rng = fresh()
    screws = screws_of(FAMILIES["1 2, 3 4 and 5 6 meet"](rng), np.eye(4))
    health = []
    for still in range(3):
        order = order_of(screws, 1, False, still)
        assert order is not None
        targets = targets_of(order, np.random.default_rng(8), 12)
        health.append(float(np.median(order.candidates(targets).health)))
    assert health[0] < 1e-12
    assert health[1] > 1e-4
    assert health[2] == 0.0


@pytest.mark.parametrize("place", range(6))
def test_a_slide_is_neither_read_off_nor_dropped(place: int) -> None:
    screws = screws_of(sliding(place)(fresh()), np.eye(4))
    orders = [order_of(screws, shift, reverse) for shift in range(6) for reverse in (False, True)]
    there = [order for order in orders if order is not None]
    assert len(there) == 8
    for order in there:
        assert place not in (order.positions[2], order.positions[5])


def test_where_eigenvalues_fail_or_overflow_the_other_targets_are_answered(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    rng = fresh()
    order = order_of(screws_of(FAMILIES["general"](rng), np.eye(4)), 0, False)
    assert order is not None
    targets, plain = targets_of(order, rng, 3), np.linalg.eigvals
    known = order.candidates(targets)

    def failing(matrices: np.ndarray) -> np.ndarray:
        if len(matrices) == 3:
            raise np.linalg.LinAlgError
        values = plain(matrices)
        failing.calls += 1
        if failing.calls == 2:
            raise np.linalg.LinAlgError
        return np.where(failing.calls == 3, 1e200, values)

    failing.calls = 0
    monkeypatch.setattr(np.linalg, "eigvals", failing)
    tried = order.candidates(targets)
    assert tried.health[0] == known.health[0]
    assert tried.health[1] == 0.0
    np.testing.assert_allclose(tried.motions[tried.of == 0], known.motions[known.of == 0])
    assert not (tried.of == 1).any()
    # Infinite tangents, all of them real: half a turn from where they are 0.
    assert (tried.of == 2).sum() == ROOTS
    assert np.isfinite(tried.motions).all()
