"""What is put on paper of a survey of targets: verdicts, margins, what is short, where it lies.

Idea: counts are of all targets; lists and drawings are of as many as a page can show, the first
some ten thousand, and say so. Left out: the page (web/survey_report.py).
"""

import zlib
from collections.abc import Sequence
from itertools import pairwise
from math import isinf
from typing import Any

import numpy as np

from service.storage.ports import Survey, SurveyStorage
from service.surveys.kinds import Point, Report
from service.surveys.reach_pieces import rows_of
from service.surveys.reach_results import columns_from, summary_of
from service.wire.csv_text import REFUSALS_FROM
from service.wire.reach_lines import ReachColumns

MOST_LOOKED_AT = 200
"""Pieces: some seconds of reading."""

MOST_LISTED, MOST_DRAWN = 40, 4000
_BORDERS = (0.0, 0.02, 0.05, 0.1, 0.2, 0.5)
"""Of margins: the smallest share of travel left."""


def report_of(survey: Survey, store: SurveyStorage) -> Report:
    """Return the tables and points of a survey that succeeded."""
    summary = summary_of(survey)
    count = len(store.sizes(survey.id))
    joints = int(survey.about["joints"])
    margins: list[float] = []
    tight: list[tuple[float, str, str]] = []
    without: list[tuple[str, str, str]] = []
    points: list[Point] = []
    looked_at = min(count, MOST_LOOKED_AT)
    for number in range(looked_at):
        columns = columns_from(zlib.decompress(store.made(survey.id, number)), joints)
        rows = rows_of(store.given(survey.id, number))
        firsts = [line for line, rank in enumerate(columns.ranks) if rank <= 1]
        margins += _margins_of(columns, firsts)
        tight = sorted(tight + _tight_of(columns, firsts))[:MOST_LISTED]
        without = (without + _without_of(columns, firsts))[:MOST_LISTED]
        for row, line in zip(rows, firsts, strict=True):
            place = _place_of(row)
            if place is not None and len(points) < MOST_DRAWN:
                points.append(Point(place, columns.verdicts[line] or "refused"))
    verdicts = [(verdict.replace("_", " "), number) for verdict, number in summary.items()]
    tables: list[tuple[str, Sequence[str], Sequence[Sequence[object]]]] = [
        (
            "Verdicts",
            ("verdict", "targets"),
            verdicts,
        ),
        ("Travel left at the best posture", ("share of travel", "targets"), _bins(margins)),
        ("Least travel left", ("target", "margin", "branch"), [_tight_line(one) for one in tight]),
        ("Not reached", ("target", "verdict", "why"), without),
    ]
    said = (
        f"Margins, lists and drawings are of the first {looked_at} of {count} pieces; "
        if (looked_at < count)
        else ""
    )
    said += f"at most {MOST_LISTED} lines are listed and {MOST_DRAWN} targets drawn."
    return Report(tables, points, said)


def _margins_of(columns: ReachColumns, firsts: Sequence[int]) -> list[float]:
    usable = [line for line in firsts if columns.codes[line] < REFUSALS_FROM]
    found: list[float] = columns.margins[usable].tolist()
    return found


def _tight_of(columns: ReachColumns, firsts: Sequence[int]) -> list[tuple[float, str, str]]:
    return [
        (float(columns.margins[line]), columns.names[line] or "-", columns.branches[line])
        for line in firsts
        if columns.codes[line] < REFUSALS_FROM and np.isfinite(columns.margins[line])
    ]


def _without_of(columns: ReachColumns, firsts: Sequence[int]) -> list[tuple[str, str, str]]:
    return [
        (columns.names[line] or "-", columns.verdicts[line] or "refused", columns.reasons[line])
        for line in firsts
        if columns.codes[line] >= REFUSALS_FROM
    ]


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
    except (TypeError, ValueError, KeyError, IndexError):
        return None
    return x, y, z
