"""Dimensions of a view: lines with arrowheads and numbers, beside what they measure (ISO 129-1).

Idea: all dimensions of one direction begin at one place and lie in lanes beside the view. Which
takes which lane is tried out, so that no line that leads to one runs through the number of another.
A number that has no room between its arrowheads stands beyond them. Left out: angles (turns.py).
"""

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import permutations

from service.drawings.boxes import Box
from service.drawings.lettering import NORMAL, width_of
from service.drawings.paper import Line, Paper

FIRST_LANE, LANE = 7.0, 6.5
"""From the view to the first lane, and from lane to lane, mm."""

_OVER, _GAP = 1.5, 1.0
"""How far lines lead beyond a lane, and words stand off it, mm."""

_HEADS, _TAIL, _ROOM = 6.0, 5.0, 1.0
"""Two arrowheads need as much; a line goes on as far where they stand outside; beside words."""

_ALONG = (0.5, 0.35, 0.65, 0.2, 0.8)
"""Where along its line a number may stand, in the order tried."""


@dataclass(frozen=True)
class Dimension:
    """A distance to be told.

    Attributes
    ----------
    begin, end : where from and where to, along its direction (to the right, or up), mm of paper
        from the zero of the view.
    words : what is told; starts : beside the view, where lines lead from its begin and its end.
    """

    begin: float
    end: float
    words: str
    starts: tuple[float, float]


@dataclass(frozen=True)
class Lane:
    """A dimension in its lane.

    Attributes
    ----------
    at : mm beside the zero of the view: below it, or to the left where the lane is upright.
    middle : where its words have their middle, along the lane.
    """

    dimension: Dimension
    at: float
    middle: float
    upright: bool

    @property
    def outside(self) -> bool:
        """Whether the arrowheads point at the lines from outside."""
        return abs(self.dimension.end - self.dimension.begin) < _HEADS

    @property
    def reach(self) -> tuple[float, float]:
        """How far line and words go, along the lane."""
        half = 0.5 * width_of(self.dimension.words, NORMAL) + _ROOM
        ends = [*self._line, self.middle - half, self.middle + half]
        return min(ends), max(ends)

    @property
    def _line(self) -> tuple[float, float]:
        low, high = sorted((self.dimension.begin, self.dimension.end))
        return (low - _TAIL, high + _TAIL) if self.outside else (low, high)

    @property
    def words_reach(self) -> tuple[float, float]:
        """How far its words go, along the lane."""
        half = 0.5 * width_of(self.dimension.words, NORMAL) + _ROOM
        return self.middle - half, self.middle + half

    def crossed_by(self, other: "Lane") -> bool:
        """Whether a line that leads to another lane runs through the words of this one."""
        if other.at < self.at:
            return False
        low, high = self.words_reach
        return any(low < end < high for end in (other.dimension.begin, other.dimension.end))

    @property
    def box(self) -> Box:
        """The room it takes, from the zero of the view."""
        low, high = self.reach
        if self.upright:
            return Box(-self.at - NORMAL - _GAP, -high, -self.at + _OVER, -low)
        return Box(low, self.at - NORMAL - _GAP, high, self.at + _OVER)

    def draw(self, paper: Paper, x: float, y: float) -> None:
        """Draw it, the zero of the view being at ``x``, ``y``."""

        def place(along: float, beside: float) -> tuple[float, float]:
            return (x - beside, y - along) if self.upright else (x + along, y + beside)

        dimension, at = self.dimension, self.at
        for end, start in zip((dimension.begin, dimension.end), dimension.starts, strict=True):
            paper.line([place(end, start), place(end, at + _OVER)], Line.NARROW)
        low, high = self.reach if self.outside or self._beyond else self._line
        paper.line([place(low, at), place(high, at)], Line.NARROW, f"dimension {dimension.words}")
        low, high = sorted((dimension.begin, dimension.end))
        way = place(1.0, 0.0)[0] - x, place(1.0, 0.0)[1] - y
        sign = -1.0 if self.outside else 1.0
        paper.head(place(low, at), (-sign * way[0], -sign * way[1]))
        paper.head(place(high, at), (sign * way[0], sign * way[1]))
        paper.write(
            place(self.middle, at - _GAP) if not self.upright else place(self.middle, at + _GAP),
            dimension.words,
            NORMAL,
            "middle",
            upward=self.upright,
        )

    @property
    def _beyond(self) -> bool:
        low, high = self._line
        return not low < self.middle < high


