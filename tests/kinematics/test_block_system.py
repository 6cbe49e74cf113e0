"""Block equations solved in each of the three ways, against numpy's dense solution."""

import numpy as np
import pytest

from kinematics import block_system
from kinematics.block_system import BlockPattern
from tests.kinematics.networks import random_network

HELD = -1


def system(nodes: int, edges: int, seed: int) -> tuple[BlockPattern, np.ndarray, np.ndarray]:
    """Return a pattern with some held ends, and the parts of A at both ends of each edge."""
    draw = np.random.default_rng(seed)
    network = random_network(nodes + 1, edges, seed=seed)
    pattern = BlockPattern(network.inner - 1, network.outer - 1, nodes)
    assert (pattern.one == HELD).any()
    parts = (
        draw.normal(size=(2, edges, 3, 3))
        + 3.0 * np.eye(3) * np.array([-1, 1])[:, None, None, None]
    )
    return pattern, parts[0], parts[1]


def plain(pattern: BlockPattern, of_one: np.ndarray, of_other: np.ndarray) -> np.ndarray:
    """Return A row by row, the columns of held nodes left out."""
    rows = np.zeros((len(of_one), 3, pattern.nodes + 1, 3))
    for edge in range(len(of_one)):
        rows[edge, :, pattern.one[edge]] += of_one[edge]
        rows[edge, :, pattern.other[edge]] += of_other[edge]
    return rows[:, :, :-1].reshape(3 * len(of_one), -1)


@pytest.mark.parametrize("seed", range(4))
def test_normal_equations_are_those_of_the_whole_matrix(seed: int) -> None:
    pattern, of_one, of_other = system(12, 25, seed)
    whole = plain(pattern, of_one, of_other)
    matrix = pattern.normal(of_one, of_other)
    np.testing.assert_allclose(matrix.dense(), whole.T @ whole, rtol=0, atol=1e-12)
    blocks = (whole.T @ whole).reshape(12, 3, 12, 3)
    diagonal = blocks[np.arange(12), :, np.arange(12)]
    np.testing.assert_allclose(matrix.diagonal(), diagonal, rtol=0, atol=1e-12)
    twice = (matrix + matrix).dense()
    np.testing.assert_allclose(twice, 2 * matrix.dense(), rtol=1e-15)


def test_what_edges_give_is_gathered_at_their_ends() -> None:
    pattern = BlockPattern(np.array([HELD, 0, 1]), np.array([0, 1, HELD]), 2)
    given = np.array([[1.0], [10.0], [100.0]])
    assert pattern.gathered(given, 2 * given).tolist() == [[12.0], [120.0]]


@pytest.mark.parametrize("way", ["dense", "factors", "steps"])
def test_three_ways_one_solution(way: str, monkeypatch: pytest.MonkeyPatch) -> None:
    pattern, of_one, of_other = system(60, 150, 5)
    monkeypatch.setattr(block_system, "MOST_DENSE", 1200 if way == "dense" else 0)
    monkeypatch.setattr(block_system, "MOST_ENVELOPE", 0 if way == "steps" else 1e9)
    matrix = pattern.normal(of_one, of_other)
    assert matrix.is_small is (way == "dense")
    right = np.random.default_rng(5).normal(size=(180, 4))
    right[:, 2] = 0.0
    found = matrix.solver(1e-13)(right)
    expected = np.linalg.solve(matrix.dense(), right)
    # The matrix has a condition number of some 1e5.
    bound = 1e-11 * np.abs(expected).max()
    np.testing.assert_allclose(found, expected, rtol=0, atol=bound)
    assert not found[:, 2].any()


def test_steps_can_be_given_up(monkeypatch: pytest.MonkeyPatch) -> None:
    pattern, of_one, of_other = system(60, 150, 5)
    monkeypatch.setattr(block_system, "MOST_DENSE", 0)
    monkeypatch.setattr(block_system, "MOST_ENVELOPE", 0)
    asked: list[int] = []

    def between() -> None:
        asked.append(1)
        if len(asked) == 3:
            raise TimeoutError

    solve = pattern.normal(of_one, of_other).solver(1e-13, between)
    with pytest.raises(TimeoutError):
        solve(np.ones((180, 2)))
    assert len(asked) == 3


@pytest.mark.parametrize("scale", [1.0, 1e-6])
def test_the_root_of_the_inverse(scale: float) -> None:
    pattern, of_one, of_other = system(12, 25, 1)
    of_one[3], of_other[3] = of_one[3] * scale, of_other[3] * scale
    matrix = pattern.normal(of_one, of_other)
    root, most = matrix.root_of_inverse()
    whole = matrix.dense()
    np.testing.assert_allclose(root @ whole @ root.T, np.eye(36), rtol=0, atol=1e-9)
    size = 1.0 / np.sqrt(np.diag(whole))
    condition = np.linalg.cond(whole * size * size[:, None])
    assert condition <= most <= 36**2 * condition


def test_a_singular_matrix_has_the_root_of_what_it_tells() -> None:
    pattern = BlockPattern(np.array([HELD]), np.array([0]), 1)
    row = np.array([[[1.0, 1.0]]])
    root, most = pattern.normal(-row, row).root_of_inverse()
    np.testing.assert_allclose(root.T @ root, np.full((2, 2), 0.25), rtol=0, atol=1e-12)
    assert most == np.inf


def test_a_long_thin_graph_is_told_from_a_well_knit_one() -> None:
    line = BlockPattern(np.arange(-1, 1999), np.arange(2000), 2000)
    knit = random_network(2001, 10_000)
    knit_pattern = BlockPattern(knit.inner - 1, knit.outer - 1, 2000)
    shuffled = np.random.default_rng(0).permutation(2000)
    ends = np.concatenate([[-1], shuffled[:-1]])
    thin_too = BlockPattern(ends, shuffled, 2000)
    assert block_system._envelope(line) == block_system._envelope(thin_too) < 1e4
    assert block_system._envelope(knit_pattern) > 10 * block_system.MOST_ENVELOPE


@pytest.mark.parametrize("way", ["dense", "factors"])
def test_a_singular_matrix_still_gives_a_solution(
    way: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Where an edge says nothing at all along one axis, what it cannot tell is left alone."""
    monkeypatch.setattr(block_system, "MOST_DENSE", 1200 if way == "dense" else 0)
    pattern = BlockPattern(np.array([HELD, 0]), np.array([0, 1]), 2)
    there = np.zeros((2, 3, 3)) + np.diag([1.0, 2.0, 0.0])
    matrix = pattern.normal(-there, there)
    right = (matrix.dense() @ np.array([1.0, 2, 0, 3, 4, 0])).reshape(-1, 1)
    found = matrix.solver(1e-12)(right)
    np.testing.assert_allclose(matrix.dense() @ found, right, rtol=0, atol=1e-9)
