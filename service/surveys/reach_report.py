"""What is put on paper of a survey of targets: verdicts, margins, what is short, where it lies.

Idea: counts are of all targets; lists and drawings are of as many as a page can show, the first
some ten thousand, and say so. Left out: the page (web/survey_report.py).
"""

from collections.abc import Mapping, Sequence
from itertools import pairwise
from math import isinf
from typing import Any

import numpy as np

from kinematics.findings import NEAR, OUTSIDE_WORKING_TRAVEL, SINGULAR
from service.storage.ports import Survey, SurveyStorage
from service.surveys.kinds import Point, Report, ReportTable
from service.surveys.reach_kept import columns_from
from service.surveys.reach_pieces import rows_of
from service.surveys.reach_results import summary_of
from service.wire.csv_text import REFUSALS_FROM
from service.wire.reach_lines import ReachColumns

MOST_LOOKED_AT = 100
"""Pieces: some seconds of reading."""

MOST_TIGHT, MOST_WITHOUT, MOST_DRAWN = 40, 400, 4000
"""Lines of two lists, a page and some ten; and marks that a drawing can show."""

_LONGEST_NAME = 40
_FARTHEST = 1e12
"""In whatever unit: targets farther off, or that are no numbers, are refused, and would leave a
drawing of all no scale."""

_RESERVES = {
    NEAR: "near singular",
    SINGULAR: "singular",
    OUTSIDE_WORKING_TRAVEL: "outside working travel",
}

_BORDERS = (0.0, 0.02, 0.05, 0.1, 0.2, 0.5)
"""Of margins: the smallest share of travel left."""


class _Seen:
    """What pieces tell, as far as a page shows it."""

    def __init__(self) -> None:
        self.margins: list[float] = []
        self.tight: list[tuple[float, str, str]] = []
        self.reserves = 0
        self.doubtful: list[tuple[str, str]] = []
        self.without: list[tuple[str, str, str]] = []
        self.points: list[Point] = []
        self._targets = 0

    def add(self, made: bytes, given: bytes) -> None:
        """Add the next piece."""
        columns = columns_from(made)
        firsts = np.flatnonzero(columns.ranks <= 1).tolist()
        names = _names_of(columns, firsts, self._targets)
        self._targets += len(firsts)
        self.margins += _margins_of(columns, firsts)
        self.tight = sorted(self.tight + _tight_of(columns, firsts, names))[:MOST_TIGHT]
        doubtful = _doubtful_of(columns, firsts, names)
        self.reserves += len(doubtful)
        self.doubtful = (self.doubtful + doubtful)[:MOST_WITHOUT]
        self.without = (self.without + _without_of(columns, firsts, names))[:MOST_WITHOUT]
        if len(self.points) < MOST_DRAWN:
            verdicts = columns.verdicts.told()
            for row, line in zip(rows_of(given), firsts, strict=True):
                place = _place_of(row)
                if place is not None:
                    self.points.append(Point(place, verdicts[line] or "refused"))
            del self.points[MOST_DRAWN:]


def report_of(survey: Survey, store: SurveyStorage) -> Report:
    """Return the tables and points of a survey that succeeded."""
    summary = summary_of(survey)
    count = len(store.sizes(survey.id))
    seen = _Seen()
    looked_at = min(count, MOST_LOOKED_AT)
    for number in range(looked_at):
        seen.add(store.made(survey.id, number), store.given(survey.id, number))
    said = (
        f"Margins, lists and drawings are of the first {looked_at} of {count} pieces. "
        if looked_at < count
        else ""
    )
    if len(seen.points) == MOST_DRAWN:
        said += f"The first {MOST_DRAWN} targets are drawn."
    asked = [("targets", survey.total), ("of these reachable", summary["reachable"])]
    if looked_at == count:
        asked.append(("of these with a reserve", seen.reserves))
    return Report(asked, _tables(summary, seen), seen.points, said=said)


def _tables(summary: Mapping[str, int], seen: _Seen) -> Sequence[ReportTable]:
    reached = summary["reachable"]
    return [
        ReportTable("Verdicts", ("verdict", "targets", "share"), _verdicts(summary)),
        ReportTable(
            "Travel left at the best posture",
            ("share of travel", "targets"),
            _bins(seen.margins),
            "The smallest share of travel that is left at any joint: 0 at a limit, 0.5 in the "
            "middle of all.",
        ),
        ReportTable(
            "Least travel left",
            ("target", "margin", "branch"),
            [_tight_line(one) for one in seen.tight],
            _listed_of(len(seen.tight), reached),
        ),
        ReportTable(
            "Reached, but",
            ("target", "what is to be known of the best posture"),
            seen.doubtful,
            _listed_of(len(seen.doubtful), seen.reserves),
        ),
        ReportTable(
            "Not reached",
            ("target", "verdict", "why"),
            seen.without,
            _listed_of(len(seen.without), summary["targets"] - reached),
        ),
    ]


