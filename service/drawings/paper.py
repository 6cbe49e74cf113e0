"""A sheet that lines, areas and words are put on, in millimetres from its upper left corner.

Idea: marks are kept in layers, hatching lowest and words on top, each word on a white ground, so
that no line runs through it; and where words stand is remembered, so that others can keep away. All
looks are attributes: no style sheet, no script, nothing from outside. Left out: what is drawn.
"""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from enum import Enum
from xml.sax.saxutils import escape, quoteattr

import numpy as np

from kinematics.number_checks import FloatArray
from service.drawings.boxes import Box, ground_of, words_box
from service.drawings.lettering import EM

FACES = "DejaVu Sans, Verdana, Arial, Helvetica, sans-serif"
MEDIA_TYPE = "image/svg+xml"
_ARROW, _ARROW_HALF = 3.0, 0.5
"""Length of an arrowhead and half its width, mm: filled, some 20 degrees (ISO 129-1)."""


class Line(Enum):
    """Kinds of lines of ISO 128-2: width in mm, and dashes."""

    WIDE = (0.5, "")
    NARROW = (0.18, "")
    HATCHING = (0.13, "")
    DASHED = (0.5, "3 1.2")
    NARROW_DASHED = (0.25, "2 1")
    SYMBOL = (0.25, "")
    SYMBOL_AXIS = (0.13, "2 0.5 0.4 0.5")
    CHAIN = (0.25, "7 1.2 0.6 1.2")
    DOUBLE_DOTS = (0.25, "7 1.2 0.6 1.2 0.6 1.2")


@dataclass(frozen=True)
class Piece:
    """A line through points (count, 2), closed or not."""

    points: FloatArray
    closed: bool

    @property
    def dense(self) -> FloatArray:
        """Points along it, every half millimetre, which is finer than any letter."""
        points = np.concatenate([self.points, self.points[: int(self.closed)]])
        steps = np.sqrt((np.diff(points, axis=0) ** 2).sum(axis=1))
        along = np.concatenate([[0.0], steps.cumsum()])
        every = np.arange(0.0, along[-1] + DENSE, DENSE)
        return np.stack([np.interp(every, along, column) for column in points.T], axis=1)


DENSE = 0.5
"""mm between the points of a line that words keep away from."""


