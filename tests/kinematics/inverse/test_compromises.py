"""Postures that miss least: held against scipy, and the sum of squares that proves a miss."""

from dataclasses import replace

import numpy as np
from scipy.optimize import least_squares

from kinematics.inverse.compromises import compromised, compromises, each_row
from kinematics.inverse.found import Found, none_found
from kinematics.inverse.landing import land_all
from kinematics.inverse.measured import POSE, errors_of
from kinematics.inverse.screws import Screws, screws_of
from kinematics.rotations import rotation_about
from tests.kinematics.example_arms import AT_FLANGE, FIVE, arm_of
from tests.kinematics.inverse.seeds import fresh

TOLERANCES = np.array([1e-5, 2e-4])


def off_by(random: np.random.Generator, pose: np.ndarray, tolerances: float) -> np.ndarray:
    """Return a pose shifted and turned by so many tolerances each."""
    shift, about = (side / np.linalg.norm(side) for side in random.normal(size=(2, 3)))
    turned: np.ndarray = pose.copy()
    turned[:3, :3] = rotation_about(about, tolerances * TOLERANCES[1]) @ pose[:3, :3]
    turned[:3, 3] += shift * tolerances * TOLERANCES[0]
    return turned


def squares(screws: Screws, motions: np.ndarray, target: np.ndarray) -> float:
    one = np.zeros(1, np.intp)
    position, angle = errors_of(screws, motions[None], target[None], one, POSE)
    return float((position[0] / TOLERANCES[0]) ** 2 + (angle[0] / TOLERANCES[1]) ** 2)


def poses_of(screws: Screws, motions: np.ndarray) -> np.ndarray:
    poses = np.empty((len(motions), 4, 4))
    lines = screws.axis, screws.point, screws.prismatic
    land_all(*lines, screws.tool_at_zero, motions, poses)
    poses[:, :3, 3] *= screws.length
    return poses


def test_they_miss_no_more_than_what_scipy_finds() -> None:
    random, screws = fresh(), screws_of(arm_of(*FIVE), AT_FLANGE)
    motions = random.uniform(-2.0, 2.0, (20, 5))
    targets = np.array([off_by(random, pose, 0.5) for pose in poses_of(screws, motions)])
    begun = motions + random.normal(scale=1e-3, size=motions.shape)
    each = np.tile(TOLERANCES, (20, 1))
    led = compromises(screws, each_row(5), begun, targets, each, POSE)
    for posture, target, start in zip(led, targets, begun, strict=True):

        def misses(q: np.ndarray, target: np.ndarray = target) -> np.ndarray:
            pose = poses_of(screws, q[None])[0]
            turn = target[:3, :3] @ pose[:3, :3].T
            about = [turn[2, 1] - turn[1, 2], turn[0, 2] - turn[2, 0], turn[1, 0] - turn[0, 1]]
            shift = (target[:3, 3] - pose[:3, 3]) / TOLERANCES[0]
            return np.concatenate([shift, 0.5 * np.array(about) / TOLERANCES[1]])

        best = 2.0 * least_squares(misses, start, x_scale="jac", xtol=1e-15, ftol=1e-15).cost
        assert squares(screws, posture, target) <= best * (1.0 + 1e-6) + 1e-6


def test_what_is_off_by_less_than_tolerance_is_found_and_once() -> None:
    random, screws = fresh(), screws_of(arm_of(*FIVE), AT_FLANGE)
    motions = random.uniform(-2.0, 2.0, (1, 5))
    target = np.array([off_by(random, poses_of(screws, motions)[0], 0.5)])
    begun = motions + random.normal(scale=1e-4, size=(3, 5))
    found: Found = replace(
        none_found(1, 5),
        motions=begun,
        target=np.zeros(3, np.intp),
        position_error=np.ones(3),
        angle_error=np.ones(3),
    )
    led = compromised(found, screws, each_row(5), target, TOLERANCES[None], POSE)
    assert len(led.motions) == 1
    assert led.position_error[0] < TOLERANCES[0]
    assert led.angle_error[0] < TOLERANCES[1]
    assert not led.open[0]