def _listed_of(listed: int, there: int) -> str:
    return f"{listed} of {there} are listed." if listed < there else ""


def _verdicts(summary: Mapping[str, int]) -> Sequence[tuple[str, int, str]]:
    whole = max(summary["targets"], 1)
    return [
        (verdict.replace("_", " "), number, _share(number, whole))
        for verdict, number in summary.items()
    ]


def _share(number: int, whole: int) -> str:
    """Return a share in per cent, which is 0 or 100 only where it is none or all.

    Examples
    --------
    >>> _share(1, 3), _share(0, 7), _share(1, 100_000), _share(99_998, 100_000), _share(7, 7)
    ('33.3 %', '0.0 %', '< 0.1 %', '> 99.9 %', '100.0 %')
    """
    if number == 0 or number == whole:
        return f"{100 * number / whole:.1f} %"
    tenths = 1000 * number / whole
    if tenths < 0.5:
        return "< 0.1 %"
    return "> 99.9 %" if tenths >= 999.5 else f"{tenths / 10:.1f} %"


def _margins_of(columns: ReachColumns, firsts: Sequence[int]) -> list[float]:
    usable = [line for line in firsts if columns.codes[line] < REFUSALS_FROM]
    found: list[float] = columns.margins[usable].tolist()
    return found


def _names_of(columns: ReachColumns, firsts: Sequence[int], before: int) -> Mapping[int, str]:
    """Return what targets are called, by line; those without a name by their number from 1."""
    return {
        line: shortened(columns.names.get(line, f"no. {number}"))
        for number, line in enumerate(firsts, start=before + 1)
    }


def shortened(name: str) -> str:
    """Return a name that fits into a column of a page.

    Examples
    --------
    >>> shortened("lug-1"), len(shortened("x" * 200))
    ('lug-1', 40)
    """
    return name if len(name) <= _LONGEST_NAME else name[: _LONGEST_NAME - 1] + "…"


def _tight_of(
    columns: ReachColumns, firsts: Sequence[int], names: Mapping[int, str]
) -> list[tuple[float, str, str]]:
    branches = columns.branches.told()
    return [
        (float(columns.margins[line]), names[line], branches[line])
        for line in firsts
        if columns.codes[line] < REFUSALS_FROM and np.isfinite(columns.margins[line])
    ]


def _doubtful_of(
    columns: ReachColumns, firsts: Sequence[int], names: Mapping[int, str]
) -> list[tuple[str, str]]:
    """Return why a target that is reached is so with a reserve, of each such."""
    found = []
    for line in firsts:
        said = [
            say
            for code, say in _RESERVES.items()
            if code in columns.applying and columns.applying[code][line]
        ]
        if said and columns.codes[line] < REFUSALS_FROM:
            found.append((names[line], ", ".join(said)))
    return found


def _without_of(
    columns: ReachColumns, firsts: Sequence[int], names: Mapping[int, str]
) -> list[tuple[str, str, str]]:
    verdicts = columns.verdicts.told()
    return [
        (names[line], _spaced(verdicts[line] or "refused"), columns.reasons.get(line, ""))
        for line in firsts
        if columns.codes[line] >= REFUSALS_FROM
    ]


def _spaced(verdict: str) -> str:
    return verdict.replace("-", " ")


def _tight_line(one: tuple[float, str, str]) -> tuple[str, str, str]:
    margin, name, branch = one
    return name, f"{margin:.4f}", branch


def _bins(margins: Sequence[float]) -> list[tuple[str, int]]:
    """Return how many margins there are between borders.

    Examples
    --------
    >>> _bins([0.01, 0.03, 0.04, 0.5])[:3], _bins([np.inf])[-1]
    ([('0 to 0.02', 1), ('0.02 to 0.05', 2), ('0.05 to 0.1', 0)], ('no travel limits', 1))
    """
    told = []
    for low, high in pairwise(_BORDERS):
        last = high == _BORDERS[-1]
        inside = [m for m in margins if low <= m < high or (last and m == high)]
        told.append((f"{low:g} to {high:g}", len(inside)))
    return [*told, ("no travel limits", sum(map(isinf, margins)))]


def _place_of(row: Any) -> tuple[float, float, float] | None:
    try:
        given = row["position"] if "position" in row else row["pose"]
        if isinstance(given, dict) and "matrix" in given:
            given = [line[3] for line in given["matrix"][:3]]
        elif isinstance(given, dict):
            given = given["position"]
        x, y, z = (float(number) for number in given)
    except (TypeError, ValueError, KeyError, IndexError, OverflowError):
        return None
    return (x, y, z) if all(abs(number) <= _FARTHEST for number in (x, y, z)) else None
