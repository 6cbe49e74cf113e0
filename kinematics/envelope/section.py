"""The section of an arm's reach through axis 1, where two joints alone make it.

Idea: an arm that turns about axis 1 reaches the same at every bearing, so its reach is a section of
radius and height, turned. Where the tool point is moved by two more joints only, and they keep it
in one plane through axis 1, that section is the region of a pair and exact. Which joints move the
point, and whether it stays in the plane, is asked of the chain at generic postures rather than read
from the table, so that couplings, linkages and constant links need no case of their own.

Source: regional structure of arms (Milenkovic and Huang 1983). Not covered: tools set off from the
wrist, lateral offsets, arms whose row 1 slides or has other joints coupled to it.
"""

from dataclasses import dataclass

import numpy as np

from kinematics.arm import Arm
from kinematics.envelope.measures import Measure, area_of, swept_volume_of
from kinematics.envelope.pair_region import PairRegion, clipped
from kinematics.envelope.tolerances import IN_ONE_PLANE
from kinematics.jacobian import motion_of
from kinematics.reach.sample_summary import first_axis
from kinematics.reach.travel_region import travel_region
from kinematics.table import FloatArray
from kinematics.task_space import sample_postures


@dataclass(frozen=True)
class Section:
    """Radius (negative behind axis 1) and height that two joints bring the tool point to.

    Attributes
    ----------
    joints : indices of those two; turn : of axis 1, rad, at most a whole one.
    """

    region: PairRegion
    joints: tuple[int, int]
    turn: float

    @property
    def area(self) -> Measure:
        """Area of the section on both sides of axis 1, each place counted once."""
        return area_of(self.region)

    @property
    def volume(self) -> Measure | None:
        """Volume reached; None where axis 1 turns less than once and the arm reaches behind it."""
        if self.turn < 2.0 * np.pi and self._reaches_behind:
            return None
        return swept_volume_of(self.region, self.turn)

    @property
    def _reaches_behind(self) -> bool:
        postures = np.concatenate([part for part, _ in self.region.parts])
        corners = self.region.corners
        heights = np.linspace(corners[0], corners[-1], 513)[1:-1]
        places = self.region.stretches(heights).places
        ends = np.append(self.region.place_of(postures)[0][:, 0], places[np.isfinite(places)])
        return bool(ends.min() < 0.0 < ends.max())


def section_of(arm: Arm, tool_in_flange: FloatArray, *, working: bool = False) -> Section | None:
    """Return the section of an arm; None where it is not that of two joints in one plane.

    Raises
    ------
    KinematicsError : as ``travel_region``.

    Examples
    --------
    A column that carries two links upright, without limits: a ball with a hollow in it.

    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = [Row(JointKind.REVOLUTE, *row, 0.0, 0.0) for row in
    ...         ((0.0, np.pi / 2), (0.5, 0.0), (0.37, 0.0))]
    >>> section = section_of(Arm("upright", Table(Convention.STANDARD, tuple(rows))), np.eye(4))
    >>> round(section.volume.value, 9)
    2.749128144
    """
    limits = travel_region(arm, working=working)
    axis = first_axis(arm)
    samples = sample_postures(arm, 1.0)
    linear = motion_of(arm, samples, tool_in_flange).of_joints[:, :3]
    length = float(np.abs(linear).max(initial=0.0))
    moving = np.nonzero(np.abs(linear).max(axis=(0, 1)) > IN_ONE_PLANE * length)[0].tolist()
    alone = np.count_nonzero(arm.drive_map.matrix[:, 0]) == 1 if arm.joint_count else False
    if axis is None or len(moving) != 3 or moving[0] != 0 or not alone:
        return None
    pair = (moving[1], moving[2])
    if any(
        cut[0] or np.count_nonzero(cut[list(pair)]) < np.count_nonzero(cut)
        for cut in limits.weights
    ):
        return None
    start = np.zeros(arm.joint_count)
    frame = _plane_of(arm, tool_in_flange, samples[:, pair], pair, IN_ONE_PLANE * length)
    if frame is None:
        return None
    origin, outward = axis.point, frame

    def place_of(postures: FloatArray) -> tuple[FloatArray, FloatArray]:
        joint_values = np.tile(start, (len(postures), 1))
        joint_values[:, pair] = postures
        motion = motion_of(arm, joint_values, tool_in_flange)
        both = np.stack([outward, axis.direction])
        places = motion.tool_in_base[:, :3, 3] @ both.T
        places[:, 0] -= origin @ outward
        return places, both @ motion.of_joints[:, :3, pair]

    low, high = limits.lower[list(pair)], limits.upper[list(pair)]
    polygon = np.array([[low[0], low[1]], [high[0], low[1]], [high[0], high[1]], [low[0], high[1]]])
    for cut, least, most in zip(limits.weights, limits.cut_lower, limits.cut_upper, strict=True):
        polygon = clipped(clipped(polygon, cut[list(pair)], most), -cut[list(pair)], -least)
    row = arm.drive_map.driven[pair[1]]
    turn = min(float(limits.upper[0] - limits.lower[0]), 2.0 * np.pi)
    level = arm.drive_map.matrix[row][list(pair)]
    return Section(PairRegion(place_of, polygon, level), pair, turn)


def _plane_of(
    arm: Arm, tool_in_flange: FloatArray, postures: FloatArray, pair: tuple[int, int], off: float
) -> FloatArray | None:
    """Return the direction (3,) away from axis 1 in which the point moves; None if not in one."""
    axis = first_axis(arm)
    assert axis is not None
    joint_values = np.zeros((len(postures), arm.joint_count))
    joint_values[:, pair] = postures
    arms = motion_of(arm, joint_values, tool_in_flange).tool_in_base[:, :3, 3] - axis.point
    arms -= (arms @ axis.direction)[:, None] * axis.direction
    outward = arms[np.argmax((arms * arms).sum(axis=1))]
    size = float(np.sqrt(outward @ outward))
    if size <= off:
        return None
    outward = outward / size
    aside = arms - (arms @ outward)[:, None] * outward
    return None if np.abs(aside).max() > off else outward
