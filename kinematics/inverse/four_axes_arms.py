"""Which arms turn about one direction only, and what of them their closed form needs.

Idea: across the turning axes an arm is a plane figure: axes are points, slides are directions, and
one slide along the axes does the rest. Five rows with a level wrist are a waist and two links, once
the drive map says that the turns of the three parallel axes cancel.

Source: none; geometry. Not covered: arms with a row more or less, slides that are oblique.
"""

from dataclasses import dataclass

import numpy as np

from kinematics.arm import Arm
from kinematics.inverse.four_axes_postures import Across, Level
from kinematics.inverse.planar import degenerate
from kinematics.inverse.screws import Screws
from kinematics.inverse.tolerances import EXACT_AXES, ROUNDED_ANGLE
from kinematics.kernels.compiler import for_kernel
from kinematics.table import FloatArray
from kinematics.tolerances import AXES_MEET, AXES_PARALLEL


@dataclass(frozen=True)
class FourAxesGeometry:
    """How the turning axes of an arm lie.

    Attributes
    ----------
    say : a sentence for people.
    regime : ``exact``; ``rounded`` where the axes are parallel but for typed digits; ``calibrated``
        where they are not quite, and a no is not proved.
    residual : largest sine between axes that count as parallel, or share of the length between
        axes that count as one.
    """

    say: str
    regime: str
    residual: float


def stays(screws: Screws, structure: Across | Level, last: int) -> bool:
    """Return whether the last turn leaves the tool's point in place, with nothing across after."""
    off = structure.frame[:2] @ (screws.tool_at_zero[:3, 3] - screws.point[last])
    after = screws.prismatic & (np.arange(screws.rows) > last)
    along = np.abs(screws.axis[after] @ structure.frame[2]) > 1.0 - AXES_MEET
    return bool(np.linalg.norm(off) < EXACT_AXES and along.all())


def plane_mechanism(arm: Arm, screws: Screws) -> tuple[Across, FourAxesGeometry, int] | None:
    """Return the plane mechanism of four rows, all driven, and the row that turns last."""
    turning = ~screws.prismatic
    if screws.rows != 4 or arm.joint_count != 4 or not turning.any():
        return None
    up, sine = _common_direction(screws.axis[turning])
    rises = screws.axis @ up
    lifts = np.flatnonzero(screws.prismatic & (np.abs(rises) > AXES_PARALLEL))
    if sine > AXES_PARALLEL or len(lifts) != 1:
        return None
    lift, rows = int(lifts[0]), np.delete(np.arange(4), lifts[0])
    frame = _frame_on(up)
    flat = frame[0] + 1j * frame[1]
    directions, points = screws.axis[rows] @ flat, screws.point[rows] @ flat
    slides = screws.prismatic[rows]
    size = np.abs(directions)
    places = np.where(slides, directions / np.where(slides, size, 1.0), points)
    if degenerate(slides, places, AXES_MEET):
        return None
    drift = abs(complex(screws.axis[lift] @ flat))
    residual = max(sine, drift, float(np.abs(rises[rows][slides]).max(initial=0.0)))
    if residual > AXES_PARALLEL:
        return None
    names = [str(row + 1) for row in np.flatnonzero(turning)]
    said = (
        f"axes {', '.join(names[:-1])} and {names[-1]} are" if names[1:] else "there is one axis,"
    )
    say = f"{said} parallel and row {lift + 1} slides along them: closed form across the axes"
    structure = Across(
        frame,
        lift,
        float(rises[lift]),
        rows,
        slides,
        places,
        np.where(slides, 1.0, np.sign(rises[rows])),
    )
    return structure, _geometry(say, residual), int(np.flatnonzero(turning)[-1])


def level_palletiser(arm: Arm, screws: Screws) -> tuple[Level, FourAxesGeometry, int] | None:
    """Return the level palletiser of five turning rows and four joints, and its last row."""
    if screws.rows != 5 or arm.joint_count != 4 or screws.prismatic.any():
        return None
    up, sine = _common_direction(screws.axis[[0, 4]])
    aside, across_sine = _common_direction(screws.axis[1:4])
    residual = max(sine, across_sine, abs(float(up @ aside)))
    if residual > AXES_PARALLEL:
        return None
    aside -= (aside @ up) * up
    frame = np.array([np.cross(aside, up), aside, up]) / np.linalg.norm(aside)
    signs = np.sign([*screws.axis[:1] @ up, *screws.axis[1:4] @ aside, *screws.axis[4:] @ up])
    kept = signs[1:4] @ arm.drive_map.matrix[1:4]
    upright = frame[2] + 1j * frame[0]
    points = screws.point @ upright
    near, far = points[2] - points[1], points[3] - points[2]
    if np.abs(kept).max() > EXACT_AXES or min(abs(near), abs(far)) < AXES_MEET:
        return None
    say = (
        "axes 2, 3 and 4 are parallel and their turns cancel, so that the wrist stays level: "
        "closed form in the plane of the links"
    )
    structure = Level(
        frame,
        for_kernel(screws.point[0]),
        for_kernel(screws.point[4]),
        complex(points[1] + points[4] - points[3] - points[0]),
        complex(near),
        complex(far),
        float(frame[1] @ (screws.point[4] - screws.point[0])),
        signs,
    )
    return structure, _geometry(say, residual), 4


def _geometry(say: str, residual: float) -> FourAxesGeometry:
    if residual < EXACT_AXES:
        return FourAxesGeometry(say, "exact", residual)
    say = f"{say}, each posture settled on the table, {residual:.1g} rad off"
    regime = "rounded" if residual < ROUNDED_ANGLE else "calibrated"
    return FourAxesGeometry(say, regime, residual)


def _common_direction(axes: FloatArray) -> tuple[FloatArray, float]:
    """Return the mean direction of lines, as the first points, and the largest sine off it."""
    alike = axes * np.where(axes @ axes[0] < 0.0, -1.0, 1.0)[:, None]
    mean = alike.mean(axis=0)
    mean = axes[0].copy() if np.ptp(alike, axis=0).max() == 0.0 else mean / np.linalg.norm(mean)
    return mean, float(np.linalg.norm(np.cross(axes, mean), axis=1).max())


def _frame_on(up: FloatArray) -> FloatArray:
    """Return three unit directions at right angles, rows of (3, 3), the last of them ``up``."""
    first = np.eye(3)[np.argmin(np.abs(up))]
    across = np.cross(up, first)
    across /= np.linalg.norm(across)
    return np.array([np.cross(across, up), across, up])
