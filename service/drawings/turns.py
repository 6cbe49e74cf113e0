"""How far axis 1 turns, in a plan: the lines it turns between, the angles, what it cannot face.

Idea: words are tried at several places and stand at the first that is free. Left out: arms whose
axis 1 turns all the way round, which have no such lines.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import product

from kinematics.envelope.plan_marks import arc, bearings_faced, on_bearings
from kinematics.envelope.shapes import Turn
from kinematics.number_checks import FloatArray
from service.drawings.boxes import Box, words_box
from service.drawings.lettering import NORMAL, SMALL
from service.drawings.paper import Line, Paper

_RADII = (0.36, 0.44, 0.52, 0.6, 0.68, 0.76, 0.84, 0.28)
"""Where arcs may lie, as shares of the size of the plan: the first that runs along no boundary."""

_ALONG, _OFF = 40.0, 2.5
"""mm of boundary nearer than so many mm to an arc: more than the lines of the turn have there."""

_NEAREST = 13.0
"""mm from the axis: nearer to it the base's directions are drawn."""

_BEYOND = 4.0
_AWAY = (0.58, 0.42, 0.64, 0.36, 0.7, 0.3, 0.76, 0.24)
"""Where on an arc its words may stand, as shares of it: aside of the middle, where axes run."""

_OUT = (0.8, 0.72, 0.64, 0.88, 0.56, 0.48, 0.4, 1.0)
"""Where between its lines the words of a dead sector may stand, as shares of the size."""

_BESIDE = (0.5, 0.25, 0.75, 0.3, 0.7, 0.2, 0.8)
"""And where from one line to the other."""

_OPEN = 3.0
"""rad: sectors that are as wide have room anywhere."""

_SAME = 1e-3
"""rad: turns nearer to each other than that are drawn as one."""

_ARCS_APART = 5.0
"""mm from arc to arc."""

_CLEAR = 1.0
"""mm between words and the lines of a sector."""

_LEVEL = 1e-9
"""A way less steep than that never gets to an edge."""

Place = tuple[float, float]


@dataclass(frozen=True)
class TurnTold:
    """A turn of axis 1, and the words for how far it goes and for what it leaves out."""

    turn: Turn
    words: str
    dead_words: str
    working: bool


def draw_turns(
    paper: Paper, axis: Place, size: float, room: Box, turns: Sequence[TurnTold]
) -> None:
    """Draw the turns of travel and of working travel; the same turn once.

    Parameters
    ----------
    axis : where axis 1 is on paper; size : how far from it the plan goes, mm. One that goes no
        farther than the base's directions shows no turns.
    room : of the plan on paper.
    """
    if size < _NEAREST:
        return
    drawn: list[tuple[float, float]] = []
    taken: list[float] = []
    for told in turns:
        faced = bearings_faced(told.turn)
        if faced is None or any(
            abs(faced[0] - begin) + abs(faced[1] - end) < _SAME for begin, end in drawn
        ):
            continue
        drawn.append(faced)
        kind = Line.NARROW_DASHED if told.working else Line.DOUBLE_DOTS
        begin, end = on_bearings([*faced])
        for way in (begin, end):
            paper.line([axis, _place(axis, way, _as_far_as(room, axis, way, size + _BEYOND))], kind)
        radius = _radius(paper, axis, size, taken, room, arc(*faced))
        if radius is not None:
            taken.append(radius)
            _draw_angle(paper, axis, arc(*faced) * radius, told.words)
        if len(drawn) == 1:
            _write_dead(paper, axis, size, room, told)


def _as_far_as(room: Box, axis: Place, way: FloatArray, most: float) -> float:
    """Return how far a line from the axis goes on within the room of the plan, mm."""
    right, down = float(way[0]), -float(way[1])
    for beyond, along in (
        (room.right - axis[0], right),
        (axis[0] - room.left, -right),
        (room.bottom - axis[1], down),
        (axis[1] - room.top, -down),
    ):
        if along > _LEVEL:
            most = min(most, beyond / along)
    return most


def _radius(
    paper: Paper, axis: Place, size: float, taken: Sequence[float], room: Box, ways: FloatArray
) -> float | None:
    """Return where an arc along some ways has room; None where it has none."""
    for share in _RADII:
        radius = share * size
        near = any(abs(radius - other) < _ARCS_APART for other in taken)
        along = paper.boundary_near_circle(axis, radius, _OFF)
        within = all(_as_far_as(room, axis, way, radius) == radius for way in ways)
        if radius >= _NEAREST and not near and along < _ALONG and within:
            return radius
    return None


def _draw_angle(paper: Paper, axis: Place, points: FloatArray, words: str) -> None:
    """Draw an arc with arrowheads, and its words on it where nothing else is written."""
    places = [_place(axis, point, 1.0) for point in points]
    paper.line(places, Line.NARROW)
    for tip, before in ((places[0], places[1]), (places[-1], places[-2])):
        paper.head(tip, (tip[0] - before[0], tip[1] - before[1]))
    for anywhere, share in product((False, True), _AWAY):
        x, y = places[round(share * (len(places) - 1))]
        if _written_if_free(paper, (x, y + 0.5 * NORMAL), words, NORMAL, axis, anywhere):
            return


def _written_if_free(
    paper: Paper, at: Place, words: str, height: float, axis: Place, anywhere: bool = False
) -> bool:
    """Write words where no others stand and neither axis runs; return whether it was done.

    Parameters
    ----------
    anywhere : whether they may also stand on a boundary.
    """
    box = words_box(at, words, height, "middle")
    clear = Box(box.left - _CLEAR, box.top - _CLEAR, box.right + _CLEAR, box.bottom + _CLEAR)
    on_axis = clear.left < axis[0] < clear.right or clear.top < axis[1] < clear.bottom
    if on_axis or not paper.is_free(clear) or not (anywhere or paper.is_clear(clear)):
        return False
    paper.write(at, words, height, "middle")
    return True


def _write_dead(paper: Paper, axis: Place, size: float, room: Box, told: TurnTold) -> None:
    """Write what is left out between the lines it lies between, if there is room."""
    turn = told.turn
    if turn.dead_from is None or turn.dead_to is None:
        return
    ways = arc(turn.dead_from, turn.dead_to)
    for share, beside in product(_OUT, _BESIDE):
        x, y = _place(axis, ways[round(beside * (len(ways) - 1))], share * size)
        at = (x, y + 0.5 * SMALL)
        box = words_box(at, told.dead_words, SMALL, "middle")
        inside = turn.dead_to - turn.dead_from > _OPEN or _between(box, axis, ways[0], ways[-1])
        if inside and room.holds(box) and _written_if_free(paper, at, told.dead_words, SMALL, axis):
            return


def _between(box: Box, axis: Place, begin: FloatArray, end: FloatArray) -> bool:
    """Whether all of a box lies between two lines from the axis, less than half a turn apart."""
    for x, y in product(
        (box.left - _CLEAR, box.right + _CLEAR), (box.top - _CLEAR, box.bottom + _CLEAR)
    ):
        right, up = x - axis[0], axis[1] - y
        if begin[0] * up <= begin[1] * right or end[1] * right <= end[0] * up:
            return False
    return True


def _place(axis: Place, way: FloatArray, radius: float) -> Place:
    return axis[0] + radius * float(way[0]), axis[1] - radius * float(way[1])
