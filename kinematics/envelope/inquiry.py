"""What is asked of one arm, looked at once: how it moves its point, about which axis, how fine.

Idea: every way to find an envelope needs the same few things; they are put together here, and so
the ways take one argument. Source: as the modules used. Not covered: the ways (known_structures.py,
level.py, searched.py).
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import Any, Protocol

import numpy as np

from kinematics.arm import Arm
from kinematics.envelope.draws import AskedVolume
from kinematics.envelope.measures import Measure
from kinematics.envelope.pair_of_arm import PointMotion, point_motion
from kinematics.envelope.plan_axes import PlanAxes, plan_axes
from kinematics.envelope.proved_radii import AskedRadii, ProvedRadii
from kinematics.envelope.sampled_views import AskedView, Fineness, SampledView
from kinematics.envelope.search import AskedExtremes, Search, search_of
from kinematics.envelope.section import turn_of, turns_alone
from kinematics.envelope.shapes import COORDINATES, SECTION, Extreme
from kinematics.envelope.tolerances import SAME_PLACE
from kinematics.number_checks import FloatArray
from kinematics.reach.sample_summary import FirstAxis, first_axis

VOLUME, EXTREMES, RADII = "volume", "extremes", "radii"
"""What else is asked is called beside the kinds of views."""


class Asked(Protocol):
    """What is found in pieces that do not depend on each other.

    Attributes
    ----------
    pieces : how many, none of what follows from what was found before; places : asked for in all
        of them, about.
    """

    pieces: int
    places: int

    def piece(self, number: int) -> Any:
        """Return one piece."""

    def told(self, pieces: Sequence[Any]) -> Any:
        """Return what all pieces tell together."""

    def unasked(self) -> Any:
        """Return what can be told without any."""


Finds = Callable[[str, Asked], Any]
"""Finds what is asked, by its name; each is asked once at most, in an order that does not depend on
what is found."""


def at_once(_name: str, asked: Asked, between: Callable[[], None] = lambda: None) -> Any:
    """Find all pieces here and now.

    Parameters
    ----------
    between : called before each; what it raises gives the rest up.

    Examples
    --------
    >>> class Sum:
    ...     pieces, places = 3, 0
    ...     piece = staticmethod(lambda number: number + 1)
    ...     told = staticmethod(sum)
    >>> at_once("sum", Sum())
    6
    """
    pieces = []
    for number in range(asked.pieces):
        between()
        pieces.append(asked.piece(number))
    return asked.told(pieces)


@dataclass(frozen=True)
class Inquiry:
    """An arm with its point, travel and what is known of both.

    Attributes
    ----------
    motion : how the joints move the point; search : what it takes to search places.
    axis : axis 1, None where row 1 slides; axes : of the plan.
    fineness : of views that are sampled; finds : what finds them.
    """

    motion: PointMotion
    search: Search
    axis: FirstAxis | None
    axes: PlanAxes
    fineness: Fineness
    finds: Finds = at_once

    def sampled(self, kind: str, directions: FloatArray) -> SampledView:
        """Return a view that is found by a grid.

        Parameters
        ----------
        directions : (2, 3), of its coordinates in the base; of a section about axis 1.

        Raises
        ------
        UnfitResolution : its places would be too many, or too few.
        """
        if kind == SECTION:
            assert self.axis is not None
            view, seeker = self.search.about(self.axis)
        else:
            view, seeker = self.search.along(directions)
        samples = self.search.samples(view)
        found: SampledView = self.finds(
            kind, AskedView(seeker, samples, kind, directions, self.fineness)
        )
        return found

    def drawn(self, count: int) -> Measure:
        """Return the volume, of so many places drawn: a number known before anything is found."""
        space, seeker = self.search.along(np.eye(3))
        found: Measure = self.finds(VOLUME, AskedVolume(seeker, self.search.samples(space), count))
        return found

    @cached_property
    def turn(self) -> float | None:
        """Bearings that joint 1 turns to, rad, at most a whole turn; None where not it alone."""
        if self.axis is None or not turns_alone(self.motion):
            return None
        return turn_of(self.motion)

    @property
    def turns_whole(self) -> bool:
        """Whether joint 1 alone turns the arm to every bearing."""
        return self.turn is not None and self.turn >= 2.0 * np.pi

    @cached_property
    def searched_extremes(self) -> tuple[Extreme, ...]:
        """Least and greatest of each measure, by search."""
        names: tuple[str, ...] = ("x", "y", "z")
        view = self.search.along(np.eye(3))[0]
        if self.axis is not None:
            names, view = COORDINATES[SECTION], self.search.about(self.axis)[0]
        found: tuple[Extreme, ...] = self.finds(EXTREMES, AskedExtremes(self.search, names, view))
        return found

    def proved_radii(self, reached: tuple[float, float]) -> ProvedRadii:
        """Return what is proved of the least and the greatest radius that are reached."""
        assert self.axis is not None
        slack = SAME_PLACE * self.search.length
        asked = AskedRadii(self.motion, self.axis, reached, slack)
        found: ProvedRadii = self.finds(RADII, asked)
        return found

    def extremes_at(self, postures: FloatArray) -> tuple[Extreme, ...]:
        """Return extremes of radius and height from postures (4, joints) that are known to be them.

        In the order of ``searched_extremes``: the least before the greatest, radius before height.
        """
        assert self.axis is not None
        positions = self.motion.at(postures).places
        told = self.axis.radius_and_height(positions)
        return tuple(
            Extreme(name, bool(at % 2), float(told[at, at // 2]), postures[at], positions[at])
            for at, name in enumerate(np.repeat(COORDINATES[SECTION], 2).tolist())
        )


def inquiry_of(
    arm: Arm,
    tool_in_flange: FloatArray,
    *,
    working: bool = False,
    fineness: Fineness | None = None,
    finds: Finds = at_once,
) -> Inquiry:
    """Return what there is to know before an envelope is looked for.

    Raises
    ------
    KinematicsError : as ``travel_region``.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = [Row(JointKind.REVOLUTE, a, 0.0, 0.0, 0.0) for a in (0.5, 0.3)]
    >>> flat = Arm("flat", Table(Convention.STANDARD, tuple(rows)))
    >>> inquiry = inquiry_of(flat, np.eye(4))
    >>> inquiry.turns_whole, [round(one.value, 9) for one in inquiry.searched_extremes[:2]]
    (True, [0.2, 0.8])
    """
    axis = first_axis(arm)
    return Inquiry(
        motion=point_motion(arm, tool_in_flange, working=working),
        search=search_of(arm, tool_in_flange, working=working),
        axis=axis,
        axes=plan_axes(arm, axis),
        fineness=fineness or Fineness(),
        finds=finds,
    )
