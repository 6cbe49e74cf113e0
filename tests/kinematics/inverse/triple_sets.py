"""Postures on purpose: lined-up wrists, stretched elbows, wrist centres on axis 1, exact folds.

Everything is worked out from the lines at zero motion by plain vectors, not by the solver's code.
Sizes are what the caller asks for; each set is drawn anew.
"""

import numpy as np
from scipy.spatial.transform import Rotation

from kinematics.inverse import landing
from kinematics.inverse.screws import Screws

OFF = (0.0, 1e-9, 1e-8, 1e-7, 1e-6, 1e-5, 1e-4, 1e-3)
"""How far from the singular place, rad."""


def tools_at(screws: Screws, motions: np.ndarray) -> np.ndarray:
    """Return tool poses (count, 4, 4) in metres for motions in rad and metres."""
    poses = np.empty((len(motions), 4, 4))
    shares = motions / np.where(screws.prismatic, screws.length, 1.0)
    lines = screws.axis, screws.point, screws.prismatic
    landing.land_all(*lines, screws.tool_at_zero, shares, poses)
    poses[:, :3, 3] *= screws.length
    return poses


def jacobians_at(screws: Screws, motions: np.ndarray) -> np.ndarray:
    """Return Jacobians (count, 6, 6), lengths over L, for motions in rad and metres."""
    shares = motions / np.where(screws.prismatic, screws.length, 1.0)
    jacobians = np.empty((len(motions), 6, 6))
    lines = screws.axis, screws.point, screws.prismatic
    landing.jacobians_at(*lines, screws.tool_at_zero, shares, jacobians)
    return jacobians


def turn_between(screws: Screws, middle: int, one: np.ndarray, other: np.ndarray) -> float:
    """Return by how much axis ``middle`` must turn for vector ``other`` to come beside ``one``."""
    along = screws.axis[middle]
    one, other = (vector - along * (vector @ along) for vector in (one, other))
    return float(np.arctan2(along @ np.cross(other, one), other @ one))


def lined_up(screws: Screws, first: int, motions: np.ndarray, off: float) -> np.ndarray:
    """Return motions with the third axis of a triple beside its first, but for ``off``."""
    lined = motions.copy()
    straight = turn_between(screws, first + 1, screws.axis[first], screws.axis[first + 2])
    lined[:, first + 1] = straight + off
    return lined


def stretched(
    screws: Screws, centre: np.ndarray, motions: np.ndarray, off: float, folded: bool
) -> np.ndarray:
    """Return motions with joint 3 such that axis 2, axis 3 and a point stand in line, but for off.

    For arms whose axes 2 and 3 are parallel; ``centre`` (3,), over L, at zero motion.
    """
    lined = motions.copy()
    upper, fore = screws.point[2] - screws.point[1], centre - screws.point[2]
    lined[:, 2] = turn_between(screws, 2, upper, fore) + (np.pi if folded else 0.0) + off
    return lined


def centre_on_first_axis(
    screws: Screws, centre: np.ndarray, motions: np.ndarray, off: float
) -> np.ndarray:
    """Return motions that bring a point onto axis 1, but for turning it off by joint 2.

    For arms whose axes 1 and 2 meet, with all links in one plane.
    """
    onto = motions.copy()
    # Axes 1 and 2 meet at the point of axis 2: its own line crosses axis 1 there.
    shoulder = screws.point[1]
    for row in onto:
        turn = Rotation.from_rotvec(screws.axis[2] * row[2])
        elbow = screws.point[2] + turn.apply(centre - screws.point[2])
        side = screws.axis[0] * (1.0 if row[1] > 0.0 else -1.0)
        row[1] = turn_between(screws, 1, side, elbow - shoulder) + off
    return onto


def folds(rng: np.random.Generator, screws: Screws, motions: np.ndarray) -> np.ndarray:
    """Return motions on the way to others at which the Jacobian's determinant is 0.

    The determinant is bisected between two postures where its sign differs, to the last digit.
    """
    others = rng.permutation(motions)
    ends = [np.linalg.det(jacobians_at(screws, each)) for each in (motions, others)]
    crossing = ends[0] * ends[1] < 0.0
    low, high = motions[crossing].copy(), others[crossing].copy()
    sign = np.sign(ends[0][crossing])
    for _ in range(60):
        middle = 0.5 * (low + high)
        same = np.sign(np.linalg.det(jacobians_at(screws, middle))) == sign
        low[same], high[~same] = middle[same], middle[~same]
    return low