@dataclass(frozen=True)
class _Side:
    """A side of a view: where its lanes lie and what they have to keep away from."""

    edge: float
    span: tuple[float, float]
    taken: Sequence[Box]
    upright: bool

    def beyond(self, lane: Lane) -> float:
        """Return how far a lane goes beyond the view, mm."""
        low, high = lane.reach
        return max(self.span[0] - low, high - self.span[1], 0.0)

    def meets(self, lane: Lane) -> bool:
        """Whether a lane takes room that is taken."""
        return any(lane.box.meets(box) for box in self.taken)

    def awkward(self, lanes: Sequence[Lane]) -> tuple[int, float, float]:
        """Return what is less of better lanes: room taken twice, how far out they go both ways."""
        twice = sum(one.crossed_by(other) for one in lanes for other in lanes)
        twice += sum(map(self.meets, lanes))
        beyond = max(map(self.beyond, lanes), default=0.0)
        return twice, round(beyond), max((lane.at for lane in lanes), default=0.0)

    def best(self, dimension: Dimension, at: float, ends: Sequence[float]) -> Lane:
        """Return a dimension in a lane, its words where no end of another is, and not far out."""
        tried = [Lane(dimension, at, middle, self.upright) for middle in _middles(dimension)]

        def awkward(lane: Lane) -> tuple[bool, bool, int]:
            crossed = any(_within(end, lane) for end in ends)
            return self.meets(lane), crossed, round(self.beyond(lane))

        return min(tried, key=awkward)

    def in_order(self, order: Sequence[Dimension]) -> list[Lane]:
        """Return dimensions each in the first lane, from the last one used, that has room."""
        lanes: list[Lane] = []
        at = self.edge + FIRST_LANE
        for dimension in order:
            ends = [end for one in order if one is not dimension for end in (one.begin, one.end)]
            here = self.best(dimension, at, ends)
            if any(_meet(here, other) for other in lanes if other.at == at):
                at += LANE
            lanes.append(self.best(dimension, at, ends))
        return lanes


def in_lanes(
    dimensions: Sequence[Dimension],
    edge: float,
    span: tuple[float, float],
    taken: Sequence[Box],
    *,
    upright: bool,
) -> list[Lane]:
    """Return dimensions in lanes, few of them, none in the way of another.

    Parameters
    ----------
    edge : how far the view itself goes beside its zero; span : from where to where it goes along
        the lanes, mm; taken : room to keep away from.

    Examples
    --------
    Up and down from zero, in one lane.

    >>> both = [Dimension(0, 40, "800", (0, 0)), Dimension(0, -30, "600", (0, 0))]
    >>> [lane.at for lane in in_lanes(both, 10.0, (-30.0, 40.0), (), upright=False)]
    [17.0, 17.0]
    """
    shortest_first = sorted(dimensions, key=lambda one: abs(one.end - one.begin))
    while True:
        side = _Side(edge, span, taken, upright)
        lanes = min(map(side.in_order, permutations(shortest_first)), key=side.awkward)
        if not any(map(side.meets, lanes)):
            return lanes
        edge += LANE  # what is taken ends somewhere: far enough out there is room


def _middles(dimension: Dimension) -> list[float]:
    """Return where its words may have their middle: between the arrowheads, else beyond the end."""
    begin, end = dimension.begin, dimension.end
    length, half = abs(end - begin), 0.5 * width_of(dimension.words, NORMAL) + _ROOM
    sign = 1.0 if end >= begin else -1.0
    if length < _HEADS:
        return [end + sign * (_TAIL + half), begin - sign * (_TAIL + half)]
    inside = [begin + share * (end - begin) for share in _ALONG]
    room = 0.5 * (length - _HEADS) - half
    found = [one for one in inside if abs(one - 0.5 * (begin + end)) <= room]
    return found or [end + sign * (half + _ROOM), begin - sign * (half + _ROOM)]


def _meet(one: Lane, other: Lane) -> bool:
    """Whether two in one lane share more than where both begin."""
    (low, high), (least, most) = one.reach, other.reach
    return low < most - 1e-9 and least < high - 1e-9


def _within(end: float, lane: Lane) -> bool:
    low, high = lane.words_reach
    return low < end < high
