"""Placements compose: against an independent product of 4 x 4 matrices, whatever stands in what.

The referee knows no cells: it multiplies the matrices on the way from a frame up to the world,
its rotations are scipy's.
"""

from typing import Any

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.spatial.transform import Rotation

from kinematics.cell import Cell, Placed
from service.wire.arms import read_arm
from service.wire.cells import CellAt, read_cell

thorough = settings(deadline=None, max_examples=80)
ROUNDING = 1e-13  # up to twenty products of entries below 3 m, sums below 30 m

positions = st.tuples(*[st.integers(-3000, 3000).map(lambda mm: mm / 1000)] * 3)
turns = st.tuples(*[st.floats(-180, 180, allow_subnormal=False)] * 3)


@st.composite
def trees(draw: st.DrawFn) -> list[tuple[int, tuple[float, ...], tuple[float, ...]]]:
    """Frames 1, 2, ...: each stands in one of lower number, 0 being the world."""
    count = draw(st.integers(1, 20))
    return [(draw(st.integers(0, n)), draw(positions), draw(turns)) for n in range(count)]


def matrix(position: tuple[float, ...], turn: tuple[float, ...]) -> np.ndarray:
    found = np.eye(4)
    # Small letters are turns about fixed axes.
    found[:3, :3] = Rotation.from_euler("xyz", turn, degrees=True).as_matrix()
    found[:3, 3] = position
    return found


def in_world(tree: list[Any], node: int) -> np.ndarray:
    found = np.eye(4)
    while node:
        parent, position, turn = tree[node - 1]
        found = matrix(position, turn) @ found
        node = parent
    return found


def name(node: int) -> str:
    return f"f{node}" if node else "world"


@thorough
@given(trees(), st.randoms(use_true_random=False))
def test_poses_in_the_world_are_the_product_on_the_way_up(tree: list[Any], random: Any) -> None:
    frames = {
        name(n + 1): Placed(name(parent), matrix(position, turn))
        for n, (parent, position, turn) in enumerate(tree)
    }
    order = list(frames)
    random.shuffle(order)
    cell = Cell("drawn", frames={key: frames[key] for key in order})
    for node in range(1, len(tree) + 1):
        fixed = cell.anchored(name(node))
        assert fixed.anchor == "world"
        expected = in_world(tree, node)
        np.testing.assert_allclose(fixed.pose_in_anchor, expected, rtol=0, atol=ROUNDING)


@thorough
@given(trees(), st.sampled_from([("mm-deg", 1000.0), ("in-deg", 1 / 0.0254)]))
def test_an_arm_of_the_cell_stands_where_the_product_says_in_any_units(
    tree: list[Any], units: tuple[str, float]
) -> None:
    """The last frame is the arm's base: read from documents, asked in the frame before it."""

    def pose(position: tuple[float, ...], turn: tuple[float, ...]) -> dict[str, Any]:
        lengths = [x * units[1] for x in position]
        return {
            "position": lengths,
            "orientation": {"form": "xyz-fixed", "values": list(turn)},
        }

    *frames, (parent, position, turn) = tree
    document = {
        "name": "drawn",
        "units": units[0],
        "arms": {"press-arm": {"in": name(parent), "pose": pose(position, turn)}},
        "frames": {
            name(n + 1): {"in": name(each[0]), **pose(each[1], each[2])}
            for n, each in enumerate(frames)
        },
    }
    at = CellAt(read_cell(document), 4)
    arm = read_arm(
        {
            "name": "press-arm",
            "convention": "standard",
            "units": "m-rad",
            "rows": [],
            "cell": "drawn",
        },
        lambda _: at,
    ).arm
    base_in_world = in_world(tree, len(tree))
    # Inches and back leave some more of the last digits than metres.
    within = 10 * ROUNDING
    np.testing.assert_allclose(arm.base_in_world, base_in_world, rtol=0, atol=within)
    for node in range(1, len(tree)):
        expected = np.linalg.inv(in_world(tree, node)) @ base_in_world
        np.testing.assert_allclose(
            arm.base_in_frame(name(node)), expected, rtol=0, atol=100 * ROUNDING
        )
