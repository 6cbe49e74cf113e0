"""Known motions of six rows, and which of them a solver finds again."""

import numpy as np

from kinematics.inverse.found import Solver
from kinematics.inverse.landing import jacobians_at, land_all
from kinematics.inverse.screws import Screws

REGULAR = 1e-6
"""Smallest singular value above which a motion must come back."""

AGAIN = 1e-6
"""Radians, or metres, within which it has."""


def drawn_motions(random: np.random.Generator, screws: Screws, count: int) -> np.ndarray:
    """Return motions (count, 6): whole turns, and slides within half a metre."""
    reach = np.where(screws.prismatic, 0.5, np.pi)
    return random.uniform(-reach, reach, size=(count, 6))


def targets_of(screws: Screws, motions: np.ndarray) -> np.ndarray:
    """Return where motions (k, 6), rad and metres, bring the tool, (k, 4, 4), metres."""
    poses = np.empty((len(motions), 4, 4))
    scaled = motions / np.where(screws.prismatic, screws.length, 1.0)
    lines = screws.axis, screws.point, screws.prismatic
    land_all(*lines, screws.tool_at_zero, scaled, poses)
    poses[:, :3, 3] *= screws.length
    return poses


def smallest_values(screws: Screws, motions: np.ndarray) -> np.ndarray:
    """Return the smallest singular value of the Jacobian, lengths over L, at motions (k, 6)."""
    jacobians = np.empty((len(motions), 6, 6))
    scaled = motions / np.where(screws.prismatic, screws.length, 1.0)
    lines = screws.axis, screws.point, screws.prismatic
    jacobians_at(*lines, screws.tool_at_zero, scaled, jacobians)
    return np.linalg.svd(jacobians, compute_uv=False)[:, -1]


def lost(solver: Solver, screws: Screws, motions: np.ndarray) -> np.ndarray:
    """Return which regular motions (k, 6) are not among the solutions of their own poses, (k,)."""
    found = solver.solve(targets_of(screws, motions))
    apart = found.motions - motions[found.target]
    turns = np.where(screws.prismatic, 0.0, 2.0 * np.pi * np.rint(apart / (2.0 * np.pi)))
    again = np.zeros(len(motions), bool)
    again[found.target[np.abs(apart - turns).max(axis=1, initial=0.0) < AGAIN]] = True
    return ~again & (smallest_values(screws, motions) > REGULAR)
