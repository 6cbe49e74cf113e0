"""What many tool positions say together: how far the tool gets, and how often it is near singular.

Idea: what is farthest is found piece by piece, each piece telling its least and greatest and the
number of the sample that got there; of two pieces the better counts, of equal ones the lower
number, so that the order in which pieces are made changes nothing. The share near singular is told
of the first samples alone: they are as evenly spread as all, and judging takes thirty times as
long as placing the tool.

Source: extremes of samples. Not covered: that nothing reaches farther; samples come a little short
of every extreme.
"""

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.chain import walk
from kinematics.jacobian import motion_of
from kinematics.reach.samples import BLOCK, JointSamples
from kinematics.singularity import NEAR, SINGULAR, judge
from kinematics.table import FloatArray
from kinematics.task_space import TaskSpace

MEASURES = ("x", "y", "z", "radius", "height")
"""What extremes are told of: the position in the frame asked for, and where it is about axis 1."""


@dataclass(frozen=True)
class FirstAxis:
    """The axis of row 1, which stands still in the base; it is told from the base's origin.

    Attributes
    ----------
    point, direction : (3,), a point on it and its unit vector, in the base.
    """

    point: FloatArray
    direction: FloatArray

    def radius_and_height(self, positions: FloatArray) -> FloatArray:
        """Return distance from the axis and height along it, from the base's origin; (..., 2)."""
        height = positions @ self.direction
        arms = positions - self.point
        arms = arms - (arms @ self.direction)[..., None] * self.direction
        return np.stack([np.sqrt((arms * arms).sum(axis=-1)), height], axis=-1)


def first_axis(arm: Arm) -> FirstAxis | None:
    """Return axis 1 of an arm; None where row 1 slides, so that nothing turns about it.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = (Row(JointKind.REVOLUTE, 0.4, 0.0, 0.1, 0.0),)
    >>> axis = first_axis(Arm("one", Table(Convention.STANDARD, rows)))
    >>> axis.radius_and_height(np.array([3.0, 4.0, 0.5]))
    array([5. , 0.5])
    """
    if not arm.table.rows or not arm.table.rows[0].is_revolute:
        return None
    walked = walk(arm, np.zeros(arm.joint_count))
    return FirstAxis(walked.axis_point[0], walked.axis_direction[0])


@dataclass(frozen=True)
class SampleSummary:
    """Extremes over some samples, and how many of those judged are near singular.

    Attributes
    ----------
    least, greatest : (5,), by ``MEASURES``; NaN for radius and height where axis 1 slides.
    least_at, greatest_at : (5,), the numbers of the samples that have them.
    judged, near, singular : counts of samples.
    """

    least: FloatArray
    least_at: NDArray[np.int64]
    greatest: FloatArray
    greatest_at: NDArray[np.int64]
    judged: int = 0
    near: int = 0
    singular: int = 0

    def merged(self, other: "SampleSummary") -> "SampleSummary":
        """Return what both say together.

        Examples
        --------
        >>> one, two = (summary_of(np.full((1, 3), x), None, number)
        ...             for number, x in ((7, 0.2), (8, 0.5)))
        >>> one.merged(two).greatest[0], one.merged(two).greatest_at[0]
        (np.float64(0.5), np.int64(8))
        """
        less = _better(other.least, other.least_at, self.least, self.least_at)
        more = _better(-other.greatest, other.greatest_at, -self.greatest, self.greatest_at)
        return SampleSummary(
            np.where(less, other.least, self.least),
            np.where(less, other.least_at, self.least_at),
            np.where(more, other.greatest, self.greatest),
            np.where(more, other.greatest_at, self.greatest_at),
            self.judged + other.judged,
            self.near + other.near,
            self.singular + other.singular,
        )

    def judged_as(self, judged: int, states: tuple[int, int]) -> "SampleSummary":
        """Return the same with how many samples were judged, and how many near and singular."""
        return replace(self, judged=judged, near=states[0], singular=states[1])


def _better(
    new: FloatArray, new_at: NDArray[np.int64], old: FloatArray, old_at: NDArray[np.int64]
) -> NDArray[np.bool_]:
    return np.asarray((new < old) | ((new == old) & (new_at < old_at)))


def summary_of(
    positions: FloatArray,
    axis: FirstAxis | None,
    begin: int,
    base_in_frame: FloatArray | None = None,
) -> SampleSummary:
    """Return the extremes of the positions (count, 3) of samples from number ``begin`` on.

    Parameters
    ----------
    positions : in the base.
    base_in_frame : (4, 4), of the frame whose x, y and z are told; the base where left out.

    Examples
    --------
    >>> found = summary_of(np.array([[1.0, 0, 0], [3.0, 0, 0]]), None, begin=10)
    >>> found.greatest[0], found.greatest_at[0]
    (np.float64(3.0), np.int64(11))
    """
    shown = positions
    if base_in_frame is not None:
        shown = positions @ base_in_frame[:3, :3].T + base_in_frame[:3, 3]
    about = np.full((len(positions), 2), np.nan)
    if axis is not None:
        about = axis.radius_and_height(positions)
    table = np.hstack([shown, about])
    least, greatest = table.argmin(axis=0), table.argmax(axis=0)
    columns = np.arange(len(MEASURES))
    return SampleSummary(
        table[least, columns], least + begin, table[greatest, columns], greatest + begin
    )


def states_of(
    samples: JointSamples, space: TaskSpace, tool_in_flange: FloatArray, begin: int, end: int
) -> tuple[int, int]:
    """Return how many of samples ``begin`` ... ``end`` are near singular, and how many singular.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> from kinematics.task_space import task_space
    >>> arm = Arm("one", Table(Convention.STANDARD, (Row(JointKind.REVOLUTE, 0.4, 0, 0, 0),)))
    >>> states_of(JointSamples(arm, 8, seed=1), task_space(arm, np.eye(4)), np.eye(4), 0, 8)
    (0, 0)
    """
    near = singular = 0
    for first in range(begin, end, BLOCK):
        joint_values = samples.piece(first, min(first + BLOCK, end))
        motion = motion_of(samples.arm, joint_values, tool_in_flange)
        state = judge(samples.arm, space, motion).state
        near += int(np.count_nonzero(state == NEAR))
        singular += int(np.count_nonzero(state == SINGULAR))
    return near, singular
