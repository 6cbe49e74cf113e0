"""What a cell refuses and where, where its things are fixed, and what an arm in it sees."""

from typing import Any

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from kinematics.cell import Cell, Placed
from kinematics.errors import InvalidCell, KinematicsError, TooManyPlaced, UnknownFrame
from kinematics.tolerances import MOST_PLACED

HERE = np.eye(4)


def at(x: float, y: float, z: float, turn_about_z: float = 0.0) -> np.ndarray:
    """Return a pose by hand: a turn about z in degrees, then the position."""
    placed = np.eye(4)
    placed[:3, :3] = Rotation.from_euler("z", turn_about_z, degrees=True).as_matrix()
    placed[:3, 3] = x, y, z
    return placed


ARMS = {
    "loader": Placed("world", at(1.0, 2.0, 0.5, 90)),
    "tilter": Placed("plate", at(0.0, 0.3, 0.0)),
    "hand": Placed("tilter.flange", at(0.0, 0.0, 0.1)),
}
FRAMES = {
    "plate": Placed("world", at(3.0, 0.0, 0.0, 180), number=1),
    "pin": Placed("plate", at(0.1, 0.2, 0.0), number=2),
    "tray": Placed("loader.base", at(0.4, 0.0, 0.0), number=3),
    "part": Placed("pin", at(0.0, 0.0, 0.05)),
    "fixture": Placed("tilter.flange", at(0.0, 0.0, 0.2), number=4),
    "clamp": Placed("fixture", at(0.0, 0.1, 0.0), number=5),
    "eye": Placed("hand.flange", HERE),
}
CELL = Cell("machine-cell", ARMS, FRAMES)


@pytest.mark.parametrize(
    ("node", "anchor", "position"),
    [
        ("world", "world", (0, 0, 0)),
        # plate is turned half round: its x and y run backwards in the world.
        ("pin", "world", (2.9, -0.2, 0)),
        ("part", "world", (2.9, -0.2, 0.05)),
        ("tilter.base", "world", (3.0, -0.3, 0)),
        # the loader's base is turned a quarter: its x is the world's y.
        ("tray", "world", (1.0, 2.4, 0.5)),
        ("loader.flange", "loader.flange", (0, 0, 0)),
        ("fixture", "tilter.flange", (0, 0, 0.2)),
        ("clamp", "tilter.flange", (0, 0.1, 0.2)),
        ("hand.base", "tilter.flange", (0, 0, 0.1)),
        # what is on the hand moves with the hand, and only through it with the tilter.
        ("eye", "hand.flange", (0, 0, 0)),
    ],
)
def test_where_things_are_fixed(node: str, anchor: str, position: Any) -> None:
    fixed = CELL.anchored(node)
    assert fixed.anchor == anchor
    np.testing.assert_allclose(fixed.pose_in_anchor[:3, 3], position, atol=1e-15)


def test_relations_are_what_the_cell_says_and_no_more() -> None:
    told = {(of, within): pose for of, within, pose in CELL.relations()}
    assert len(told) == len(CELL.relations()) == len(ARMS) + len(FRAMES)
    assert told["tilter.base", "plate"] is ARMS["tilter"].pose_in_parent
    assert told["clamp", "fixture"] is FRAMES["clamp"].pose_in_parent
    assert ("eye", "hand.flange") in told


# parents by node: what is said, where it points, the way out
CIRCLES: dict[str, tuple[dict[str, str], str, tuple[str, ...], str]] = {
    "a frame in itself": ({"pin": "pin"}, "pin stands in itself", ("frames", "pin", "in"), "else"),
    "an arm in itself": (
        {"press.base": "press.base"},
        "press.base stands in itself",
        ("arms", "press", "in"),
        "else",
    ),
    "an arm on its own flange": (
        {"press.base": "press.flange"},
        "press.base in press.flange in press.base",
        ("arms", "press", "in"),
        "world",
    ),
    "three frames": (
        {"a": "b", "b": "c", "c": "a"},
        "a in b in c in a",
        ("frames", "a", "in"),
        "world",
    ),
    "a frame that leads into a circle": (
        {"z": "b", "b": "c", "c": "b"},
        "b in c in b",
        ("frames", "b", "in"),
        "world",
    ),
    "by way of a flange": (
        {"jig": "press.flange", "press.base": "jig"},
        "jig in press.flange in press.base in jig",
        ("frames", "jig", "in"),
        "world",
    ),
    "two arms on each other": (
        {"left.base": "right.flange", "right.base": "left.flange"},
        "left.base in right.flange in right.base in left.flange in left.base",
        ("arms", "left", "in"),
        "world",
    ),
}


def cell_of(parents: dict[str, str], **more: Any) -> Cell:
    bases = {node.removesuffix(".base"): p for node, p in parents.items() if "." in node}
    frames = {node: p for node, p in parents.items() if "." not in node}
    return Cell(
        "tested",
        {arm: Placed(parent, HERE) for arm, parent in bases.items()},
        {name: Placed(parent, HERE, **more) for name, parent in frames.items()},
    )


