"""What stands below the views: the fields of a title block, and what is to be known.

Idea: 180 mm of fields at the lower right (ISO 7200, 5457), left of them sentences, all in
capitals of 1.8 mm and more. There is no date: the same arm gives the same sheet.
Left out: what the fields say.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from service.drawings.lettering import SMALL, shortened, wrapped
from service.drawings.paper import Line, Paper

WIDTH = 180.0
ROW = 7.2
CAPTION = 1.5
"""Height of capitals of the captions of fields, mm: below ISO 3098's least, as they repeat."""

_PITCH = 3.1
_INDENT = 1.3
_SAMPLE = 14.0
"""Length of the sample of a line, mm."""

_SMALL_END, _LARGE_END, _FRUSTUM, _APART = 1.1, 2.2, 5.0, 10.0
"""Of the symbol: both radii of a frustum, its length, and how far right the view of its end is."""


@dataclass(frozen=True)
class Field:
    """A field of a row.

    Attributes
    ----------
    share : of the width of its row; height : of capitals, mm; sample : a kind of line shown before.
    """

    caption: str
    words: str
    share: float
    height: float = SMALL
    sample: Line | None = None


SYMBOL = "projection"
"""The caption of the field that shows the symbol of first-angle projection."""


def draw_fields(paper: Paper, rows: Sequence[Sequence[Field]], right: float, bottom: float) -> None:
    """Draw a block of fields at its lower right corner."""
    left, top = right - WIDTH, bottom - ROW * len(rows)
    paper.line([(left, bottom), (left, top), (right, top)], Line.WIDE)
    for number, row in enumerate(rows):
        y = top + number * ROW
        if number:
            paper.line([(left, y), (right, y)], Line.NARROW)
        x = left
        for place, field in enumerate(row):
            width = WIDTH * field.share
            if place:
                paper.line([(x, y), (x, y + ROW)], Line.NARROW)
            paper.write((x + _INDENT, y + 0.7 + CAPTION), field.caption, CAPTION)
            if field.caption == SYMBOL:
                _draw_symbol(paper, x + width - 17.0, y + 0.5 * ROW)
            begin = x + _INDENT
            if field.sample is not None:
                level = y + ROW - 1.5 - 0.5 * field.height
                paper.line([(begin, level), (begin + _SAMPLE, level)], field.sample)
                begin += _SAMPLE + 2.0
            fitting = shortened(field.words, field.height, x + width - _INDENT - begin)
            paper.write((begin, y + ROW - 1.5), fitting, field.height)
            x += width


def _draw_symbol(paper: Paper, x: float, y: float) -> None:
    """Draw the symbol of first-angle projection: a frustum, and right of it its view from the left.

    So the small end lies left, and both circles are seen (ISO 5456-2).
    """
    begin, end = x, x + _FRUSTUM
    sides = [(begin, -_SMALL_END), (end, -_LARGE_END), (end, _LARGE_END), (begin, _SMALL_END)]
    paper.outline([np.add(sides, (0.0, y))], Line.SYMBOL)
    paper.line([(begin - 0.8, y), (end + 0.8, y)], Line.SYMBOL_AXIS)
    centre, beyond = x + _APART, _LARGE_END + 0.8
    for radius in (_SMALL_END, _LARGE_END):
        paper.circle((centre, y), radius, Line.SYMBOL)
    paper.line([(centre - beyond, y), (centre + beyond, y)], Line.SYMBOL_AXIS)
    paper.line([(centre, y - beyond), (centre, y + beyond)], Line.SYMBOL_AXIS)


def notes_in(sentences: Sequence[str], width: float, most: int) -> list[str]:
    """Return sentences in lines of a width, at most so many lines."""
    lines: list[str] = []
    for sentence in sentences:
        left = most - len(lines)
        if left > 0:
            lines += wrapped(sentence, SMALL, width, left)
    return lines


def draw_notes(
    paper: Paper, lines: Sequence[str], left: float, right: float, bottom: float
) -> None:
    """Draw lines of words in a box of their own at its lower left corner."""
    top = bottom - height_of_notes(len(lines))
    paper.line([(left, top), (right, top), (right, bottom)], Line.WIDE)
    for number, words in enumerate(lines, start=1):
        paper.write((left + _INDENT, top + 0.6 + number * _PITCH), words, SMALL)


def height_of_notes(lines: int) -> float:
    """Return the height that lines of words take, mm."""
    return _PITCH * lines + 2.2


def draw_length_check(paper: Paper, left: float, y: float) -> None:
    """Draw a bar by which a print is held against a ruler."""
    paper.line([(left, y), (left + _CHECK, y)], Line.WIDE)
    for end in (left, left + _CHECK):
        paper.line([(end, y - 1.0), (end, y + 1.0)], Line.WIDE)
    words = f"{_CHECK:g} mm where this sheet is printed true to size"
    paper.write((left + _CHECK + 2.5, y + 0.5 * SMALL), words, SMALL)


_CHECK = 50.0
