"""A solver whose solutions are held against more, or less, of a target than it looked at.

Three joints bring a point to its place; where the tool then points is whatever it is. Whether that
is the pose asked for is measured afterwards, through the chain: an arm that cannot turn as it likes
gets within the tolerance or tells by how much it misses.

Source: none. Not covered: better compromises, which miss the place to turn less.
"""

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.found import Found, Geometry, Solver
from kinematics.inverse.landing import gaps_to, land_all
from kinematics.inverse.screws import Screws
from kinematics.kernels.compiler import for_kernel
from kinematics.table import FloatArray

POSE, POSITION, DIRECTION = "pose", "position", "position+direction"
"""What of a target is asked for: all of it; its point; its point and where tool z points."""


def errors_of(
    screws: Screws,
    motions: FloatArray,
    targets: FloatArray,
    target: NDArray[np.intp],
    task: str,
) -> tuple[FloatArray, FloatArray]:
    """Return by how much motions (k, rows), rad and m, miss their targets: metres and rad, (k,).

    Parameters
    ----------
    targets : (m, 4, 4), the tool in base, metres; target : (k,), which of them.
    task : what counts of the turn: all of POSE, tool z of DIRECTION, nothing of POSITION.

    Examples
    --------
    >>> screws = Screws(np.eye(3)[:1], np.zeros((1, 3)), np.array([False]), np.eye(4), 1.0)
    >>> turned, one = np.array([[0.1]]), np.zeros(1, np.intp)
    >>> errors_of(screws, turned, np.eye(4)[None], one, POSE)
    (array([0.]), array([0.1]))
    """
    poses, gaps = np.empty((len(motions), 4, 4)), np.empty((len(motions), 2))
    scaled = for_kernel(screws.scaled(targets))
    lines = for_kernel(screws.axis), for_kernel(screws.point), screws.prismatic
    moved = for_kernel(motions / np.where(screws.prismatic, screws.length, 1.0))
    land_all(*lines, for_kernel(screws.tool_at_zero), moved, poses)
    gaps_to(poses, scaled, target.astype(np.float64), gaps)
    position, angle = gaps[:, 0] * screws.length, gaps[:, 1]
    if task == POSITION:
        angle = np.zeros(len(gaps))
    elif task == DIRECTION:
        wanted, shown = scaled[target, :3, 2], poses[:, :3, 2]
        across = np.linalg.norm(np.cross(shown, wanted), axis=1)
        angle = np.arctan2(across, (shown * wanted).sum(axis=1))
    return position, angle


def wrapped(motions: FloatArray, prismatic: NDArray[np.bool_]) -> FloatArray:
    """Return row motions (k, rows) with turns in (-pi, pi], slides as they are.

    Examples
    --------
    >>> wrapped(np.array([[4.0, 4.0]]), np.array([False, True])).round(3)
    array([[-2.283,  4.   ]])
    """
    turned = motions - 2.0 * np.pi * np.ceil((motions - np.pi) / (2.0 * np.pi))
    return np.where(prismatic, motions, turned)


@dataclass(frozen=True, eq=False)
class Measured:
    """A solver of the same rows, its solutions measured by ``task``.

    Attributes
    ----------
    inner : finds solutions for a part of what is asked. screws : the arm.
    """

    inner: Solver
    screws: Screws
    task: str

    @property
    def proof(self) -> str:
        return self.inner.proof

    @property
    def geometry(self) -> Geometry:
        return self.inner.geometry

    def solve(self, targets: FloatArray) -> Found:
        """Return what the solver finds for targets (m, 4, 4), errors by the task."""
        found = self.inner.solve(targets)
        position, angle = errors_of(self.screws, found.motions, targets, found.target, self.task)
        return replace(found, position_error=position, angle_error=angle)

    def nearest(self, targets: FloatArray) -> FloatArray:
        """Return row motions (m, rows) that bring the tool near, as the solver sees it."""
        return self.inner.nearest(targets)
