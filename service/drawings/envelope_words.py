"""What the sheet of an envelope says: the fields of its title block and the sentences beside it.

Left out: where they stand (title_block.py) and what draws the views (envelope_sheet.py).
"""

from collections.abc import Sequence
from dataclasses import dataclass

from kinematics.envelope.shapes import SECTION, TOOL, Envelope
from service.convert import Units
from service.drawings.figures import TRAVEL, WORKING
from service.drawings.lettering import NORMAL
from service.drawings.numbers import angle_words, measure_words
from service.drawings.paper import Line
from service.drawings.title_block import ROW, SYMBOL, Field
from service.drawings.turns import TurnTold


@dataclass(frozen=True)
class SheetLabels:
    """What a sheet says of its arm.

    Attributes
    ----------
    revision : as shown, ``-`` of an arm that is not stored; tool : its name, or what is said of it.
    cautions : sentences that stand on every sheet.
    """

    arm: str
    title: str
    revision: str
    digest: str
    tool: str
    convention: str
    cautions: Sequence[str]


BLOCK_HEIGHT = 5.0 * ROW
"""Height of the fields, mm: a row for working travel is kept free where it is not told."""


def turns_of(envelopes: Sequence[Envelope], units: Units) -> list[TurnTold]:
    """Return the turns of axis 1 that a plan shows."""
    return [
        TurnTold(
            one.turn,
            angle_words(one.turn.angle, units) + (" working" if _is_second(one, envelopes) else ""),
            f"dead sector {_dead_words(one, units)}",
            _is_second(one, envelopes),
        )
        for one in envelopes
        if one.turn is not None
    ]


def sentences_of(envelopes: Sequence[Envelope], cautions: Sequence[str], units: Units) -> list[str]:
    """Return what is to be known, each sentence once: cautions, turns of axis 1, notes."""
    turns: dict[str, list[str]] = {}
    for one in envelopes:
        if one.turn is not None and one.turn.dead_from is not None:
            words = f"{angle_words(one.turn.angle, units)} (dead sector {_dead_words(one, units)})"
            turns.setdefault(words, []).append(_travel(one))
    listed = ", ".join(f"{words} in {' and '.join(which)}" for words, which in turns.items())
    told = [f"Axis 1 turns {listed}."] if turns else []
    notes = [note for one in envelopes for note in one.notes]
    told += [f"{note[:1].upper()}{note[1:].rstrip('.')}." for note in dict.fromkeys(notes)]
    return [*cautions, *told]


def rows_of(
    envelopes: Sequence[Envelope], labels: SheetLabels, units: Units, scale: str
) -> list[list[Field]]:
    """Return the fields of the title block, row by row."""
    point = "tool point" if envelopes[0].point == TOOL else "centre of the wrist"
    rows = [
        [
            Field("arm", labels.arm, 0.36, NORMAL),
            Field("title", labels.title or "-", 0.48),
            Field("document", "envelope", 0.16),
        ],
        [
            Field("tool", labels.tool, 0.26),
            Field("point", point, 0.24),
            Field("revision", labels.revision, 0.09),
            Field("convention", labels.convention, 0.13),
            Field("method", _method(envelopes, units), 0.28),
        ],
    ]
    rows += [_measures(one, envelopes, units) for one in envelopes]
    if len(envelopes) == 1:
        rows.append([Field(f"{_other(envelopes[0])}", "not shown", 1.0)])
    rows.append(
        [
            Field("digest of the arm", labels.digest, 0.6),
            Field("lengths in", units.length, 0.08),
            Field("scale", scale, 0.11, NORMAL),
            Field(SYMBOL, "first angle", 0.21),
        ]
    )
    return rows


def _measures(one: Envelope, envelopes: Sequence[Envelope], units: Units) -> list[Field]:
    line = Line.DASHED if _is_second(one, envelopes) else Line.WIDE
    measures = _measured(one, units)
    if one is not envelopes[0] and measures == _measured(envelopes[0], units):
        return [Field(_travel(one), f"the same as {_travel(envelopes[0])}", 1.0)]
    first_view = "section" if one.section.kind == SECTION else "front view"
    captions = (f"area of {first_view}", "area of plan", "volume")
    return [
        Field("boundary of what is reached in", _travel(one), 0.25, sample=line),
        *(Field(caption, words, 0.25) for caption, words in zip(captions, measures, strict=True)),
    ]


def _measured(one: Envelope, units: Units) -> tuple[str, str, str]:
    return (
        measure_words(one.section.area, 2, units),
        measure_words(one.plan.area, 2, units),
        measure_words(one.volume, 3, units),
    )


def _method(envelopes: Sequence[Envelope], units: Units) -> str:
    views = [view for one in envelopes for view in (one.section, one.plan)]
    resolutions = [view.resolution for view in views if view.resolution is not None]
    if not resolutions:
        return "exact curves"
    which = "in part sampled" if any(view.exact for view in views) else "sampled"
    return f"{which}, resolution {units.value_out(max(resolutions), 'm'):.3g} {units.length}"


def _dead_words(envelope: Envelope, units: Units) -> str:
    turn = envelope.turn
    if turn is None or turn.dead_from is None or turn.dead_to is None:
        return ""
    return angle_words(turn.dead_to - turn.dead_from, units)


def _is_second(one: Envelope, envelopes: Sequence[Envelope]) -> bool:
    return one.working and len(envelopes) > 1


def _travel(one: Envelope) -> str:
    return WORKING if one.working else TRAVEL


def _other(one: Envelope) -> str:
    return TRAVEL if one.working else WORKING
