"""Which relation seems wrong, against leaving each one out and estimating anew."""

import numpy as np
import pytest

from kinematics import block_system
from kinematics.frame_estimate import estimate
from kinematics.frame_suspects import suspects_of
from kinematics.frames import FrameGraph
from kinematics.tolerances import RELATION_WRONG
from kinematics.transforms import pose
from tests.kinematics.networks import RandomNetwork, random_network

SD = 1e-3


def with_mistake(network: RandomNetwork, relation: int, size: float) -> RandomNetwork:
    network.of_in[relation, :3, 3] += [size, -size, 0.5 * size]
    return network


@pytest.mark.parametrize("seed", range(4))
def test_drops_are_what_leaving_out_gains(seed: int) -> None:
    network = with_mistake(random_network(8, 16, error=SD, seed=seed), seed, 0.02)
    usual = np.full(16, SD)
    found = estimate(network.graph(), usual, usual)
    suspects = suspects_of(found)
    assert suspects.is_exact
    bridges = 0
    for relation in range(16):
        kept = np.arange(16) != relation
        without = estimate(network.graph(relation), usual[kept], usual[kept])
        if suspects.redundancy[relation] < 1e-9:  # nothing else leads to one of its frames
            assert suspects.drop[relation] == pytest.approx(0.0, abs=1e-9)
            bridges += 1
            continue
        gained = found.sum_of_squares - without.sum_of_squares
        # Equal where the residuals are linear; here they bend a little.
        assert suspects.drop[relation] == pytest.approx(gained, rel=0.02, abs=0.1)
    assert bridges <= 4
    assert 6 * suspects.redundancy.sum() == pytest.approx(found.freedom, abs=1e-6)
    # A relation that leads on from a frame with no third one cannot be told from it.
    assert seed in suspects.alike
    assert len(suspects.alike) <= 2
    assert suspects.is_beyond_chance


@pytest.mark.parametrize("way", ["factors", "steps"])
def test_in_large_networks_the_worst_are_exact(way: str, monkeypatch: pytest.MonkeyPatch) -> None:
    network = with_mistake(random_network(40, 120, error=SD, seed=2), 33, 0.02)
    usual = np.full(120, SD)
    exact = suspects_of(estimate(network.graph(), usual, usual))
    monkeypatch.setattr(block_system, "MOST_DENSE", 0)
    monkeypatch.setattr(block_system, "MOST_ENVELOPE", 0 if way == "steps" else 1e9)
    suspects = suspects_of(estimate(network.graph(), usual, usual))
    assert not suspects.is_exact
    assert suspects.most_likely == exact.most_likely == 33
    assert suspects.drop[33] == pytest.approx(exact.drop[33], rel=1e-4)
    assert suspects.redundancy[33] == pytest.approx(exact.redundancy[33], rel=1e-4)
    # Taking neighbours as known never sees less redundancy than there is.
    assert (suspects.redundancy >= exact.redundancy - 1e-6).all()
    assert (suspects.drop <= exact.drop * (1 + 1e-4) + 1e-9).all()


def test_in_a_single_loop_nothing_tells_relations_apart() -> None:
    heights = pose(np.eye(3), [[0, 0, 1.0], [0, 0, 1.0], [0, 0, -2.5], [0, 0, 7.0]])
    ring = FrameGraph(["b", "c", "a", "d"], ["a", "b", "c", "a"], heights)
    sd = np.array([0.1, 0.2, 0.1, 0.1])
    suspects = suspects_of(estimate(ring, sd, np.full(4, 1e3)))
    assert suspects.alike == (0, 1, 2)
    assert suspects.most_likely == 1, "the one known worst is off the most"
    # Without any of them the rest agrees: the drop is all, 0.5 m over the root of 0.06 m^2.
    np.testing.assert_allclose(suspects.drop, [0.25 / 0.06] * 3 + [0.0], rtol=1e-6, atol=1e-9)
    np.testing.assert_allclose(suspects.redundancy[3], 0.0, atol=1e-9)
    assert not suspects.is_beyond_chance


@pytest.mark.parametrize("relations", [5, 12])
def test_where_all_agree_nobody_is_suspected(relations: int) -> None:
    graph, usual = random_network(6, relations).graph(), np.full(relations, SD)
    suspects = suspects_of(estimate(graph, usual, usual))
    assert suspects.most_likely is None
    assert suspects.alike == ()
    assert not suspects.is_beyond_chance


def test_chance_alone_seldom_accuses() -> None:
    """One in a thousand relations, by the threshold's definition; 40 networks of 20 have none."""
    drops = np.concatenate(
        [
            suspects_of(
                estimate(
                    random_network(6, 20, error=SD, seed=seed).graph(),
                    np.full(20, SD),
                    np.full(20, SD),
                )
            ).drop
            for seed in range(40)
        ]
    )
    assert np.mean(drops > RELATION_WRONG) < 0.004
    assert drops.mean() == pytest.approx(6.0, rel=0.05)
    assert drops.var() == pytest.approx(12.0, rel=0.2)
