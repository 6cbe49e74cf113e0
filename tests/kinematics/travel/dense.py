"""Straight moves by brute force: all solutions at dense places, put together to ways by nearness.

Shares nothing with how moves are followed: closed forms give every solution at each place, and a
way goes on with the one nearest to where it was heading. Where that is a jump the places are taken
a hundred times as dense, down to a tenth of a micrometre; a jump that stays ends the branch. For
six joints whose rows move by one joint value each.
"""

from dataclasses import dataclass

import numpy as np

from kinematics.arm import Arm
from kinematics.inverse.solve import Method, method_of
from kinematics.rotations import rotation_from_vector
from kinematics.travel.lines import StraightLine
from kinematics.travel_limits import limits_of

JUMP = 0.15
"""Radians between neighbouring places that are no step of one way."""
FINEST = 1e-7
"""Metres, or radians, between places below which a jump is one."""
FINER = 100

ARRIVES, LEAVES_TRAVEL, ENDS = "arrives", "travel", "ends"


@dataclass
class Dense:
    """What brute force tells: how the way ends, at which share, and the last joint values."""

    how: str
    share: float
    joint_values: np.ndarray


class BruteForce:
    """Ways of one arm with one tool."""

    def __init__(self, arm: Arm, tool: np.ndarray) -> None:
        self.method: Method = method_of(arm, tool)
        assert self.method.complete
        assert arm.joint_count == 6
        self.arm, self.limits = arm, limits_of(arm)
        self.inverse = np.linalg.inv(arm.drive_map.matrix)

    def solutions(self, way: StraightLine, shares: np.ndarray) -> list[np.ndarray]:
        """Return all joint values, each within a turn, at each share."""
        poses = np.tile(np.eye(4), (len(shares), 1, 1))
        poses[:, :3, :3] = rotation_from_vector(shares[:, None] * way.turn) @ way.start[:3, :3]
        poses[:, :3, 3] = way.start[:3, 3] + shares[:, None] * way.shift
        found = self.method.solve(poses, np.zeros(6))
        values = found.motions @ self.inverse.T
        ends = np.cumsum(found.count_per_target())
        return np.split(values, ends[:-1])

    def room(self, q: np.ndarray) -> float:
        """Return what is left of the travel that is exceeded first, rad; negative beyond."""
        limits = self.limits
        value = limits.weights @ q + limits.constants
        left = np.minimum(value - limits.lower, limits.upper - value)
        return float(left[~limits.working].min())

    def follow(self, way: StraightLine, start: np.ndarray, spacing: float = 2e-4) -> Dense:
        """Follow a line from joint values, at places ``spacing`` apart (m, rad)."""
        size = max(way.length, way.angle)
        shares = np.linspace(0.0, 1.0, int(np.ceil(size / spacing)) + 1)
        return self._along(way, shares, start, np.zeros(6), size)

    def _along(
        self, way: StraightLine, shares: np.ndarray, q: np.ndarray, rate: np.ndarray, size: float
    ) -> Dense:
        at = shares[0]
        for share, found in zip(shares[1:], self.solutions(way, shares[1:]), strict=True):
            step = share - at
            ahead = q + step * rate
            nearest, apart = _nearest(found, ahead)
            if nearest is None or apart > JUMP or self.room(nearest) < -1e-7:
                if step * size <= FINEST:
                    how = ENDS if nearest is None or apart > JUMP else LEAVES_TRAVEL
                    return Dense(how, float(share), q)
                finer = np.linspace(at, share, FINER + 1)
                inner = self._along(way, finer, q, rate, size)
                if inner.how != ARRIVES:
                    return inner
                nearest = inner.joint_values
            rate = (nearest - q) / step
            # Near a fold rates grow without end; no farther ahead than the jump that ends it.
            rate *= min(1.0, 0.5 * JUMP / max(np.abs(rate * step).max(), 1e-12))
            q, at = nearest, share
        return Dense(ARRIVES, 1.0, q)


def _nearest(found: np.ndarray, ahead: np.ndarray) -> tuple[np.ndarray | None, float]:
    """Return the solution nearest to joint values, whole turns included, and how far it is."""
    if not len(found):
        return None, np.inf
    turned = found + 2.0 * np.pi * np.round((ahead - found) / (2.0 * np.pi))
    apart = np.abs(turned - ahead).max(axis=1)
    best = int(np.argmin(apart))
    return turned[best], float(apart[best])
