"""Arms of all sizes, their sheets, and what a sheet has on it, read from its text alone."""

import re
import xml.etree.ElementTree as ElementTree
from collections.abc import Mapping, Sequence
from functools import cache
from typing import NamedTuple

import numpy as np

from kinematics.arm import Arm
from kinematics.envelope.envelope import envelope_of
from kinematics.envelope.shapes import Envelope
from kinematics.number_checks import FloatArray
from kinematics.table import Convention, JointKind, Row, Table, Travel
from service.convert import UNITS
from service.drawings.envelope_sheet import envelope_sheet
from service.drawings.envelope_words import SheetLabels

WIDTHS = {**dict.fromkeys("WMm", 0.9), **dict.fromkeys("iljI.,:;' !/|-()[]ft", 0.29)}
"""Of letters that are not 0.6 of the size of a typeface wide."""

SVG = "{http://www.w3.org/2000/svg}"
QUARTER = np.pi / 2
CAUTIONS = ("Not a safety function.", "Geometry only.")


def _row(
    kind: str,
    dh: tuple[float, float, float, float],
    travel: tuple[float, float] | None = None,
    working: tuple[float, float] | None = None,
) -> Row:
    joint = JointKind.REVOLUTE if kind == "turn" else JointKind.PRISMATIC
    return Row(
        joint,
        *dh,
        travel=None if travel is None else Travel(*travel),
        working_travel=None if working is None else Travel(*working),
    )


def _scaled(size: float) -> tuple[Row, ...]:
    """Return a column with two links, of any size."""
    return (
        _row("turn", (0.0, QUARTER, 0.4 * size, 0.0), (-2.8, 2.8), (-2.0, 2.5)),
        _row("turn", (0.5 * size, 0.0, 0.0, 0.0), (-1.0, 2.0), (-0.9, 1.9)),
        _row("turn", (0.5 * size, 0.0, 0.0, 0.0), (-2.5, -0.2)),
    )


ROWS: Mapping[str, tuple[Row, ...]] = {
    "millimetre": _scaled(1e-3),
    "metre": _scaled(1.0),
    "hundred metres": _scaled(100.0),
    "point": (_row("turn", (0.0, 0.0, 0.0, 0.0)),),
    "point far up": (_row("turn", (0.0, 0.0, 0.5, 0.0)),),
    "circle": (_row("turn", (0.4, 0.0, 0.0, 0.0), (-1.0, 2.0)),),
    "slide": (_row("slide", (0.0, 0.0, 0.0, 0.0), (0.1, 0.9)),),
    "level": (
        _row("turn", (0.5, 0.0, 0.0, 0.0), (-2.5, 2.5), (-2.0, 2.0)),
        _row("turn", (0.4, 0.0, 0.0, 0.0), (-2.6, 2.6)),
    ),
    "long gantry": (
        _row("slide", (0.0, QUARTER, 0.0, QUARTER), (0.0, 4.0), (0.1, 3.8)),
        _row("slide", (0.0, QUARTER, 0.0, QUARTER), (0.0, 100.0), (1.0, 99.0)),
        _row("slide", (0.0, 0.0, 0.0, 0.0), (-2.0, 0.0), (-1.9, -0.1)),
    ),
    "mast": (
        _row("turn", (0.0, 0.0, 0.2, 0.0), (-3.0, 3.0)),
        _row("slide", (0.0, QUARTER, 0.0, 0.0), (0.0, 20.0)),
        _row("turn", (0.3, 0.0, 0.0, 0.0), (-1.0, 1.0)),
    ),
}


@cache
def envelopes(name: str) -> tuple[Envelope, ...]:
    """Return the envelopes of one of the arms, of travel and of working travel."""
    arm = Arm("any", Table(Convention.STANDARD, ROWS[name]))
    return tuple(envelope_of(arm, np.eye(4), working=working) for working in (False, True))


LABELS = SheetLabels("any", "An arm", "3", "0f" * 32, "gripper", "standard", CAUTIONS)


def sheet(
    of: Sequence[Envelope], labels: SheetLabels = LABELS, units: str = "mm-deg"
) -> ElementTree.Element:
    """Return a sheet, parsed."""
    return ElementTree.fromstring(envelope_sheet(of, labels, UNITS[units]))


class Words(NamedTuple):
    """Words of a sheet, and the room they take at most: left, top, right, bottom; mm."""

    said: str
    box: tuple[float, float, float, float]

    def meets(self, other: "Words") -> bool:
        """Whether they share any room."""
        (left, top, right, bottom), theirs = self.box, other.box
        return left < theirs[2] and theirs[0] < right and top < theirs[3] and theirs[1] < bottom


def words_of(svg: ElementTree.Element) -> list[Words]:
    """Return all words of a sheet, as much room as their letters ever take taken for each.

    Capitals are 0.73 of the size high; a letter or figure is held to be 0.6 of it wide, others as
    below.
    """
    found = []
    for text in svg.iter(f"{SVG}text"):
        said, size = text.text or "", float(text.attrib["font-size"])
        x, y = float(text.attrib["x"]), float(text.attrib["y"])
        width = size * sum(WIDTHS.get(letter, 0.6) for letter in said)
        begin = -width * {"start": 0.0, "middle": 0.5, "end": 1.0}[text.attrib["text-anchor"]]
        if "transform" in text.attrib:
            box = (x - 0.73 * size, y - begin - width, x, y - begin)
        else:
            box = (x + begin, y - 0.73 * size, x + begin + width, y)
        found.append(Words(said, box))
    return found


def points_of(path: str) -> FloatArray:
    """Return the points of a path, (count, 2)."""
    numbers = [float(number) for number in re.findall(r"-?\d+\.?\d*(?:e-?\d+)?", path)]
    return np.array(numbers).reshape(-1, 2)


def drawn(svg: ElementTree.Element, about: str) -> FloatArray:
    """Return the points of the line about something, (count, 2), mm."""
    (path,) = [one for one in svg.iter(f"{SVG}path") if one.get("data-about") == about]
    return points_of(path.attrib["d"])


def mm_per_metre(svg: ElementTree.Element) -> float:
    """Return the scale that is printed."""
    (scale,) = [words.said for words in words_of(svg) if re.fullmatch(r"\d+:\d+", words.said)]
    paper, real = scale.split(":")
    return 1000.0 * int(paper) / int(real)
