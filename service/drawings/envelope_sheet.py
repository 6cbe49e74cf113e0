"""The envelope of an arm on a sheet of A4: section and plan to scale, dimensions, title block.

Idea: the largest scale of ISO 5455 at which both views have room is taken, the views above one
another as first-angle projection has them, or the section beside the plan where that gives a larger
scale. A section may stand anywhere, for its cutting plane names it; the plan beside it stands where
first-angle projection has a view from the left, and so a reference arrow and its letter tell from
where it is seen (ISO 128-3). Left out: how envelopes are found.
"""

from collections.abc import Sequence
from dataclasses import dataclass

from kinematics.envelope.shapes import SIDE, Envelope
from service.convert import Units
from service.drawings.boxes import Box
from service.drawings.envelope_words import (
    BLOCK_HEIGHT,
    SheetLabels,
    rows_of,
    sentences_of,
    turns_of,
)
from service.drawings.figure_layout import Numbers, figure_of_plan, figure_of_section
from service.drawings.figures import Figure
from service.drawings.numbers import length_words
from service.drawings.paper import Line, Paper
from service.drawings.scales import ACTUAL_SIZE, SCALES, Scale
from service.drawings.title_block import (
    WIDTH,
    draw_fields,
    draw_length_check,
    draw_notes,
    height_of_notes,
    notes_in,
)
from service.drawings.turns import TurnTold

PAGE = (297.0, 210.0)
"""A4, landscape, mm."""

FRAME = Box(20.0, 10.0, 287.0, 200.0)
"""Of ISO 5457: 20 mm to the left for a file, 10 mm elsewhere."""

_CLEAR, _APART = 2.0, 6.0
"""From the frame to the views, and between them, mm."""

_ARROW = "B"
"""The letter of the reference arrow: A is that of the cutting plane."""

_MOST_LINES = 13
"""Of sentences beside the title block: more are in the answer as JSON."""


def envelope_sheet(
    envelopes: Sequence[Envelope], labels: SheetLabels, units: Units, name: str = "envelope"
) -> bytes:
    """Return the drawing of an envelope, as SVG.

    Parameters
    ----------
    envelopes : of travel, of working travel, or both, in this order; of one arm, tool and point.
    name : begins the names of parts, for pages that show several sheets.
    """
    numbers = length_words(envelopes, units)
    turns = turns_of(envelopes, units)
    sentences = sentences_of(envelopes, labels.cautions, units)
    notes_right = FRAME.right - WIDTH
    lines = notes_in(sentences, notes_right - FRAME.left - 3.0, _MOST_LINES)
    strip = max(BLOCK_HEIGHT, height_of_notes(len(lines)))
    layout = _laid_out(
        envelopes, numbers, turns, Box(FRAME.left, FRAME.top, FRAME.right, FRAME.bottom - strip)
    )
    paper = Paper(*PAGE, name)
    frame = [(FRAME.left, FRAME.top), (FRAME.right, FRAME.top), (FRAME.right, FRAME.bottom)]
    paper.line([*frame, (FRAME.left, FRAME.bottom), frame[0]], Line.WIDE)
    letters = ("x", "y") if _seen_along_z(envelopes[0]) else ("x'", "y'")
    for figure, at in zip(layout.figures, layout.places, strict=True):
        figure.draw(paper, *at, ("x", "z") if figure.kind == SIDE else letters)
    rows = rows_of(envelopes, labels, units, layout.scale.words)
    draw_fields(paper, rows, FRAME.right, FRAME.bottom)
    draw_notes(paper, lines, FRAME.left, notes_right, FRAME.bottom)
    draw_length_check(paper, FRAME.left, FRAME.bottom + 5.0)
    return paper.svg(f"Envelope of {labels.arm}", " ".join(sentences))


@dataclass(frozen=True)
class _Layout:
    scale: Scale
    figures: tuple[Figure, Figure]
    places: tuple[tuple[float, float], tuple[float, float]]


def _laid_out(
    envelopes: Sequence[Envelope], numbers: Numbers, turns: Sequence[TurnTold], room: Box
) -> _Layout:
    """Return the views at the largest scale that has room."""
    # How large it all is with its zeros: a point that never moves may be far from the base.
    metres = [
        figure_of_section(envelopes, 1.0, numbers).inner,
        figure_of_plan(envelopes, 1.0, numbers, ()).inner,
    ]
    size = max(max(box.right - box.left, box.bottom - box.top) for box in metres)
    for scale in SCALES if size > 0.0 else (ACTUAL_SIZE,):
        if size * scale.mm_per_metre > room.right - room.left:
            continue
        section = figure_of_section(envelopes, scale.mm_per_metre, numbers)
        plan = figure_of_plan(envelopes, scale.mm_per_metre, numbers, turns)
        layout = _above(section, plan, scale, room)
        if layout is None:
            section = figure_of_section(envelopes, scale.mm_per_metre, numbers, _ARROW)
            plan = figure_of_plan(envelopes, scale.mm_per_metre, numbers, turns, _ARROW)
            layout = _beside(section, plan, scale, room)
        if layout is not None:
            return layout
    raise AssertionError("no scale is small enough")


def _above(section: Figure, plan: Figure, scale: Scale, room: Box) -> _Layout | None:
    """Return the section above the plan, their zeros in one line; None where there is no room."""
    left, right = min(section.box.left, plan.box.left), max(section.box.right, plan.box.right)
    heights = [figure.box.bottom - figure.box.top for figure in (section, plan)]
    across = room.right - room.left - (right - left) - 2 * _CLEAR
    down = room.bottom - room.top - sum(heights) - _APART - 2 * _CLEAR
    if across < 0.0 or down < 0.0:
        return None
    x = room.left + _CLEAR + 0.5 * across - left
    gap = down / 3.0
    top = room.top + _CLEAR + gap
    below = top + heights[0] + _APART + gap
    places = ((x, top - section.box.top), (x, below - plan.box.top))
    return _Layout(scale, (section, plan), places)


def _beside(section: Figure, plan: Figure, scale: Scale, room: Box) -> _Layout | None:
    """Return the section left of the plan; None where there is no room."""
    boxes = (section.box, plan.box)
    widths = [box.right - box.left for box in boxes]
    heights = [box.bottom - box.top for box in boxes]
    across = room.right - room.left - sum(widths) - _APART - 2 * _CLEAR
    down = room.bottom - room.top - max(heights) - 2 * _CLEAR
    if across < 0.0 or down < 0.0:
        return None
    gap = across / 3.0
    x = room.left + _CLEAR + gap
    top = room.top + _CLEAR + 0.5 * down
    places = (
        (x - boxes[0].left, top - boxes[0].top),
        (x + widths[0] + _APART + gap - boxes[1].left, top - boxes[1].top),
    )
    return _Layout(scale, (section, plan), places)


def _seen_along_z(envelope: Envelope) -> bool:
    """Whether the plan shows the base's own x and y."""
    return bool((abs(envelope.plan.directions[:, 2]) < 1e-9).all())
