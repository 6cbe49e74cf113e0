"""The views of an envelope as they are drawn: curves, axes, the cutting plane, dimensions.

Idea: a figure is laid out from its zero, millimetres of paper to the right and downwards: axis 1 at
height 0 in a section, axis 1 in a plan, the base's origin where no axis is. So views that stand
above one another share their zero. Left out: how they are laid out
(figure_layout.py), turns of axis 1 (turns.py), the sheet.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from kinematics.envelope.shapes import SECTION
from kinematics.number_checks import FloatArray
from service.drawings.boxes import Box, words_box
from service.drawings.dimensions import Lane
from service.drawings.lettering import NORMAL, SMALL, width_of
from service.drawings.paper import Line, Paper, Piece
from service.drawings.turns import TurnTold, draw_turns

TRAVEL, WORKING = "travel", "working travel"

_HATCHING = 2.5
BEYOND = 3.5
"""How far axes and the line of height 0 go beyond what is drawn, mm."""

CUT = 6.0
"""Room of the ends of a cutting plane at both sides, mm."""

BOLD = 1.12
"""How much wider bold letters are."""

ARROW = 8.0
"""Length of the directions of the base, mm."""

AXIS = "axis 1"
BESIDE_WORDS = 1.2
_SPECK = 0.7
"""Width of what is drawn of a region that has no size on paper, mm."""


@dataclass(frozen=True)
class Outlines:
    """Closed curves of one travel, mm from the zero of the figure, downwards."""

    about: str
    curves: list[FloatArray]

    @property
    def box(self) -> Box:
        """The room they take."""
        points = np.concatenate(self.curves)
        (left, top), (right, bottom) = points.min(axis=0).tolist(), points.max(axis=0).tolist()
        return Box(left, top, right, bottom)


@dataclass(frozen=True)
class Figure:
    """One view, laid out.

    Attributes
    ----------
    kind : of the view; box : all the room it takes; inner : what is reached, and its zero.
    base : where the base's origin is; axis : whether axis 1 stands at the zero; turns : of it.
    in_corner : whether the titles stand in the corner that a round view leaves free; arrow : the
        letter of an arrow from above, where the view from there does not stand below; arrow_at :
        where it is, mm right of the zero.
    """

    kind: str
    titles: tuple[str, str]
    outlines: list[Outlines]
    lanes: list[Lane]
    inner: Box
    box: Box
    base: tuple[float, float]
    axis: bool
    in_corner: bool
    arrow: str = ""
    arrow_at: float = 0.0
    turns: Sequence[TurnTold] = ()

    def draw(self, paper: Paper, x: float, y: float, letters: tuple[str, str]) -> None:
        """Draw it, its zero at ``x``, ``y``.

        Parameters
        ----------
        letters : of the directions of the base in a plan.
        """
        for number, outline in enumerate(self.outlines):
            curves = [np.add(curve, (x, y)) for curve in outline.curves]
            line = Line.DASHED if outline.about == WORKING and number else Line.WIDE
            if max(*np.ptp(np.concatenate(curves), axis=0)) < _SPECK:
                paper.dot(curves[0][0].tolist(), _SPECK)
                continue
            if number == 0:
                paper.hatched(curves, _HATCHING)
            pieces = [
                Piece(np.add(piece.points, (x, y)), piece.closed)
                for curve in outline.curves
                for piece in _drawn_of(curve, self.kind)
            ]
            paper.boundary(pieces, line, f"{self.kind} {outline.about}")
        self._draw_title(paper, x + self.box.left, y + self.box.top)
        if self.arrow:
            tip = (x + self.arrow_at, y + self.inner.top - 1.2)
            shaft = [(tip[0], tip[1] - 6.0), tip]
            paper.line(shaft, Line.NARROW, f"arrow {self.arrow}")
            paper.head(tip, (0.0, 1.0))
            paper.write((tip[0] + 1.5, tip[1] - 3.0), self.arrow, NORMAL)
        if self.kind == SECTION:
            self._draw_axis(paper, x, y)
        else:
            self._draw_plan(paper, x, y, letters)
        for lane in self.lanes:
            lane.draw(paper, x, y)

    def _draw_title(self, paper: Paper, left: float, top: float) -> None:
        title, more = self.titles
        paper.write((left, top + NORMAL), title, NORMAL, bold=True)
        if self.in_corner:
            paper.write((left, top + NORMAL + 3.5), more, SMALL)
        else:
            paper.write((left + width_of(title, NORMAL) * BOLD + 2.0, top + NORMAL), more, SMALL)

    def _draw_axis(self, paper: Paper, x: float, y: float) -> None:
        """Draw axis 1, and height 0."""
        inner = self.inner
        paper.line([(x, y + inner.top - BEYOND), (x, y + inner.bottom + BEYOND)], Line.CHAIN)
        at = (x + BESIDE_WORDS, y + inner.top - BEYOND + SMALL)
        paper.write(at, AXIS, SMALL)
        paper.line([(x, y), (x + inner.right + BEYOND, y)], Line.NARROW)
        paper.write((x - BESIDE_WORDS, y - BESIDE_WORDS), "0", SMALL, "end")

    def _draw_plan(self, paper: Paper, x: float, y: float, letters: tuple[str, str]) -> None:
        """Draw axes, the base's origin with its directions, the cutting plane, the turns."""
        inner, (right, down) = self.inner, self.base
        base = (x + right, y + down)
        if self.axis:
            ends = (y + inner.top - BEYOND, y + inner.bottom + BEYOND)
            paper.line([(x, end) for end in ends], Line.CHAIN)
            _cutting_plane(paper, x + inner.left, x + inner.right, y)
        for way, letter in zip(((1.0, 0.0), (0.0, -1.0)), letters, strict=True):
            tip = (base[0] + ARROW * way[0], base[1] + ARROW * way[1])
            paper.line([base, tip], Line.NARROW)
            paper.head(tip, way)
            _letter(paper, tip, way, letter)
        paper.dot(base, 1.0)
        if self.axis:
            size = max(-inner.left, -inner.top, inner.right, inner.bottom)
            draw_turns(paper, (x, y), size, self.box.moved(x, y), self.turns)


