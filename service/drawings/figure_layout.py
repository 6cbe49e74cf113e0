"""The views of an envelope laid out at a scale: what they show, and the room they take.

Left out: how they are drawn (figures.py), and where they stand on the sheet (envelope_sheet.py).
"""

from collections.abc import Callable, Sequence
from dataclasses import replace

import numpy as np

from kinematics.envelope.plan_marks import place_in_section, plan_centre
from kinematics.envelope.shapes import SECTION, SIDE, Envelope, View
from kinematics.number_checks import FloatArray
from service.drawings.boxes import Box
from service.drawings.dimensions import Dimension, in_lanes
from service.drawings.figures import (
    ARROW,
    AXIS,
    BESIDE_WORDS,
    BEYOND,
    BOLD,
    CUT,
    TRAVEL,
    WORKING,
    Figure,
    Outlines,
)
from service.drawings.lettering import NORMAL, SMALL, width_of
from service.drawings.paper import Piece
from service.drawings.turns import TurnTold

Numbers = Callable[[float], str]
"""Writes a length, m, in the reader's unit."""

_TITLE = 7.5
"""Room of a title above, mm."""


def figure_of_section(
    envelopes: Sequence[Envelope], mm_per_metre: float, numbers: Numbers, arrow: str = ""
) -> Figure:
    """Return the section through axis 1, or the view from the front of an arm without one.

    Parameters
    ----------
    arrow : the letter of an arrow from above, for a plan that stands beside it.
    """
    views = [envelope.section for envelope in envelopes]
    kind = views[0].kind
    outlines = _outlines(envelopes, views, np.zeros(2), mm_per_metre)
    across, upright = ("x", "z") if kind == SIDE else ("radius", "height")
    titles = (
        ("FRONT VIEW", "x and z of the base")
        if kind == SIDE
        else ("SECTION A\u2013A", "radius about axis 1, height from the base")
    )
    laid = _figure(
        kind, titles, outlines, envelopes, (across, upright), mm_per_metre, numbers, (0.0, 0.0)
    )
    return _with_arrow(laid, arrow) if arrow else laid


def _with_arrow(figure: Figure, letter: str) -> Figure:
    """Return a figure with an arrow from above, and room for it."""
    inner, right = figure.inner, 1.5 + width_of(letter, NORMAL)
    # The word of the axis, or the upward direction of the base where that is higher, stay free.
    taken = (-1.0, BESIDE_WORDS + width_of(AXIS, SMALL))
    if figure.kind != SECTION:
        low = figure.base[1] - ARROW - 3.0
        taken = (figure.base[0] - 3.0, figure.base[0] + ARROW + 4.0) if low < inner.top else (0, 0)
    middle = 0.5 * (inner.left + inner.right)
    if taken[0] - right < middle < taken[1] + 1.0:
        middle = taken[1] + 1.0
    box = Box(middle - 1.0, figure.box.top, middle + right, figure.box.bottom)
    return replace(figure, arrow=letter, arrow_at=middle, box=figure.box.joined(box))


def figure_of_plan(
    envelopes: Sequence[Envelope],
    mm_per_metre: float,
    numbers: Numbers,
    turns: Sequence[TurnTold],
    arrow: str = "",
) -> Figure:
    """Return the view from above; ``arrow`` is the letter of the arrow that tells so."""
    first = envelopes[0]
    centre = plan_centre(first)
    outlines = _outlines(envelopes, [one.plan for one in envelopes], centre, mm_per_metre)
    right, up = (-centre * mm_per_metre).tolist()
    upright = "y" if first.axis is None else ""
    seen = "x and y of the base" if first.axis is None else "along axis 1"
    titles = (f"VIEW {arrow}", f"from above, {seen}") if arrow else ("VIEW FROM ABOVE", seen)
    laid = _figure(
        first.plan.kind,
        titles,
        outlines,
        envelopes,
        ("", upright),
        mm_per_metre,
        numbers,
        (right, -up),
    )
    return replace(laid, turns=turns)


