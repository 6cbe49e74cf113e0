"""Nodes joined to paths and walked: small cases by hand, and a slow walk in plain Python."""

import numpy as np

from kinematics.inverse.redundant_paths import BEST, FIRST, LAST, NONE, link, walk
from tests.kinematics.inverse.seeds import fresh

TURN = 2.0 * np.pi


def linked(offsets: list[int], each: int, values: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    ahead, behind = np.empty((2, len(values)), np.int64)
    joints = values.shape[1]
    link(
        np.array(offsets), each, values, np.ones(joints, bool), np.ones(joints), 0.5, ahead, behind
    )
    return ahead, behind


def test_paths_of_one_target_do_not_go_on_in_the_next() -> None:
    ahead, behind = linked([0, 1, 2, 3, 4], 2, np.zeros((4, 1)))
    assert ahead.tolist() == [1, NONE, 3, NONE]
    assert behind.tolist() == [NONE, 0, NONE, 2]


def test_a_node_goes_on_in_its_nearest_only_where_that_has_none_nearer() -> None:
    ahead, behind = linked([0, 2, 3], 2, np.array([[0.0], [0.3], [0.25]]))
    assert ahead.tolist() == [NONE, 2, NONE]
    assert behind.tolist() == [NONE, NONE, 1]


def test_whole_turns_are_no_distance_and_a_gap_is() -> None:
    assert linked([0, 1, 2], 2, np.array([[3.1], [-3.1]]))[0].tolist() == [1, NONE]
    assert linked([0, 1, 2], 2, np.array([[0.0], [0.6]]))[0].tolist() == [NONE, NONE]


def test_held_values_without_any_node_part_paths() -> None:
    assert linked([0, 1, 1, 2], 3, np.zeros((2, 1)))[0].tolist() == [NONE, NONE]


def walked_slowly(
    order: np.ndarray, eligible: np.ndarray, ahead: np.ndarray, values: np.ndarray, most: float
) -> list[list[int]]:
    """Return the stretches of a chain as lists of nodes, for joints without whole turns."""
    behind = {int(to): node for node, to in enumerate(ahead) if to != NONE}
    taken: set[int] = set()
    stretches = []
    for best in order.tolist():
        if not eligible[best] or best in taken:
            continue
        nodes = [best]
        taken.add(best)
        for onward in (lambda node: int(ahead[node]), lambda node: behind.get(node, NONE)):
            node = best
            while True:
                to = onward(node)
                if to == NONE or not eligible[to] or to in taken:
                    break
                if np.abs(values[to] - values[node]).max() > most:
                    break
                taken.add(to)
                nodes.append(to)
                node = to
        stretches.append(sorted(nodes))
    return stretches


def test_stretches_are_those_of_a_slow_walk() -> None:
    random = fresh()
    for _ in range(50):
        count = 60
        values = np.cumsum(random.uniform(-0.2, 0.2, size=(count, 2)), axis=0)
        values[random.random(count) < 0.1] += 0.4
        ahead = np.append(np.arange(1, count), NONE)
        ahead[random.random(count) < 0.1] = NONE
        behind = np.full(count, NONE)
        behind[ahead[ahead != NONE]] = np.flatnonzero(ahead != NONE)
        eligible, order = random.random(count) < 0.85, random.permutation(count)
        stretch, ends = np.empty(count, np.int64), np.empty((count, 3), np.int64)
        bounds = np.array([[-9.0, -9.0], [9.0, 9.0]])
        still = np.zeros(2, bool)
        after = values.copy()
        found = walk(order, eligible, ahead, behind, bounds, still, 0.5, after, stretch, ends)
        expected = walked_slowly(order, eligible, ahead, values, 0.5)
        assert [np.flatnonzero(stretch == one).tolist() for one in range(found)] == expected
        assert ends[:found, FIRST].tolist() == [nodes[0] for nodes in expected]
        assert ends[:found, LAST].tolist() == [nodes[-1] for nodes in expected]
        assert eligible[ends[:found, BEST]].all()
        np.testing.assert_array_equal(after, values)


def test_a_joint_takes_its_whole_turns_along_as_far_as_its_travel_goes() -> None:
    """Shown within half a turn, a joint that keeps turning; its travel ends at 5 rad."""
    turned = np.linspace(0.0, 7.0, 36)
    values = (turned - TURN * np.round(turned / TURN))[:, None]
    ahead, behind = np.append(np.arange(1, 36), NONE), np.append(NONE, np.arange(35))
    stretch, ends = np.empty(36, np.int64), np.empty((36, 3), np.int64)
    bounds, all_of = np.array([[-5.0], [5.0]]), np.ones(36, bool)
    found = walk(
        np.arange(36), all_of, ahead, behind, bounds, np.ones(1, bool), 0.5, values, stretch, ends
    )
    assert found == 2
    first = stretch == 0
    np.testing.assert_allclose(values[first, 0], turned[first])
    assert values[first].max() <= 5.0 < turned[~first].min()
