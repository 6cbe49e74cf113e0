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
    envelopes: Sequence[Envelope], mm_per_metre: float, numbers: Numbers
) -> Figure:
    """Return the section through axis 1, or the view from the front of an arm without one."""
    views = [envelope.section for envelope in envelopes]
    kind = views[0].kind
    outlines = _outlines(envelopes, views, np.zeros(2), mm_per_metre)
    across, upright = ("x", "z") if kind == SIDE else ("radius", "height")
    titles = (
        ("FRONT VIEW", "x and z of the base")
        if kind == SIDE
        else ("SECTION A\u2013A", "radius about axis 1, height from the base")
    )
    return _figure(
        kind, titles, outlines, envelopes, (across, upright), mm_per_metre, numbers, (0.0, 0.0)
    )


def figure_of_plan(
    envelopes: Sequence[Envelope],
    mm_per_metre: float,
    numbers: Numbers,
    turns: Sequence[TurnTold],
) -> Figure:
    """Return the view from above."""
    first = envelopes[0]
    centre = plan_centre(first)
    outlines = _outlines(envelopes, [one.plan for one in envelopes], centre, mm_per_metre)
    right, up = (-centre * mm_per_metre).tolist()
    upright = "y" if first.axis is None else ""
    seen = "x and y of the base" if first.axis is None else "along axis 1"
    titles = ("VIEW FROM ABOVE", seen)
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
    corner = Box(box.left, box.top, box.left + BOLD * width_of(titles[0], NORMAL), box.top + _TITLE)
    in_corner = kind != SECTION and axis and _is_free(corner, outlines)
    if not in_corner:
        wide = corner.right - corner.left + 2.0 + width_of(titles[1], SMALL)
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
