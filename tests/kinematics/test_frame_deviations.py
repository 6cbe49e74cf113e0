"""Standard deviations as far apart as they may be, against an orthogonal factorisation.

Oracle: scipy's Householder QR with column pivoting of the weighted equations themselves, largest
rows first, which holds for any weights (Cox and Higham, 1998). It squares nothing.
"""

import numpy as np
import pytest
from scipy.linalg import qr, solve_triangular

from kinematics import block_system
from kinematics.errors import OutOfRange
from kinematics.frame_estimate import Estimate, estimate
from kinematics.frame_residuals import Weights
from kinematics.frame_suspects import suspects_of
from kinematics.frames import FrameGraph
from kinematics.tolerances import SDS_APART
from kinematics.transforms import pose
from tests.kinematics.networks import random_network

RELATIONS = 24


def factorised(found: Estimate) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return the step that is still left, its standard deviations, and all redundancies."""
    pattern, at = found.pattern, found.linearised
    rows = np.zeros((len(pattern.one), 6, pattern.nodes + 1, 6))
    for edge in range(len(pattern.one)):
        rows[edge, :, pattern.one[edge]] += at.of_inner[edge]
        rows[edge, :, pattern.other[edge]] += at.of_outer[edge]
    whole = rows[:, :, :-1].reshape(6 * len(rows), -1)
    order = np.argsort(-np.abs(whole).max(axis=1), kind="stable")
    unit, triangle, columns = qr(whole[order], mode="economic", pivoting=True)
    inverse = solve_triangular(triangle, np.eye(len(triangle)))
    step, sds = np.empty(len(triangle)), np.empty(len(triangle))
    step[columns] = -inverse @ (unit.T @ at.residuals.reshape(-1)[order])
    sds[columns] = np.linalg.norm(inverse, axis=1)
    shares = np.empty(len(whole))
    shares[order] = (unit**2).sum(axis=1)
    return step, sds, 1.0 - shares.reshape(-1, 6).mean(axis=1)


def apart(seed: int, kind: str) -> tuple[np.ndarray, np.ndarray]:
    """Return deviations of positions and angles, one or both from 3e-6 to 0.3 m and rad."""
    draw = np.random.default_rng(seed)
    share = draw.uniform(0.0, 1.0, (2, RELATIONS))
    share[:, :4] = [0, 1, 0, 1]  # both ends are there
    if kind == "ends":
        share = np.round(share)
    wide = 3e-6 * SDS_APART**share
    usual = np.full(RELATIONS, 1e-3)
    return (usual if kind == "angles" else wide[0]), (usual if kind == "positions" else wide[1])


@pytest.mark.parametrize("way", ["dense", "factors", "steps"])
@pytest.mark.parametrize("kind", ["positions", "angles", "both", "ends"])
def test_as_good_as_an_orthogonal_factorisation(
    kind: str, way: str, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(block_system, "MOST_DENSE", 1200 if way == "dense" else 0)
    monkeypatch.setattr(block_system, "MOST_ENVELOPE", 0 if way == "steps" else 1e9)
    settled = 0
    for seed in range(5):
        network = random_network(8, RELATIONS, error=1e-4, seed=seed)
        found = estimate(network.graph(), *apart(seed, kind))
        suspects = suspects_of(found)
        if not found.settled:
            continue
        settled += 1
        step, sds, redundancy = factorised(found)
        assert np.abs(step / sds).max() < 1e-6
        if way == "dense":
            np.testing.assert_allclose(suspects.redundancy, redundancy, rtol=0, atol=1e-4)
        else:
            worst = suspects.most_likely
            assert suspects.redundancy[worst] == pytest.approx(redundancy[worst], abs=1e-3)
    assert settled >= 4


def heights(sd: float) -> tuple[FrameGraph, np.ndarray]:
    """Return f1 at 1 m and f2 at 2 m in world, known to 1 m, and f2 0.9 m above f1, to ``sd``."""
    given = pose(np.eye(3), [[0, 0, 1.0], [0, 0, 2.0], [0, 0, 0.9]])
    return FrameGraph(["f1", "f2", "f2"], ["world", "world", "f1"], given), np.array([1, 1, sd])


def test_what_is_almost_exact_holds_and_the_rest_gives_way() -> None:
    graph, sds = heights(1.0 / SDS_APART)
    found = estimate(graph, sds, np.full(3, 1e-3))
    world, f1, f2 = graph.connections.numbers_of(["world", "f1", "f2"])
    assert found.settled
    places = found.pose_between([f1, f2], [world, world])[:, 2, 3]
    # 0.1 m of contradiction shared by weights 1, 1 and SDS_APART^2.
    share = 0.1 / (2.0 + SDS_APART**-2.0)
    np.testing.assert_allclose(places, [1.0 + share, 2.0 - share], rtol=0, atol=1e-9)


@pytest.mark.parametrize(
    ("place", "field", "sd"),
    [(1, "position_sd", 1e-9), (2, "angle_sd", 1e-9), (0, "position_sd", 1e3)],
)
def test_further_apart_is_refused(place: int, field: str, sd: float) -> None:
    """The one furthest from the usual is named, wherever it stands."""
    graph, _ = heights(1.0)
    sds = {name: np.full(3, 1e-3) for name in ("position_sd", "angle_sd")}
    sds[field][place] = sd
    with pytest.raises(OutOfRange, match="differ by a factor of 1e\\+06") as refused:
        estimate(graph, sds["position_sd"], sds["angle_sd"])
    assert refused.value.where == ("relations", place, field)
    assert refused.value.value == sd


@pytest.mark.parametrize("usual", [1e-3, 1e-2, 1e-8, 0.3])
def test_the_limit_itself_is_allowed(usual: float) -> None:
    sds = np.array([usual, usual * SDS_APART])
    Weights(sds, sds[::-1]).refuse_if_far_apart()
    with pytest.raises(OutOfRange):
        Weights(sds * [1, 1.001], sds).refuse_if_far_apart()


def test_levers_that_amplify_rounding_do_not_converge() -> None:
    """Positions to 1 nm over kilometres beside angles to a radian: the ratio hides in a lever."""
    network = random_network(8, RELATIONS, seed=1)
    network.of_in[:, :3, 3] *= 1e3
    found = estimate(network.graph(), np.full(RELATIONS, 1e-9), np.full(RELATIONS, 1.0))
    assert not found.settled