def _letter(paper: Paper, tip: tuple[float, float], way: tuple[float, float], letter: str) -> None:
    """Write the letter of a direction beside the head of its arrow, off words and boundaries."""
    x, y = tip
    beside = [(x + 0.6, y - 0.8), (x + 0.6, y + 2.4), (x - 2.4, y - 0.8), (x + 3.0, y - 0.8)]
    if not way[0]:
        beside = [(x + 0.9, y + 1.0), (x - 2.2, y + 1.0), (x + 0.9, y - 1.2), (x + 0.9, y + 3.5)]

    def awkward(at: Sequence[float]) -> tuple[bool, bool]:
        box = words_box(at, letter, SMALL, "start")
        return not paper.is_free(box), not paper.is_clear(box)

    paper.write(min(beside, key=awkward), letter, SMALL)


def _cutting_plane(paper: Paper, left: float, right: float, y: float) -> None:
    """Draw where a section is cut, looked at in the direction of y (ISO 128-3)."""
    ends = (left - CUT + 1.5, right + CUT - 1.5)
    paper.line([(ends[0], y), (ends[1], y)], Line.CHAIN)
    for end, inward in zip(ends, (1.0, -1.0), strict=True):
        paper.line([(end, y), (end + 4.0 * inward, y)], Line.WIDE)
        paper.line([(end, y + 5.0), (end, y)], Line.NARROW)
        paper.head((end, y + 0.25), (0.0, -1.0))
        paper.write((end, y + 5.6 + NORMAL), "A", NORMAL, "middle")


def _drawn_of(curve: FloatArray, kind: str) -> list[Piece]:
    """Return the pieces of a curve that are a boundary: in a section axis 1 itself is none.

    What lies there is reached from both sides; only a region of no size is drawn on it.
    """
    on_axis = curve[:, 0] < _ON_AXIS
    along = on_axis & np.roll(on_axis, -1)
    if kind != SECTION or not along.any() or on_axis.all():
        return [Piece(curve, closed=True)]
    first = int(np.argmax(along)) + 1
    points, ends = np.roll(curve, -first, axis=0), np.flatnonzero(np.roll(along, -first))
    pieces = np.split(points, ends + 1)
    return [Piece(piece, closed=False) for piece in pieces if len(piece) > 1]


_ON_AXIS = 0.02
"""mm of paper from axis 1."""
