"""Where the places of a survey are: two views on paper, to a round scale, for black and white.

Idea: the drawing is in millimetres of paper, so that it can be measured with a ruler; verdicts are
told apart by the form of their marks, and what was not reached lies above what was. Seen from the
front (x, z), and below it from above (x, y), as first-angle projection has it.

Source: ISO 128-3 (first-angle projection). Left out: envelopes, which have
drawings of their own.
"""

from collections.abc import Sequence
from html import escape
from math import ceil, floor, log10, sqrt
from typing import NamedTuple

_MARKS = {
    "sample": "m-.1 0h.2",
    "reachable": "m-.8 0a.8 .8 0 1 0 1.6 0a.8 .8 0 1 0-1.6 0",
    "outside-travel": "m-.8-.8h1.6v1.6h-1.6z",
    "unreachable": "m-.9-.9l1.8 1.8m-1.8 0l1.8-1.8",
    "not-found": "m0-1.1l1 1.75h-2z",
    "refused": "m-.9 0h1.8",
}
"""In the order they are drawn, mm."""

_CROWDED, _SMALLEST, _SMALLEST_NOT_REACHED = 400, 0.4, 0.7
"""Places that marks of full size show apart; and how much smaller marks get where there are more,
whose paper is shared out: those of what is not reached, few among many, stay nearly as they are."""

_STROKES = {"sample": 0.3, "reachable": 0.13}
_STROKE = 0.3
_MILLIMETRES = {"mm": 1.0, "m": 1000.0, "in": 25.4}
_WIDE, _HIGH, _LEFT, _EDGE = 155.0, 96.0, 16.0, 6.0
"""Of a view, mm: two of them, and what stands below, fit on a page of A4 or Letter."""

_ROUND, _SCALES = (1, 2, 5, 10), (1, 1.5, 2, 2.5, 3, 4, 5, 6, 8, 10)
_TICKS = 8
_LONE = 100.0
"""Of the drawing of a single place, mm."""

_LEAST = 1e-9
"""Of a span, in any unit: places nearer to each other are drawn as one."""


class _View(NamedTuple):
    """One view: what is across and upward, and the scale, mm of paper for a unit."""

    title: str
    across: tuple[float, float]
    upward: tuple[float, float]
    scale: float

    def at(self, x: float, y: float) -> tuple[float, float]:
        """Return where a place is on the paper of the view."""
        return (
            _LEFT + (x - self.across[0]) * self.scale,
            _EDGE + (self.upward[1] - y) * self.scale,
        )


def two_views(
    points: Sequence[tuple[tuple[float, float, float], str]], length: str, frame: str
) -> str:
    """Return the figure of some places, with verdicts, in a unit of length and a frame."""
    x, y, z = (_span(axis) for axis in zip(*(place for place, _ in points), strict=True))
    reduction = _reduction(x, (y, z), _MILLIMETRES[length])
    scale = _MILLIMETRES[length] / reduction
    widest = max(high - low for low, high in (x, y, z))
    step = _step(widest if widest > _LEAST else _LONE / _MILLIMETRES[length])
    x, y, z = (_widened(span, step) for span in (x, y, z))
    front = _View(f"from the front: x across, z upward ({length})", x, z, scale)
    above = _View(f"from above: x across, y upward ({length})", x, y, scale)
    drawn = "".join(
        _drawn(view, step, [(place[0], place[up], verdict) for place, verdict in points])
        for view, up in ((front, 2), (above, 1))
    )
    ratio = f"1:{reduction:g}" if reduction >= 1 else f"{1 / reduction:g}:1"
    return (
        f"<figure>{drawn}<figcaption>{_legend({verdict for _, verdict in points})} In frame "
        f"{escape(frame)}. First-angle projection. Scale {ratio} where printed at full size."
        "</figcaption></figure>"
    )