class Paper:
    """What is on a sheet."""

    def __init__(self, width: float, height: float, name: str = "sheet") -> None:
        """Begin a sheet.

        Parameters
        ----------
        name : begins the names of its parts, told apart where a page shows several.
        """
        self.width, self.height, self.name = width, height, name
        self.words: list[Box] = []
        self._boundaries: list[FloatArray] = []
        self._layers: dict[str, list[str]] = {
            layer: [] for layer in ("areas", "thin", "thick", "heads", "grounds", "words")
        }
        self._clips = 0

    def line(self, points: Iterable[Sequence[float]], kind: Line, about: str = "") -> None:
        """Draw a line through points."""
        self._stroke(path_through(points, closed=False), kind, about)

    def outline(self, curves: Iterable[FloatArray], kind: Line, about: str = "") -> None:
        """Draw closed curves, (points, 2) each."""
        self._stroke("".join(path_through(curve, closed=True) for curve in curves), kind, about)

    def boundary(self, pieces: Sequence[Piece], kind: Line, about: str) -> None:
        """Draw pieces of lines that words had better keep away from."""
        self._stroke("".join(path_through(p.points, closed=p.closed) for p in pieces), kind, about)
        self._boundaries += [piece.dense for piece in pieces]

    def hatched(self, curves: Sequence[FloatArray], apart: float) -> None:
        """Draw lines at 45 degrees in what closed curves enclose.

        Parameters
        ----------
        apart : distance of the lines, mm.
        """
        if not curves:
            return
        self._clips += 1
        clip = f"{self.name}-{self._clips}"
        inside = "".join(path_through(curve, closed=True) for curve in curves)
        points = np.concatenate(list(curves))
        (left, top), (right, bottom) = points.min(axis=0), points.max(axis=0)
        # Lines x + y = constant, the same ones all over the sheet.
        step = apart * 2.0**0.5
        sums = np.arange(np.ceil((left + top) / step), np.floor((right + bottom) / step) + 1.0)
        lines = "".join(
            f"M{total - bottom:.2f} {bottom:.2f}L{total - top:.2f} {top:.2f}"
            for total in (sums * step).tolist()
        )
        width, _ = Line.HATCHING.value
        self._layers["areas"].append(
            f'<clipPath id="{clip}"><path d="{inside}" clip-rule="evenodd"/></clipPath>'
            f'<path d="{lines}" clip-path="url(#{clip})" fill="none" stroke="#000" '
            f'stroke-width="{width}"/>'
        )

    def head(self, tip: Sequence[float], along: Sequence[float]) -> None:
        """Draw an arrowhead that points along a direction of any length."""
        way = np.asarray(along, dtype=float)
        way = way / (float((way * way).sum()) ** 0.5 or 1.0)
        aside = _ARROW_HALF * way[::-1] * (-1.0, 1.0)
        back = np.asarray(tip) - _ARROW * way
        corners = np.stack([np.asarray(tip, dtype=float), back + aside, back - aside])
        self._layers["heads"].append(f'<path d="{path_through(corners, closed=True)}"/>')

    def dot(self, at: Sequence[float], width: float) -> None:
        """Draw a filled dot."""
        x, y = at
        self._layers["heads"].append(f'<circle cx="{x:.3f}" cy="{y:.3f}" r="{0.5 * width:g}"/>')

    def circle(self, centre: Sequence[float], radius: float, kind: Line) -> None:
        """Draw a circle."""
        x, y = centre
        self._layers["thin"].append(
            f'<circle cx="{x:.2f}" cy="{y:.2f}" r="{radius:g}" fill="none" stroke="#000" '
            f'stroke-width="{kind.value[0]}"/>'
        )

    def write(
        self,
        at: Sequence[float],
        words: str,
        height: float,
        anchor: str = "start",
        *,
        upward: bool = False,
        bold: bool = False,
    ) -> None:
        """Write a line of words, as ``words_box`` has it."""
        if not words:
            return
        box = words_box(at, words, height, anchor, upward=upward)
        self.words.append(box)
        ground = ground_of(box, upward=upward)
        self._layers["grounds"].append(
            f'<rect x="{ground.left:.2f}" y="{ground.top:.2f}" '
            f'width="{ground.right - ground.left:.2f}" height="{ground.bottom - ground.top:.2f}"/>'
        )
        x, y = at
        turned = f' transform="rotate(-90 {x:.2f} {y:.2f})"' if upward else ""
        weight = ' font-weight="bold"' if bold else ""
        self._layers["words"].append(
            f'<text x="{x:.2f}" y="{y:.2f}" font-size="{EM * height:.2f}" '
            f'text-anchor="{anchor}"{weight}{turned}>{escape(_printable(words))}</text>'
        )

    def is_free(self, box: Box) -> bool:
        """Whether no words stand there."""
        return not any(box.meets(other) for other in self.words)

    def is_clear(self, box: Box) -> bool:
        """Whether no boundary runs there."""
        return not any(
            (
                (points > (box.left, box.top)).all(axis=1)
                & (points < (box.right, box.bottom)).all(axis=1)
            ).any()
            for points in self._boundaries
        )

    def boundary_near_circle(self, centre: Sequence[float], radius: float, off: float) -> float:
        """Return how much boundary runs along a circle, at most ``off`` from it; mm."""
        found = 0
        for points in self._boundaries:
            squares = ((points - centre) ** 2).sum(axis=1)
            found += int(np.count_nonzero(abs(squares**0.5 - radius) < off))
        return found * DENSE

    def svg(self, title: str, said: str) -> bytes:
        """Return the sheet as a document.

        Parameters
        ----------
        title, said : of the whole, for those who cannot see it.
        """
        layers = self._layers
        parts = [
            f'<svg xmlns="http://www.w3.org/2000/svg" width="{self.width:g}mm" '
            f'height="{self.height:g}mm" viewBox="0 0 {self.width:g} {self.height:g}" role="img" '
            f'fill="#000" stroke="none" font-family={quoteattr(FACES)}>',
            f"<title>{escape(_printable(title))}</title><desc>{escape(_printable(said))}</desc>",
            f'<rect width="{self.width:g}" height="{self.height:g}" fill="#fff"/>',
            *layers["areas"],
            *layers["thin"],
            *layers["thick"],
            *layers["heads"],
            f'<g fill="#fff">{"".join(layers["grounds"])}</g>',
            *layers["words"],
            "</svg>\n",
        ]
        return "\n".join(parts).encode()

    def _stroke(self, path: str, kind: Line, about: str) -> None:
        width, dashes = kind.value
        dashed = f' stroke-dasharray="{dashes}"' if dashes else ""
        named = f" data-about={quoteattr(about)}" if about else ""
        layer = "thick" if kind in (Line.WIDE, Line.DASHED) else "thin"
        self._layers[layer].append(
            f'<path d="{path}" fill="none" stroke="#000" stroke-width="{width}"{dashed} '
            f'stroke-linejoin="round"{named}/>'
        )


def path_through(points: Iterable[Sequence[float]] | FloatArray, *, closed: bool) -> str:
    """Return points as a path, those on one place of the paper as one.

    Examples
    --------
    >>> path_through([(0, 0), (0, 0.0001), (2.5, 1)], closed=True)
    'M0 0L2.5 1Z'
    """
    told: list[str] = []
    for x, y in (np.round(np.asarray(list(points), dtype=float), 3) + 0.0).tolist():
        place = f"{x:.10g} {y:.10g}"
        if not told or told[-1] != place:
            told.append(place)
    return f"M{'L'.join(told)}{'Z' if closed else ''}"


def _printable(words: str) -> str:
    """Return words without what XML has no place for."""
    return "".join(letter if letter.isprintable() else "\ufffd" for letter in words)
