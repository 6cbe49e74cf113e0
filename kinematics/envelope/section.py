"""The section of an arm's reach through axis 1, where two joints alone make it.

Idea: an arm that turns about axis 1 reaches the same at every bearing, so its reach is a section of
radius and height, turned. Where the point is moved by two more joints only, and they keep it in one
plane along axis 1, that section is the region of a pair and exact. A plane that passes axis 1 at a
distance makes every radius the hypotenuse over that distance.

Source: regional structure of arms (Milenkovic and Huang 1983). Not covered: tools set off from the
wrist, arms whose row 1 slides or has other joints coupled to it.
"""

from dataclasses import dataclass

import numpy as np

from kinematics.arm import Arm
from kinematics.envelope.measures import Measure, folded_area_of, swept_volume_of
from kinematics.envelope.pair_of_arm import PointMotion, pair_region_of, point_motion
from kinematics.envelope.pair_region import PairRegion
from kinematics.reach.sample_summary import FirstAxis, first_axis
from kinematics.table import FloatArray

_HALVINGS = 56
"""Of a way between two postures: down to the last bit of a double."""


@dataclass(frozen=True)
class Section:
    """Distance (negative behind axis 1) and height that two joints bring the point to.

    Attributes
    ----------
    region : in the plane that the two joints keep the point in; axis 1 at its place 0.
    aside : distance of that plane from axis 1, m, at least 0.
    outward : (3,), direction of the plane's first coordinate in the base at joint 1 = 0.
    sideways : (3,), direction from axis 1 to the plane, of length ``aside``.
    turn : of axis 1, rad, at most a whole one; pair : the two joints.
    """

    region: PairRegion
    aside: float
    outward: FloatArray
    sideways: FloatArray
    turn: float
    pair: tuple[int, ...]

    @property
    def area(self) -> Measure:
        """Area of the radii and heights reached, each place counted once."""
        return folded_area_of(self.region, self.aside)

    @property
    def volume(self) -> Measure | None:
        """Volume reached, each place counted once; None where only ``swept`` bounds it.

        That is where the plane passes axis 1 at a distance, the pair reaches behind it, and the
        turn is no whole one: then the same place reached from before and from behind is not half a
        turn apart.
        """
        if self.aside and self.turn < 2.0 * np.pi and self.reaches_behind:
            return None
        return swept_volume_of(self.region, self.turn)

    @property
    def swept(self) -> tuple[Measure, Measure]:
        """Volumes that every place takes up at least and at most: over the turn, a whole turn."""
        whole = swept_volume_of(self.region, 2.0 * np.pi)
        share = self.turn / (2.0 * np.pi)
        return Measure(whole.value * share, whole.error_bound * share), whole

    def extreme_postures(self) -> FloatArray:
        """Return postures of the pair of the least and the greatest radius and height, (4, 2)."""
        (behind, before), (lowest, highest) = self.region.ends()
        (left, right), _ = self.region.place_of(np.stack([behind, before]))[0].T
        farthest = before if right >= -left else behind
        nearest = behind if right >= -left else before
        if left < 0.0 < right:
            nearest = self._on_axis(behind, before)
        return np.stack([nearest, farthest, lowest, highest])

    def _on_axis(self, behind: FloatArray, before: FloatArray) -> FloatArray:
        """Return the posture on the way between two at which the pair passes axis 1."""
        for _ in range(_HALVINGS):
            middle = 0.5 * (behind + before)
            if self.region.place_of(middle[None])[0][0, 0] < 0.0:
                behind = middle
            else:
                before = middle
        return 0.5 * (behind + before)

    @property
    def reaches_behind(self) -> bool:
        """Whether the pair reaches both sides of axis 1."""
        corners = self.region.corners
        heights = np.linspace(corners[0], corners[-1], 513)[1:-1]
        places = self.region.stretches(heights).places
        postures = np.concatenate([part for part, _ in self.region.parts])
        ends = np.append(self.region.place_of(postures)[0][:, 0], places[np.isfinite(places)])
        size = np.abs(ends).max()
        return bool(ends.min() < -1e-12 * size and ends.max() > 1e-12 * size)


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
    axis = first_axis(arm)
    if axis is None:
        return None
    return section_from(point_motion(arm, tool_in_flange, working=working), axis)


def turn_of(motion: PointMotion) -> float:
    """Return the bearings joint 1 can turn to, rad, at most a whole turn.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table, Travel
    >>> row = Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0, travel=Travel(-1.0, 1.5))
    >>> turn_of(point_motion(Arm("one", Table(Convention.STANDARD, (row,))), np.eye(4)))
    2.5
    """
    return min(float(motion.limits.upper[0] - motion.limits.lower[0]), 2.0 * np.pi)


def section_from(motion: PointMotion, axis: FirstAxis) -> Section | None:
    """Return what ``section_of`` does of a motion already looked at.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = [Row(JointKind.REVOLUTE, *row, 0.0, 0.0) for row in
    ...         ((0.0, np.pi / 2), (0.5, 0.0), (0.3, 0.0))]
    >>> arm = Arm("upright", Table(Convention.STANDARD, tuple(rows)))
    >>> axis = FirstAxis(np.zeros(3), np.array([0.0, 0.0, 1.0]))
    >>> section_from(point_motion(arm, np.eye(4)), axis).aside
    0.0
    """
    if not turns_alone(motion) or 0 not in motion.movers(np.eye(3)):
        return None
    # With joint 1 at 0 throughout, what moves is what the others do.
    joint_values = motion.postures.copy()
    joint_values[:, 0] = 0.0
    held = motion.at(joint_values)
    linear = held.linear[:, :, 1:]
    up = axis.direction
    level = linear - up[:, None] * (up @ linear)[:, None, :]
    columns = np.moveaxis(level, 1, 2).reshape(-1, 3)
    longest = columns[np.argmax((columns * columns).sum(axis=1))] if len(columns) else np.zeros(3)
    size = float(np.sqrt(longest @ longest))
    if size <= motion.off:
        return None
    outward = longest / size
    sideways = np.cross(up, outward)
    arms = held.places - axis.point
    aside = arms @ sideways
    if np.ptp(aside) > motion.off or np.abs(sideways @ linear).max() > motion.off:
        return None
    if (arms @ outward).sum() < 0.0:
        outward = -outward  # the way most of the places are
    away = float(aside.mean())
    away = 0.0 if abs(away) <= motion.off else away
    foot = axis.point - (axis.point @ up) * up  # heights count from the base's origin
    region = pair_region_of(held, np.stack([outward, up]), foot, held=(0,))
    if region is None:
        return None
    pair = tuple(joint for joint in held.movers(np.stack([outward, up])) if joint)
    return Section(region, abs(away), outward, away * sideways, turn_of(motion), pair)


def turns_alone(motion: PointMotion) -> bool:
    """Whether joint 1 turns row 1 and nothing else, bounded by its own travel alone.

    Examples
    --------
    >>> from kinematics.table import Convention, Coupling, JointKind, Row, Table
    >>> first = Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0)
    >>> second = Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0, couplings=(Coupling(1, 0.5),))
    >>> coupled = Arm("coupled", Table(Convention.STANDARD, (first, second)))
    >>> turns_alone(point_motion(coupled, np.eye(4)))
    False
    """
    rows = motion.arm.drive_map.matrix
    turns = motion.arm.table.rows[0].is_revolute and not motion.arm.table.rows[0].passive
    alone = np.count_nonzero(rows[:, 0]) == 1 and np.count_nonzero(rows[0]) == 1
    return bool(turns and alone and motion.apart((0,)))
