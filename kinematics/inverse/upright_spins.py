"""Arms that turn about one direction, with a tool aslant to it and the turn about tool z left free.

Idea: such an arm cannot tilt its tool, so the direction of its axes, seen from the tool, is always
the same. A target seen from the tool may be turned about tool z as it likes, which carries that
direction around a cone: it comes to where the arm has it at one turn, or never, and then is off by
the difference of the two angles to tool z. With that turn the target is a pose, and the closed form
for poses (four_axes.py) answers: a no stays as good as it is there.

Source: none; geometry.
Not covered: tools whose z axis runs along the arm's axes: every turn serves, and one is chosen
elsewhere (reach/spins.py).
"""

from dataclasses import dataclass, replace

import numpy as np

from kinematics.arm import Arm
from kinematics.inverse.found import Found
from kinematics.inverse.four_axes import FourAxes, four_axes_of
from kinematics.inverse.four_axes_arms import FourAxesGeometry
from kinematics.inverse.measured import DIRECTION, POSE, errors_of
from kinematics.inverse.screws import Screws
from kinematics.table import FloatArray
from kinematics.tolerances import AXES_WELL_ASLANT


@dataclass(frozen=True, eq=False)
class UprightSpins:
    """A solver for places and directions, of an arm that turns about one direction only.

    Attributes
    ----------
    inner : answers for poses. up : (3,), the direction of the axes, seen from the tool.
    """

    inner: FourAxes
    screws: Screws
    up: FloatArray
    proof: str = "closed-form"

    @property
    def geometry(self) -> FourAxesGeometry:
        """How the axes lie, and that one turn about tool z is taken."""
        geometry = self.inner.geometry
        say = f"with the one turn about tool z that needs no tilt, {geometry.say}"
        return replace(geometry, say=say)

    def turned(self, targets: FloatArray) -> FloatArray:
        """Return targets (m, 4, 4) with the turn about tool z that asks for the least tilt."""
        direction = self.screws.tool_at_zero[:3, :3] @ self.up
        seen = np.swapaxes(targets[:, :3, :3], 1, 2) @ direction
        turn = np.arctan2(seen[:, 1], seen[:, 0]) - np.arctan2(self.up[1], self.up[0])
        cosine, sine = np.cos(turn)[:, None], np.sin(turn)[:, None]
        turned = targets.copy()
        x, y = targets[:, :3, 0], targets[:, :3, 1]
        turned[:, :3, 0], turned[:, :3, 1] = x * cosine + y * sine, y * cosine - x * sine
        return turned

    def solve(self, targets: FloatArray) -> Found:
        """Return all postures for targets (m, 4, 4), the tool in base, metres.

        Errors of the angle are those of tool z.
        """
        found = self.inner.solve(self.turned(targets))
        position, angle = errors_of(self.screws, found.motions, targets, found.target, DIRECTION)
        return replace(found, position_error=position, angle_error=angle)

    def nearest(self, targets: FloatArray) -> FloatArray:
        """Return row motions (m, rows) that bring the tool near, turned with the least tilt."""
        return self.inner.nearest(self.turned(targets))


def upright_spins_of(arm: Arm, tool_in_flange: FloatArray, screws: Screws) -> UprightSpins | None:
    """Return the solver for such an arm with a tool aslant, or None for any other.

    Examples
    --------
    Two links, a slide and a last turn, all upright, and a tool that leans forward:

    >>> from kinematics.inverse.screws import screws_of
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> turning, sliding = (Row(kind, 0.3, 0.0, 0.0, 0.0) for kind in JointKind)
    >>> arm = Arm("four", Table(Convention.STANDARD, (turning, turning, sliding, turning)))
    >>> leaning = np.eye(4)
    >>> leaning[:3, :3] = [[0, 0, 1], [0, 1, 0], [-1, 0, 0]]
    >>> solver = upright_spins_of(arm, leaning, screws_of(arm, leaning))
    >>> target = np.eye(4)
    >>> target[:3, :3], target[:3, 3] = [[0, 0, 1], [1, 0, 0], [0, 1, 0]], [0.9, 0.3, 0.1]
    >>> solver.solve(target[None]).angle_error.round(12)
    array([0., 0.])
    """
    inner = four_axes_of(arm, tool_in_flange, POSE)
    if inner is None:
        return None
    up = screws.tool_at_zero[:3, :3].T @ inner.structure.frame[2]
    aslant = bool(np.hypot(up[0], up[1]) > AXES_WELL_ASLANT)
    return UprightSpins(inner, screws, up) if aslant else None
