"""Made-up relations between frames of a hall, as a body that asks for one of them.

Shared by tests and benchmarks.
"""

import json
from collections.abc import Callable
from typing import Any

import numpy as np
from scipy.spatial.transform import Rotation

SEED = 20264
SHORT = (40, 50)
LONG = (2000, 10_000)
Ends = tuple[np.ndarray, np.ndarray]


def anywhere(draw: np.random.Generator, frames: int, relations: int) -> Ends:
    """Return ends of relations that connect any frame with any other."""
    more = relations - frames + 1
    inner = np.concatenate([draw.integers(0, np.arange(1, frames)), draw.integers(0, frames, more)])
    outer = np.concatenate([np.arange(1, frames), draw.integers(0, frames - 1, more)])
    return inner, np.where(outer == inner, frames - 1, outer)


def nearby(draw: np.random.Generator, frames: int, relations: int) -> Ends:
    """Return ends of relations along a line, each to one of the next five frames."""
    more = relations - frames + 1
    inner = np.concatenate([np.arange(frames - 1), draw.integers(0, frames - 5, more)])
    outer = np.concatenate([np.arange(1, frames), inner[frames - 1 :] + draw.integers(1, 6, more)])
    return inner, outer


def body_of(
    size: tuple[int, int],
    ends: Callable[..., Ends],
    *,
    hall: int = SEED,
    measured: int = 0,
    **more: Any,
) -> bytes:
    """Return a question about frames in a hall of 10 m, measured to 1 mm and 1 mrad.

    In one ``hall`` the same relations are ``measured`` anew, for the same question.
    """
    draw = np.random.default_rng(hall)
    frames, relations = size
    inner, outer = ends(draw, frames, relations)
    rotations = Rotation.random(frames, random_state=hall)
    places = draw.uniform(0.0, 10_000.0, (frames, 3))
    between = rotations[inner].inv()
    errors = np.random.default_rng([hall, measured]).normal(0.0, 1.0, (relations, 3))
    positions = between.apply(places[outer] - places[inner]) + errors
    turned = between * rotations[outer] * Rotation.from_rotvec(1e-3 * errors[:, ::-1])
    quaternions = turned.as_quat(scalar_first=True)
    form = "quaternion-wxyz"
    given = [
        {
            "of": f"frame-{outer[k]}",
            "in": f"frame-{inner[k]}",
            "pose": {
                "position": positions[k].round(4).tolist(),
                "orientation": {"form": form, "values": quaternions[k].round(9).tolist()},
            },
        }
        for k in range(relations)
    ]
    find = [{"of": f"frame-{frames - 1}", "in": "frame-0"}]
    return json.dumps({"relations": given, "find": find, "units": "mm-deg", **more}).encode()