def _drawn(view: _View, step: float, places: Sequence[tuple[float, float, str]]) -> str:
    (left, top), (right, bottom) = (
        view.at(view.across[0], view.upward[1]),
        view.at(view.across[1], view.upward[0]),
    )
    wide, high = right + _EDGE, bottom + _EDGE
    lines, texts = "", ""
    for value in _ticks(view.across, step):
        at, _ = view.at(value, 0)
        lines += f"M{at:.2f} {top:.2f}V{bottom:.2f}"
        texts += f'<text x="{at:.2f}" y="{bottom + 4:.2f}" text-anchor="middle">{value:g}</text>'
    for value in _ticks(view.upward, step):
        _, at = view.at(0, value)
        lines += f"M{left:.2f} {at:.2f}H{right:.2f}"
        texts += f'<text x="{left - 1.5:.2f}" y="{at + 1:.2f}" text-anchor="end">{value:g}</text>'
    return (
        f'<svg viewBox="0 0 {wide:.2f} {high:.2f}" width="{wide:.2f}mm" height="{high:.2f}mm" '
        f'role="img" font-size="2.8" fill="none" stroke="none"><title>{view.title}</title>'
        f'<path d="{lines}" stroke="#aaa" stroke-width=".1"/>'
        f'<g fill="#000">{texts}<text x="{left:.2f}" y="{top - 2:.2f}">{view.title}</text></g>'
        f"{_marks(view, places)}</svg>"
    )


def _marks(view: _View, places: Sequence[tuple[float, float, str]]) -> str:
    """Return a path for each verdict, with a mark for each place."""
    drawn = ""
    for verdict, mark in _MARKS.items():
        at = [view.at(x, y) for x, y, found in places if found == verdict]
        if at:
            size = _size(verdict, len(places))
            path = "".join(f"M{x / size:.2f} {y / size:.2f}{mark}" for x, y in at)
            stroke = _STROKES.get(verdict, _STROKE)
            scaled = "" if size == 1.0 else f' transform="scale({size:g})"'
            drawn += f'<path{scaled} d="{path}" stroke="#000" stroke-width="{stroke:g}"/>'
    return drawn


def _size(verdict: str, places: int) -> float:
    """Return the size of a mark among so many.

    Examples
    --------
    >>> _size("reachable", 400), _size("reachable", 1600), _size("unreachable", 4000)
    (1.0, 0.5, 0.7)
    """
    if verdict == "sample":
        return 1.0
    least = _SMALLEST if verdict == "reachable" else _SMALLEST_NOT_REACHED
    shared = sqrt(_CROWDED / max(places, _CROWDED))
    return max(round(shared, 2), least)


def _legend(there: set[str]) -> str:
    marks = "; ".join(
        '<svg class="mark" viewBox="-1.5 -1.5 3 3" fill="none">'
        f'<path d="M0 0{mark}" stroke="#000" stroke-width="{_STROKES.get(verdict, _STROKE):g}"/>'
        f"</svg> {verdict.replace('-', ' ')}"
        for verdict, mark in _MARKS.items()
        if verdict in there
    )
    return f"{marks}."


def _span(numbers: Sequence[float]) -> tuple[float, float]:
    return min(numbers), max(numbers)


def _widened(span: tuple[float, float], step: float) -> tuple[float, float]:
    """Return a span with air around it, so that marks at its ends and lone ones are seen."""
    return span[0] - step / 4, span[1] + step / 4


def _reduction(
    across: tuple[float, float], upward: Sequence[tuple[float, float]], millimetres: float
) -> float:
    """Return n of the scale 1:n, a round number, at which both views fit.

    Examples
    --------
    >>> _reduction((-900.0, 900.0), [(0.0, 700.0), (-900.0, 900.0)], 1.0)
    25.0
    """
    wide = (across[1] - across[0]) * 1.1 / _WIDE
    high = max(high - low for low, high in upward) * 1.1 / _HIGH
    needed = max(wide, high) * millimetres if max(wide, high) > _LEAST / _WIDE else 1.0
    power = 10.0 ** floor(log10(needed))
    return next(power * each for each in _SCALES if power * each >= needed * (1 - 1e-9))


def _step(width: float) -> float:
    """Return a round distance of lines, some eight of them across a width.

    Examples
    --------
    >>> _step(1800.0)
    500.0
    """
    power = 10.0 ** floor(log10(width / _TICKS))
    return next(power * each for each in _ROUND if power * each >= width / _TICKS * (1 - 1e-9))


def _ticks(span: tuple[float, float], step: float) -> list[float]:
    return [step * n for n in range(ceil(span[0] / step), floor(span[1] / step) + 1)]
