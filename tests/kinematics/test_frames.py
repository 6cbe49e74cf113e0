"""Frames, ways and loops by name; errors and where they point.

Oracle: poses put together along every path of a small graph, by hand.
"""

from typing import Any

import numpy as np
import pytest

from kinematics import connections
from kinematics.errors import KinematicsError, NotConnected, TooLongWays, UnknownFrame
from kinematics.frames import FrameGraph
from kinematics.kernels.frame_graph import close_loops, shortest_ways
from kinematics.kernels.frame_poses import loops_walked, poses_along
from kinematics.kernels.given_poses import write_poses
from kinematics.orientation_forms import values_of
from kinematics.pose_batches import poses_as_given
from kinematics.transforms import pose
from kinematics.warm_up import RELATIONS, warm_up
from tests.kinematics.networks import random_network

UP = pose(np.eye(3), [0.0, 0.0, 1.0])


def chain(*names: str) -> FrameGraph:
    """Return frames each a metre above the one before."""
    return FrameGraph(names[1:], names[:-1], np.tile(UP, (len(names) - 1, 1, 1)))


@pytest.mark.parametrize("seed", range(8))
def test_any_pair_is_as_in_truth(seed: int) -> None:
    network = random_network(15, 22, seed=seed)
    graph = network.graph()
    names = graph.connections.known
    of = [name for name in names for _ in names]
    within = names * len(names)
    ways = graph.ways(of, within)
    number = [int(name.removeprefix("frame-")) for name in names]
    truth = network.frame_in_hall[number]
    expected = np.linalg.inv(truth)[None, :] @ truth[:, None]
    np.testing.assert_allclose(ways.poses.reshape(expected.shape), expected, rtol=0, atol=1e-12)
    for way, path in enumerate(ways.walks.frames):
        assert (path[0], path[-1]) == (within[way], of[way])
        assert len(set(path)) == len(path)


def test_a_frame_in_itself_is_the_identity_and_has_no_steps() -> None:
    graph = chain("table", "lamp")
    ways = graph.ways(["lamp"], ["lamp"])
    assert np.array_equal(ways.poses[0], np.eye(4))
    assert ways.walks.frames == [["lamp"]]
    assert ways.walks.steps_of(0) == []


def test_a_loop_starts_at_the_world_or_else_where_it_was_named_first() -> None:
    with_world = FrameGraph(
        ["lamp", "world", "lamp"], ["table", "lamp", "world"], np.array([UP] * 3)
    )
    assert with_world.names == ["world", "table", "lamp"]
    assert with_world.loops.walks.frames == [["world", "lamp", "world"]]
    without = FrameGraph(["b", "c", "b"], ["a", "b", "c"], np.array([UP] * 3))
    assert without.loops.walks.frames == [["b", "c", "b"]]
    # b in c is a metre up, and so is c in b: around the loop that makes two.
    assert [float(off[0]) for off in without.closures] == [2.0, 0.0]


def test_a_pair_given_twice_is_a_loop_of_two_and_the_first_is_taken() -> None:
    heights = pose(np.eye(3), [[0, 0, 1.0], [0, 0, 1.25], [0, 0, -1.5]])
    graph = FrameGraph(["a", "a", "b"], ["b", "b", "a"], heights)
    assert graph.loops.walks.frames == [["b", "a", "b"]] * 2
    position, angle = graph.closures
    np.testing.assert_allclose(np.sort(position), [0.25, 0.5], rtol=0, atol=1e-15)
    assert angle.tolist() == [0, 0]
    assert graph.ways(["a"], ["b"]).poses[0, 2, 3] == 1.0


def test_no_relations_at_all() -> None:
    graph = FrameGraph([], [], np.empty((0, 4, 4)))
    assert graph.connections.known == []
    assert len(graph.loops) == 0
    assert graph.loops.walks.frames == []
    with pytest.raises(UnknownFrame):
        graph.ways(["world"], ["world"])


def test_a_frame_given_in_itself() -> None:
    with pytest.raises(KinematicsError, match="lamp is given in itself") as caught:
        FrameGraph(["a", "lamp", "lamp"], ["b", "lamp", "lamp"], np.array([UP] * 3))
    assert caught.value.where == (1,)
    assert caught.value.way_out


def test_an_unknown_frame_is_told_with_the_nearest() -> None:
    graph = chain("table", "lamp", "bulb")
    with pytest.raises(UnknownFrame, match="'lmap'") as caught:
        graph.ways(["bulb", "bulb"], ["table", "lmap"])
    assert caught.value.where == (1, "in")
    assert caught.value.way_out == 'did you mean "lamp"?'
    with pytest.raises(UnknownFrame) as caught:
        graph.ways(["world"], ["table"])
    assert caught.value.where == (0, "of")