def _outlines(
    envelopes: Sequence[Envelope], views: Sequence[View], zero: FloatArray, mm_per_metre: float
) -> list[Outlines]:
    return [
        Outlines(
            WORKING if envelope.working else TRAVEL,
            [(curve.points - zero) * (mm_per_metre, -mm_per_metre) for curve in view.curves],
        )
        for envelope, view in zip(envelopes, views, strict=True)
    ]


def _figure(
    kind: str,
    titles: tuple[str, str],
    outlines: list[Outlines],
    envelopes: Sequence[Envelope],
    measures: tuple[str, str],
    mm_per_metre: float,
    numbers: Numbers,
    base: tuple[float, float],
) -> Figure:
    """Return a figure with the room it takes."""
    inner = Box(0.0, 0.0, 0.0, 0.0).joined(Box(*base, *base))
    for outline in outlines:
        inner = inner.joined(outline.box)
    below = _dimensions(envelopes, measures[0], mm_per_metre, numbers, inner)
    beside = _dimensions(envelopes, measures[1], mm_per_metre, numbers, inner)
    axis = envelopes[0].axis is not None
    lanes = in_lanes(below, inner.bottom, (inner.left, inner.right), (), upright=False)
    taken = [lane.box for lane in lanes]
    span = (-inner.bottom, -inner.top)
    lanes += in_lanes(beside, -inner.left, span, taken, upright=True)
    box = Box(inner.left, inner.top - BEYOND, inner.right + BEYOND, inner.bottom + BEYOND)
    if kind != SECTION:
        # The letters of the base's directions, the ends of the cutting plane.
        box = box.joined(Box(base[0], base[1] - ARROW - 3.0, base[0] + ARROW + 4.0, base[1]))
        if axis:
            box = box.joined(Box(inner.left - CUT, 0.0, inner.right + CUT, CUT + 3.0))
    for lane in lanes:
        box = box.joined(lane.box)
    widths = BOLD * width_of(titles[0], NORMAL), width_of(titles[1], SMALL)
    corner = Box(box.left, box.top, box.left + max(widths), box.top + _TITLE)
    in_corner = kind != SECTION and axis and _is_free(corner, outlines)
    if not in_corner:
        wide = widths[0] + 2.0 + widths[1]
        box = Box(box.left, box.top - _TITLE, max(box.right, box.left + wide), box.bottom)
    return Figure(kind, titles, outlines, lanes, inner, box, base, axis, in_corner)


def _is_free(corner: Box, outlines: Sequence[Outlines]) -> bool:
    """Whether neither boundaries nor the upright axis run through a corner."""
    points = np.concatenate(
        [Piece(curve, True).dense for outline in outlines for curve in outline.curves]
    )
    clear = corner.right + BESIDE_WORDS, corner.bottom + BESIDE_WORDS
    return clear[0] < 0.0 and not (points < clear).all(axis=1).any()


def _dimensions(
    envelopes: Sequence[Envelope],
    measure: str,
    mm_per_metre: float,
    numbers: Numbers,
    inner: Box,
) -> list[Dimension]:
    """Return how far the point gets from zero, each number once."""
    told: dict[str, Dimension] = {}
    upright = measure in ("height", "y", "z")
    # Lines from zero begin where the axis ends.
    zero = BEYOND if upright else inner.bottom + BEYOND
    for envelope in envelopes:
        for extreme in envelope.extremes:
            number = numbers(extreme.value)
            if extreme.measure != measure or number in ("0", *told):
                continue
            shown = number.lstrip("-")
            words = f"{shown} working" if envelope.working and len(envelopes) > 1 else shown
            right, up = (place_in_section(envelope, extreme) * mm_per_metre).tolist()
            if measure == "y":
                right = 0.0
            start = -right if upright else -up
            told[number] = Dimension(0.0, extreme.value * mm_per_metre, words, (zero, start))
    return list(told.values())
