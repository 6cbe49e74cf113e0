"""Joint speeds for a tool twist: exact where the arm can, damped near singular and saying so.

Left out: joint speed limits (the answer is what the motion takes, not what the arm allows).
"""

from dataclasses import dataclass

import numpy as np

from kinematics.arm import Arm
from kinematics.findings import FINE, Finding
from kinematics.table import FloatArray
from kinematics.task_space import TaskSpace
from kinematics.tolerances import UNMET_TWIST


@dataclass(frozen=True)
class JointSpeeds:
    """Joint speeds for one twist.

    Attributes
    ----------
    speeds : (joints,), rad/s or m/s; the smallest that do it where joints are spare.
    unmet : (6,), the part of the twist that they do not produce, m/s and rad/s.
    findings : that the answer is damped, or that the arm cannot make the twist.
    """

    speeds: FloatArray
    unmet: FloatArray
    findings: tuple[Finding, ...]


def joint_speeds(
    arm: Arm, space: TaskSpace, of_joints: FloatArray, twist: FloatArray
) -> JointSpeeds:
    """Return joint speeds for a tool twist [v, w] in base axes, for one posture.

    All six rows are asked for, scaled by L; directions the arm never has are left unmet. A
    singular value s below the near threshold t is damped by the factor s / (s^2 + d^2) with
    d^2 = (1 - (s / t)^2) t^2, which meets 1 / s at t without a jump and stays below 1 / t. The
    threshold is that of ``space``: an arm judged by its position alone is damped by that.

    Source
    ------
    Damped least squares: Nakamura and Hanafusa 1986; damping grown as the smallest singular
    value falls: Chiaverini 1997, here with the threshold squared as the largest damping.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> from kinematics.task_space import task_space
    >>> row = Row(JointKind.REVOLUTE, 0.5, 0.0, 0.0, 0.0)
    >>> arm = Arm("one", Table(Convention.STANDARD, (row,)))
    >>> turning = np.array([[0.0], [0.5], [0.0], [0.0], [0.0], [1.0]])
    >>> space = task_space(arm, np.eye(4))
    >>> joint_speeds(arm, space, turning, np.array([0.0, 1.0, 0, 0, 0, 2.0])).speeds
    array([2.])
    """
    row_scale = np.array([1.0 / space.length] * 3 + [1.0] * 3)
    scaled = of_joints * row_scale[:, None] * space.joint_scale
    left, values, right = np.linalg.svd(scaled, full_matrices=False)
    near = space.near
    # Motions the arm never has show as singular values at the level of rounding: not damped but
    # left out, so that they do not pass for a posture's trouble.
    wanted = values[: _kept(values, space)]
    damping = np.where(wanted < near, near**2 - wanted**2, 0.0)
    gain = np.zeros_like(values)
    gain[: len(wanted)] = wanted / (wanted**2 + damping)
    speeds = space.joint_scale * (right.T @ (gain * (left.T @ (row_scale * twist))))
    unmet = twist - of_joints @ speeds
    return JointSpeeds(speeds, unmet, _findings(wanted, near, unmet * row_scale, twist * row_scale))


def _kept(values: FloatArray, space: TaskSpace) -> int:
    return min(len(values), space.pose_rank)


def _findings(
    values: FloatArray, near: float, unmet: FloatArray, twist: FloatArray
) -> tuple[Finding, ...]:
    found: list[Finding] = []
    if len(values) and values[-1] < near:
        say = (
            "joint speeds are damped near a singular posture: smallest singular value {measure} "
            "below {threshold}; the tool moves slower than asked in its weak direction"
        )
        found.append(Finding(FINE, "damped", say, float(values[-1]), near))
    asked = float(np.linalg.norm(twist))
    left_over = float(np.linalg.norm(unmet)) / asked if asked else 0.0
    if left_over > UNMET_TWIST:
        say = (
            "these joint speeds leave {measure} of the twist unmet (more than {threshold}): the "
            "arm cannot move that way here"
        )
        found.append(Finding(FINE, "twist-not-met", say, left_over, UNMET_TWIST))
    return tuple(found)