def test_what_is_not_connected_is_told_by_groups() -> None:
    graph = FrameGraph(["b", "d", "e"], ["a", "c", "d"], np.array([UP] * 3))
    with pytest.raises(NotConnected) as caught:
        graph.ways(["b", "e"], ["a", "a"])
    assert caught.value.where == (1,)
    assert caught.value.say == (
        "no relations lead from a to e: e is connected with c, d; a is connected with b"
    )


def test_a_large_group_is_counted() -> None:
    graph = FrameGraph(
        [*(f"shelf-{k}" for k in range(30)), "lamp"],
        [*["rack"] * 30, "table"],
        np.tile(UP, (31, 1, 1)),
    )
    with pytest.raises(NotConnected, match=r"shelf-11, 18 more; lamp is connected with table$"):
        graph.ways(["rack"], ["lamp"])


def test_turned_loops_are_off_by_another_distance_elsewhere() -> None:
    """A quarter turn that is told nowhere else: off by nothing at its own frame, far off away."""
    quarter = np.array([[0.0, -1, 0], [1, 0, 0], [0, 0, 1]])
    given = np.array([pose(np.eye(3), [1.0, 0, 0]), pose(quarter, [1.0, 0, 0])])
    position, angle = FrameGraph(["b", "b"], ["a", "a"], given).closures
    assert (position[0], angle[0]) == pytest.approx((np.sqrt(2.0), np.pi / 2))
    renamed = FrameGraph(["world", "world"], ["a", "a"], given)
    position, angle = renamed.closures
    assert (position[0], angle[0]) == pytest.approx((0.0, np.pi / 2), abs=1e-15)


def test_ways_and_loops_too_long_to_be_told(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(connections, "MOST_STEPS_TOLD", 20)
    line = chain(*(f"shelf-{k}" for k in range(12)))
    assert len(line.ways(["shelf-9"] * 2, ["shelf-0"] * 2).walks.steps) == 18
    with pytest.raises(TooLongWays, match="the ways asked for take 22 relations") as caught:
        line.ways(["shelf-11"] * 9, ["shelf-0"] * 9)
    assert caught.value.code == "too-large"
    of, within = [f"b{k}" for k in range(24)], [f"b{(k + 1) % 24}" for k in range(24)]
    with pytest.raises(TooLongWays, match="the loops take 24 relations"):
        FrameGraph(of, within, np.tile(UP, (24, 1, 1)))


def test_what_follows_from_names_is_kept_of_few_relations() -> None:
    few, many = ([f"n{k}" for k in range(count + 1)] for count in (100, 101))
    assert chain(*few).connections is chain(*few).connections
    assert chain(*many).connections is not chain(*many).connections
    first, second = chain(*few), FrameGraph(few[1:], few[:-1], np.tile(UP @ UP, (100, 1, 1)))
    for ends in ((["n3"], ["n1"]), (["n9"], ["n1"]), (["n3"], ["n1"]), (["n1"], ["n3"])):
        for graph, height in ((first, 1.0), (second, 2.0)):
            ways = graph.ways(*ends)
            risen = [int(ends[side][0][1:]) for side in (0, 1)]
            assert ways.poses[0, 2, 3] == height * (risen[0] - risen[1])
            assert (ways.walks.frames[0][0], ways.walks.frames[0][-1]) == (ends[1][0], ends[0][0])
    for _ in range(2):
        with pytest.raises(UnknownFrame):
            first.ways(["n3"], ["m1"])


def test_kernels_are_compiled_once_and_ahead() -> None:
    """Nothing is compiled anew, which takes seconds, whatever network or form comes first."""
    warm_up(RELATIONS)
    kernels: tuple[Any, ...] = (close_loops, shortest_ways, poses_along, loops_walked, write_poses)
    before = [len(kernel.signatures) for kernel in kernels]
    for form in ("quaternion-xyzw", "rotation-vector", "zyz-current"):
        values = values_of(form, np.tile(np.eye(3), (4, 1, 1)))
        given = poses_as_given(form, values[::2], np.zeros((4, 3), order="F")[::2])
        assert given is not None
        graph = FrameGraph(["a", "b"], ["b", "c"], given[:, ::-1][:, ::-1])
        graph.ways([], [])
        graph.ways(["a", "c"], ["c", "a"])
        assert len(graph.loops) == 0
    assert [len(kernel.signatures) for kernel in kernels] == before == [1] * 5
