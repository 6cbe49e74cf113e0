"""A second chain to hold the first against: elementary 4 x 4 motions, multiplied row by row.

Plain lists and any kind of number, so that it runs in complex numbers (for derivatives without
differences) and in 50 digits (mpmath). It shares no line with the package: offsets are added to
the joint values, each convention has its own product, nothing is regrouped.

Source: the two link transforms as in Spong, Hutchinson and Vidyasagar, chapter 3 (standard) and
Craig, chapter 3 (modified), both from memory; complex step: Squire and Trapp 1998.
"""

import cmath
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

import mpmath
import numpy as np

from kinematics.arm import Arm
from kinematics.table import Convention

Matrix = list[list[Any]]
STEP = 1e-30  # its square is below every double, so the derivative has no truncation error


@dataclass(frozen=True)
class Arithmetic:
    """One kind of number and its sine and cosine."""

    number: Callable[[Any], Any]
    cos: Callable[[Any], Any]
    sin: Callable[[Any], Any]


COMPLEX = Arithmetic(complex, cmath.cos, cmath.sin)
DIGITS = Arithmetic(mpmath.mpf, mpmath.cos, mpmath.sin)


def product(first: Matrix, second: Matrix) -> Matrix:
    span = range(4)
    return [[sum(first[i][k] * second[k][j] for k in span) for j in span] for i in span]


def identity() -> Matrix:
    return [[1 if i == j else 0 for j in range(4)] for i in range(4)]


def turn(axis: str, angle: Any, kind: Arithmetic) -> Matrix:
    cos, sin = kind.cos(angle), kind.sin(angle)
    if axis == "z":
        return [[cos, -sin, 0, 0], [sin, cos, 0, 0], [0, 0, 1, 0], [0, 0, 0, 1]]
    return [[1, 0, 0, 0], [0, cos, -sin, 0], [0, sin, cos, 0], [0, 0, 0, 1]]


def slide(axis: str, length: Any) -> Matrix:
    moved = identity()
    moved["xyz".index(axis)][3] = length
    return moved


def variables(arm: Arm, joint_values: Sequence[Any], kind: Arithmetic) -> list[Any]:
    """Return offset + direction q + sum(ratio q_axis) of each row."""
    waiting = list(joint_values)
    of_row = {
        number: waiting.pop(0)
        for number, row in enumerate(arm.table.rows, start=1)
        if not row.passive
    }
    moved = []
    for number, row in enumerate(arm.table.rows, start=1):
        value = kind.number(row.theta if row.joint == "revolute" else row.d)
        if not row.passive:
            value = value + row.direction * of_row[number]
        for coupling in row.couplings:
            value = value + kind.number(coupling.ratio) * of_row[coupling.axis]
        moved.append(value)
    return moved


def link_frames(arm: Arm, joint_values: Sequence[Any], kind: Arithmetic = COMPLEX) -> list[Matrix]:
    """Return frames 0 ... n in the base, each the product of all link transforms before it."""
    frames = [identity()]
    values = variables(arm, joint_values, kind)
    for row, variable in zip(arm.table.rows, values, strict=True):
        revolute = row.joint == "revolute"
        theta = variable if revolute else kind.number(row.theta)
        along = kind.number(row.d) if revolute else variable
        about_z = product(turn("z", theta, kind), slide("z", along))
        a, alpha = kind.number(row.a), kind.number(row.alpha)
        if arm.table.convention is Convention.STANDARD:
            link = product(about_z, product(slide("x", a), turn("x", alpha, kind)))
        else:
            link = product(product(turn("x", alpha, kind), slide("x", a)), about_z)
        frames.append(product(frames[-1], link))
    return frames


def tool_pose(
    arm: Arm, joint_values: Sequence[Any], tool: np.ndarray, kind: Arithmetic = COMPLEX
) -> Matrix:
    """Return the tool in the base."""
    numbers = [[kind.number(float(entry)) for entry in row] for row in tool]
    return product(link_frames(arm, joint_values, kind)[-1], numbers)


def exact_tool_pose(arm: Arm, joint_values: np.ndarray, tool: np.ndarray) -> np.ndarray:
    """Return the tool in the base, computed with 50 digits and rounded once."""
    with mpmath.workdps(50):
        values = [mpmath.mpf(float(value)) for value in joint_values]
        posed = tool_pose(arm, values, tool, DIGITS)
        return np.array([[float(entry) for entry in row] for row in posed])


def exact_link_frames(arm: Arm, joint_values: np.ndarray) -> np.ndarray:
    """Return frames 0 ... n in the base, computed with 50 digits and rounded once."""
    with mpmath.workdps(50):
        values = [mpmath.mpf(float(value)) for value in joint_values]
        frames = link_frames(arm, values, DIGITS)
        return np.array([[[float(entry) for entry in row] for row in frame] for frame in frames])


def stepped_jacobian(arm: Arm, joint_values: np.ndarray, tool: np.ndarray) -> np.ndarray:
    """Return the Jacobian (6, joints) in base axes by complex step through the plain chain."""
    columns = []
    for joint in range(len(joint_values)):
        values = [complex(float(value)) for value in joint_values]
        values[joint] += 1j * STEP
        posed = np.array(tool_pose(arm, values, tool))
        rate, rotation = posed.imag / STEP, posed.real[:3, :3]
        spin = rate[:3, :3] @ rotation.T
        columns.append([*rate[:3, 3], spin[2, 1], spin[0, 2], spin[1, 0]])
    return np.array(columns).reshape(len(joint_values), 6).T
