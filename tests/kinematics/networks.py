"""Random networks of frames, their truth known, for the tests of frames and estimates.

Left out: what is expected of them.
"""

from dataclasses import dataclass

import numpy as np
from scipy.spatial.transform import Rotation

from kinematics.frames import FrameGraph


@dataclass(frozen=True)
class RandomNetwork:
    """Frames at random places, and relations between them, off the truth by random errors."""

    frame_in_hall: np.ndarray
    inner: np.ndarray
    outer: np.ndarray
    of_in: np.ndarray

    def graph(self, without: int | None = None) -> FrameGraph:
        kept = [k for k in range(len(self.inner)) if k != without]
        return FrameGraph(
            [f"frame-{self.outer[k]}" for k in kept],
            [f"frame-{self.inner[k]}" for k in kept],
            self.of_in[kept],
        )


def rigid(rotation: Rotation, position: np.ndarray) -> np.ndarray:
    poses = np.zeros((len(position), 4, 4)) + np.eye(4)
    poses[:, :3, :3] = rotation.as_matrix()
    poses[:, :3, 3] = position
    return poses


def random_network(
    frames: int, relations: int, error: float = 0.0, seed: int = 0, spread: float = 2.0
) -> RandomNetwork:
    """Return a network that hangs together; errors in metres and radians are of one size."""
    draw = np.random.default_rng(seed)
    places = draw.normal(0.0, spread, (frames, 3))
    truth = rigid(Rotation.random(frames, random_state=seed), places)
    more = relations - frames + 1
    inner = [*(int(draw.integers(0, k)) for k in range(1, frames))]
    inner += draw.integers(0, frames, more).tolist()
    outer = [*range(1, frames), *draw.integers(0, frames - 1, more).tolist()]
    order = draw.permutation(relations)
    one, other = np.array(inner)[order], np.array(outer)[order]
    other = np.where(other == one, frames - 1, other)
    one = np.where(other == one, 0, one)
    between = np.linalg.inv(truth[one]) @ truth[other]
    errors = draw.normal(0.0, 1.0, (relations, 6)) * error
    turned = between[:, :3, :3] @ Rotation.from_rotvec(errors[:, 3:]).as_matrix()
    between[:, :3, :3] = turned
    between[:, :3, 3] += errors[:, :3]
    return RandomNetwork(truth, one, other, between)
