"""Rectangles of paper, and the room that words take on it; millimetres, downwards.

Left out: what is drawn there (paper.py).
"""

from collections.abc import Sequence
from dataclasses import dataclass

from service.drawings.lettering import depth_of, width_of

_GROUND = 0.35
"""White around words, mm."""


@dataclass(frozen=True)
class Box:
    """A rectangle of paper: its left, upper, right and lower edge, mm, downwards."""

    left: float
    top: float
    right: float
    bottom: float

    def meets(self, other: "Box") -> bool:
        """Whether the two share any room."""
        across = self.left < other.right and other.left < self.right
        return across and self.top < other.bottom and other.top < self.bottom

    def holds(self, other: "Box") -> bool:
        """Whether another lies in it."""
        across = self.left <= other.left and other.right <= self.right
        return across and self.top <= other.top and other.bottom <= self.bottom

    def joined(self, other: "Box") -> "Box":
        """Return the least one that holds both."""
        return Box(
            min(self.left, other.left),
            min(self.top, other.top),
            max(self.right, other.right),
            max(self.bottom, other.bottom),
        )

    def moved(self, right: float, down: float) -> "Box":
        """Return it elsewhere."""
        return Box(self.left + right, self.top + down, self.right + right, self.bottom + down)


def words_box(
    at: Sequence[float], words: str, height: float, anchor: str, *, upward: bool = False
) -> Box:
    """Return the room of words.

    Parameters
    ----------
    at : where their line begins, has its middle or ends, as ``anchor`` says: start, middle, end.
    upward : whether the line runs up the sheet, to be read from the right.

    Examples
    --------
    >>> box = words_box((10.0, 20.0), "A", 3.5, "start")
    >>> box.left, box.top, round(box.right, 2), round(box.bottom, 2)
    (10.0, 16.5, 13.36, 20.0)
    """
    width, depth = width_of(words, height), depth_of(words, height)
    begin = -width * {"start": 0.0, "middle": 0.5, "end": 1.0}[anchor]
    x, y = at
    if upward:
        return Box(x - height, y - begin - width, x + depth, y - begin)
    return Box(x + begin, y - height, x + begin + width, y + depth)


def ground_of(box: Box, *, upward: bool) -> Box:
    """Return the white ground of words: wider than they are, but not below their feet.

    There runs the line that a number of a dimension stands on.
    """
    if upward:
        return Box(box.left - _GROUND, box.top - _GROUND, box.right, box.bottom + _GROUND)
    return Box(box.left - _GROUND, box.top - _GROUND, box.right + _GROUND, box.bottom)
