"""A rotation parted into its turn about a line and the tilt that is left."""

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from kinematics.inverse.four_axes_postures import twist_and_tilt
from tests.kinematics.inverse.seeds import fresh


def posed(rotation: Rotation) -> np.ndarray:
    pose = np.eye(4)
    pose[:3, :3] = rotation.as_matrix()
    return pose


def test_a_turn_and_a_tilt_come_apart_again() -> None:
    random = fresh()
    for _ in range(200):
        line = random.normal(size=3)
        line /= np.linalg.norm(line)
        across = np.cross(line, random.normal(size=3))
        across /= np.linalg.norm(across)
        turn, tilt = random.uniform(-3.1, 3.1), random.uniform(0.0, 3.1)
        start = Rotation.random(rng=random)
        moved = Rotation.from_rotvec(tilt * across) * Rotation.from_rotvec(turn * line)
        told = twist_and_tilt(posed(start), posed(moved * start), line)
        assert told == (pytest.approx(turn, abs=1e-12), pytest.approx(tilt, abs=1e-12))


def test_no_other_turn_comes_nearer() -> None:
    random = fresh()
    line = np.array([0.6, 0.0, 0.8])
    target = Rotation.random(rng=random)
    turn, tilt = twist_and_tilt(np.eye(4), posed(target), line)
    assert (target * Rotation.from_rotvec(-turn * line)).magnitude() == pytest.approx(tilt)
    for other in np.linspace(-np.pi, np.pi, 100):
        left = (target * Rotation.from_rotvec(-other * line)).magnitude()
        assert left > tilt - 1e-12
