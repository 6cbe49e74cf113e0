"""The nearest named frame, against each frame's own place in the world, one by one."""

import numpy as np
import pytest

from kinematics.arm import BASE, WORLD, Arm, NamedFrame
from kinematics.nearest_frame import FramePlaces
from kinematics.transforms import inverse
from tests.kinematics.example_arms import PLANAR, arm_of, random_pose

LENGTH_CLOSE = 1e-12
"""Metres: some products of 4 x 4 in doubles, of places within some metres."""


def moved(x: float, y: float, z: float) -> np.ndarray:
    pose = np.eye(4)
    pose[:3, 3] = x, y, z
    return pose


def arm_with(count: int, random: np.random.Generator) -> Arm:
    """An arm turned somehow in the world, with frames in world, base, and in one another."""
    frames: dict[str, NamedFrame] = {}
    for number in range(count):
        parent = str(random.choice([WORLD, BASE, *frames]))
        frames[f"f{number}"] = NamedFrame(random_pose(random), parent)
    return arm_of(*PLANAR, frames=frames, base_in_world=random_pose(random))


@pytest.mark.parametrize("count", [1, 2, 7, 40])
def test_against_every_frame_by_itself(count: int) -> None:
    random = np.random.default_rng(20261202 + count)
    arm = arm_with(count, random)
    places = FramePlaces(arm)
    for _ in range(50):
        point_in_base = random.normal(size=3) * 2.0
        point_in_world = (arm.base_in_world @ [*point_in_base, 1.0])[:3]
        frames = {name: arm.frame_in_world(name) for name in arm.frames}
        far = {name: np.linalg.norm(point_in_world - at[:3, 3]) for name, at in frames.items()}
        near = places.nearest(point_in_base)
        assert near is not None
        assert near.name == min(far, key=far.__getitem__)
        assert near.distance == pytest.approx(far[near.name], abs=LENGTH_CLOSE)
        at = frames[near.name]
        in_frame = (np.linalg.inv(at) @ [*point_in_world, 1.0])[:3]
        assert near.position_in_frame == pytest.approx(in_frame, abs=LENGTH_CLOSE)
        assert near.height == pytest.approx(point_in_world[2] - at[2, 3], abs=LENGTH_CLOSE)


def test_a_point_told_in_another_frame_is_the_same_point() -> None:
    random = np.random.default_rng(7)
    arm = arm_with(6, random)
    places = FramePlaces(arm)
    for name in (BASE, WORLD, *arm.frames):
        frame_in_base = inverse(arm.base_in_frame(name))
        position = random.normal(size=3)
        told = places.nearest(position, frame_in_base)
        plain = places.nearest(frame_in_base[:3, :3] @ position + frame_in_base[:3, 3])
        assert told is not None
        assert plain is not None
        assert told.name == plain.name
        assert told.distance == pytest.approx(plain.distance, abs=LENGTH_CLOSE)


@pytest.mark.parametrize(
    ("place", "upright", "height"),
    [
        ((0.0, 0.0, 0.5), True, 0.5),
        ((0.0, 0.0, -0.5), True, -0.5),
        ((0.5, 0.0, 0.0), False, 0.0),
        # 29 deg and 31 deg off upright.
        ((0.5 * np.tan(np.radians(29.0)), 0.0, 0.5), True, 0.5),
        ((0.5 * np.tan(np.radians(31.0)), 0.0, 0.5), False, 0.5),
        ((0.0, 0.0, 0.0), True, 0.0),
    ],
)
def test_above_is_up_in_the_world(
    place: tuple[float, float, float], upright: bool, height: float
) -> None:
    """The base lies on its side: up in the world is not along its z."""
    base = np.array([[1.0, 0, 0, 3], [0, 0, -1, 2], [0, 1, 0, 1], [0, 0, 0, 1]])
    jig = NamedFrame(moved(1.0, 2.0, 3.0), WORLD)
    arm = arm_of(*PLANAR, frames={"jig": jig}, base_in_world=base)
    point_in_world = np.array([1.0, 2.0, 3.0]) + place
    point_in_base = (np.linalg.inv(base) @ [*point_in_world, 1.0])[:3]
    near = FramePlaces(arm).nearest(point_in_base)
    assert near is not None
    assert near.is_upright == upright
    assert near.height == pytest.approx(height, abs=LENGTH_CLOSE)


def test_of_equally_near_ones_the_first_named() -> None:
    frames = {
        "right": NamedFrame(moved(1.0, 0.0, 0.0), BASE),
        "left": NamedFrame(moved(-1.0, 0.0, 0.0), BASE),
    }
    near = FramePlaces(arm_of(*PLANAR, frames=frames)).nearest(np.zeros(3))
    assert near is not None
    assert near.name == "right"


def test_an_arm_without_frames_has_none() -> None:
    assert FramePlaces(arm_of(*PLANAR)).nearest(np.zeros(3)) is None