def refusal(parents: dict[str, str], **more: Any) -> KinematicsError:
    with pytest.raises(KinematicsError) as caught:
        cell_of(parents, **more)
    return caught.value


@pytest.mark.parametrize("case", CIRCLES)
def test_a_circle_is_refused_and_said(case: str) -> None:
    parents, say, where, way_out = CIRCLES[case]
    error = refusal(parents)
    assert isinstance(error, InvalidCell)
    assert error.say.endswith(say)
    assert error.where == where
    assert error.value == parents[where[1] if where[0] == "frames" else f"{where[1]}.base"]
    assert way_out in error.way_out


def test_of_a_long_circle_the_beginning_is_said() -> None:
    parents = {f"f{n}": f"f{(n + 1) % 100}" for n in range(100)}
    say = refusal(parents).say
    assert "f0 in f1 in " in say
    assert say.endswith("in ... in f0")
    assert len(say) < 120


@pytest.mark.parametrize(
    ("parents", "where", "way_out"),
    [
        ({"pin": "plaet", "plate": "world"}, ("frames", "pin", "in"), 'did you mean "plate"?'),
        (
            {"pin": "loder.flange", "loader.base": "world"},
            ("frames", "pin", "in"),
            'did you mean "loader.flange"?',
        ),
        ({"press.base": "wold"}, ("arms", "press", "in"), 'did you mean "world"?'),
        (
            {"pin": "base", "loader.base": "world", "tilter.base": "world"},
            ("frames", "pin", "in"),
            "say whose base: loader.base, tilter.base",
        ),
        ({"pin": "flange"}, ("frames", "pin", "in"), "say whose flange: place an arm"),
        ({"pin": "press.base.base"}, ("frames", "pin", "in"), "known here: pin, world"),
        ({"pin": ""}, ("frames", "pin", "in"), "known here: pin, world"),
    ],
)
def test_an_unknown_parent_is_refused_with_the_nearest_name(
    parents: dict[str, str], where: tuple[str, ...], way_out: str
) -> None:
    error = refusal(parents)
    assert isinstance(error, UnknownFrame)
    assert (error.where, error.way_out) == (where, way_out)


def test_two_frames_of_one_number_are_refused() -> None:
    error = refusal({"pin": "world", "tray": "world"}, number=7)
    assert isinstance(error, InvalidCell)
    assert (error.where, error.value) == (("frames", "tray", "number"), 7)


def test_as_many_as_there_may_be_and_one_more() -> None:
    """In a chain, the longest walk there is; it must not be walked anew from each frame."""
    chain = {"f0": "world"} | {f"f{n}": f"f{n - 1}" for n in range(1, MOST_PLACED)}
    # From the far end first, so that each walk could be the longest.
    cell = cell_of(dict(reversed(chain.items())))
    assert cell.anchored(f"f{MOST_PLACED - 1}").anchor == "world"
    error = refusal(chain | {"one-more": "world"})
    assert isinstance(error, TooManyPlaced)
    assert (error.code, error.where) == ("too-large", ("frames",))
    arms = {f"a{n}.base": "world" for n in range(MOST_PLACED + 1)}
    assert refusal(arms).where == ("arms",)


def test_an_unknown_node_is_refused() -> None:
    with pytest.raises(UnknownFrame) as caught:
        CELL.anchored("trai")
    assert caught.value.way_out == 'did you mean "tray"?'


# --- what an arm sees ----------------------------------------------------------------------


def test_an_arm_sees_what_stands_still() -> None:
    seen = CELL.seen_by("loader", [], [])
    np.testing.assert_allclose(seen.base_in_world, ARMS["loader"].pose_in_parent)
    assert list(seen.frames) == ["plate", "pin", "tray", "part"]
    assert {frame.parent for frame in seen.frames.values()} == {"world"}
    np.testing.assert_allclose(seen.frames["pin"].frame_in_parent[:3, 3], (2.9, -0.2, 0))
    assert [frame.number for frame in seen.frames.values()] == [1, 2, 3, None]
    assert set(seen.unseen) == {"fixture", 4, "clamp", 5, "eye"}
    assert seen.unseen["clamp"] == "frame clamp of cell machine-cell moves with tilter.flange"


def test_an_arm_that_is_not_placed_sees_the_frames_and_no_base() -> None:
    seen = CELL.seen_by("stranger", [], [])
    assert seen.base_in_world is None
    assert list(seen.frames) == ["plate", "pin", "tray", "part"]


def test_names_and_numbers_of_the_arm_go_first() -> None:
    seen = CELL.seen_by("loader", ["pin", "clamp"], [1, 4])
    assert list(seen.frames) == ["plate", "tray", "part"]
    assert seen.frames["plate"].number is None
    assert set(seen.unseen) == {"fixture", "eye"}


def test_an_arm_that_is_carried_has_no_place_in_the_world() -> None:
    with pytest.raises(InvalidCell, match=r"hand carried by tilter\.flange") as caught:
        CELL.seen_by("hand", [], [])
    assert (caught.value.where, caught.value.value) == (("cell",), "machine-cell")
