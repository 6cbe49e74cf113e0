"""What is needed to search the reach of one arm: travel, postures to start from, and views.

Idea: the same low-discrepancy postures start every search, so that one drawing of them serves
section, plan, volume and extremes. Steps of sliding joints are taken in lengths of the arm, those
of turning ones in radians: both then move the point about as far.

Source: as samples.py and descents.py. Not covered: what is asked (sampled_views.py, draws.py).
"""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from kinematics.arm import Arm
from kinematics.envelope.descents import AboutAxis, InView, Seeker
from kinematics.envelope.farthest import Measured, extremes_of
from kinematics.envelope.grid_reach import Samples
from kinematics.envelope.pair_of_arm import whole_turns
from kinematics.envelope.point_views import PointView, about, along
from kinematics.envelope.shapes import Extreme
from kinematics.envelope.tolerances import POSTURES, REACHED, SEED, SOME_SIZE
from kinematics.jacobian import characteristic_length
from kinematics.number_checks import FloatArray
from kinematics.reach.sample_summary import FirstAxis
from kinematics.reach.samples import JointSamples
from kinematics.reach.travel_region import TravelRegion


@dataclass(frozen=True)
class Search:
    """An arm with its travel, its postures, and how its point is seen.

    Attributes
    ----------
    limits : travel; free : travel without ends for joints that have a whole turn, so that no search
        stops where it begins anew.
    length : m; scales : (joints,), rad or m, of a step; joint_values : (count, joints), sampled.
    """

    arm: Arm
    tool_in_flange: FloatArray
    limits: TravelRegion
    free: TravelRegion
    length: float
    scales: FloatArray
    joint_values: FloatArray

    def along(self, directions: FloatArray) -> tuple[PointView, Seeker]:
        """Return the view along directions (m, 3) of the base, and what searches in it."""
        view = along(self.arm, self.tool_in_flange, directions)
        return view, self._in(view)

    def about(self, axis: FirstAxis) -> tuple[PointView, Seeker]:
        """Return the view of radius and height about axis 1, and what searches in it."""
        view = about(self.arm, self.tool_in_flange, axis)
        space = along(self.arm, self.tool_in_flange, np.eye(3))
        return view, AboutAxis(self._in(view), self._in(space), axis)

    def _in(self, view: PointView) -> InView:
        return InView(view, self.free, self.scales, REACHED * self.length)

    def samples(self, view: PointView) -> Samples:
        """Return the postures with their places in a view."""
        return Samples(self.joint_values, view(self.joint_values)[0])

    def rank(self, view: PointView) -> int:
        """Return in how many independent ways the joints move the point in a view."""
        jacobians = view(self.joint_values[:_LOOKED_AT])[1] * self.scales
        values = np.linalg.svd(jacobians, compute_uv=False)
        return int((values > SOME_SIZE * self.length).sum(axis=1).max(initial=0))

    def extremes(self, names: tuple[str, ...], view: PointView) -> tuple[Extreme, ...]:
        """Return the least and the greatest of each coordinate of a view."""
        space = along(self.arm, self.tool_in_flange, np.eye(3))
        found = extremes_of(
            Measured(names, view), space, self.free, self.scales, self.joint_values, self.length
        )
        return tuple(replace(one, joint_values=self._in_travel(one.joint_values)) for one in found)

    def sampled_extremes(self, names: tuple[str, ...], view: PointView) -> tuple[Extreme, ...]:
        """Return what the postures alone tell of them, which falls short."""
        places, positions = view(self.joint_values)[0], self.samples(self.along(np.eye(3))[0])
        best = [(int(c.argmin()), int(c.argmax())) for c in places.T]
        return tuple(
            Extreme(
                name,
                greatest,
                float(places[ends[greatest], row]),
                self.joint_values[ends[greatest]],
                positions.places[ends[greatest]],
            )
            for row, (name, ends) in enumerate(zip(names, best, strict=True))
            for greatest in (False, True)
        )

    def _in_travel(self, joint_values: FloatArray) -> FloatArray:
        """Return a posture with whole turns taken off that lead out of travel."""
        beyond = np.isinf(self.free.lower)
        values = joint_values[beyond]
        turns = np.floor((values - self.limits.lower[beyond]) / (2.0 * np.pi))
        within = joint_values.copy()
        within[beyond] = np.minimum(values - 2.0 * np.pi * turns, self.limits.upper[beyond])
        return within


_LOOKED_AT = 64
"""Postures at which it is looked how the point moves: a rank is met at nearly all of them."""


def search_of(arm: Arm, tool_in_flange: FloatArray, *, working: bool = False) -> Search:
    """Return what is needed to search the reach of an arm.

    Raises
    ------
    KinematicsError : as ``JointSamples``.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> arm = Arm("one", Table(Convention.STANDARD, (Row(JointKind.REVOLUTE, 0.4, 0, 0, 0),)))
    >>> search = search_of(arm, np.eye(4))
    >>> search.rank(search.along(np.eye(3))[0])
    1
    """
    samples = JointSamples(arm, POSTURES, SEED, working=working)
    length = characteristic_length(arm, tool_in_flange)
    # Axes far apart do not tell what a slide of a long travel brings.
    slides = (samples.region.upper - samples.region.lower)[~arm.revolute_joints]
    length = max(length, float(slides.max(initial=0.0)) / 4.0)
    scales = np.where(arm.revolute_joints, 1.0, length)
    lower, upper = samples.region.lower.copy(), samples.region.upper.copy()
    around = whole_turns(arm, samples.region)
    lower[around], upper[around] = -np.inf, np.inf
    return Search(
        arm=arm,
        tool_in_flange=tool_in_flange,
        limits=samples.region,
        free=replace(samples.region, lower=lower, upper=upper),
        length=length,
        scales=scales,
        joint_values=samples.piece(0, POSTURES),
    )


class AskedExtremes:
    """The least and the greatest of each coordinate of a view, in a piece.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> arm = Arm("one", Table(Convention.STANDARD, (Row(JointKind.REVOLUTE, 0.4, 0, 0, 0),)))
    >>> search = search_of(arm, np.eye(4))
    >>> asked = AskedExtremes(search, ("x",), search.along(np.eye(3)[:1])[0])
    >>> [round(one.value, 9) for one in asked.told([asked.piece(0)])]
    [-0.4, 0.4]
    >>> [round(one.value, 3) for one in asked.unasked()]
    [-0.4, 0.4]
    """

    pieces, places = 1, 0

    def __init__(self, search: Search, names: tuple[str, ...], view: PointView) -> None:
        self._search, self._names, self._view = search, names, view

    def piece(self, _number: int) -> tuple[Extreme, ...]:
        """Return all of them."""
        return self._search.extremes(self._names, self._view)

    def told(self, pieces: Sequence[tuple[Extreme, ...]]) -> tuple[Extreme, ...]:
        """Return what the piece tells."""
        return pieces[0]

    def unasked(self) -> tuple[Extreme, ...]:
        """Return what sampled postures tell."""
        return self._search.sampled_extremes(self._names, self._view)
