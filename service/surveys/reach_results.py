"""What a survey of targets found: told as JSON, CSV or a table of doubles.

Columns are told piece by piece, so that a million targets never stand in memory. Left out: making
them (reach_checks.py), and how they are kept (reach_kept.py).
"""

from collections.abc import Callable, Sequence
from math import isnan
from typing import Any, NamedTuple

import numpy as np

from kinematics.reach.targets import VERDICTS
from kinematics.table import FloatArray
from service.convert import UNITS
from service.storage.ports import Survey, SurveyStorage
from service.surveys.kinds import Told
from service.surveys.reach_kept import LINES, REFUSED, columns_from
from service.surveys.reach_reading import read_piece
from service.wire import csv_text, npy
from service.wire.answers import json_bytes
from service.wire.csv_text import REFUSALS_FROM
from service.wire.formats import JSON, Format
from service.wire.reach_lines import (
    PLACE,
    ReachColumns,
    SameInAll,
    joint_keys,
    reach_head,
    reach_lines,
)


def summary_of(survey: Survey) -> dict[str, int]:
    """Return what was found in all, as answers about targets have it."""
    found = {verdict: survey.counts.get(verdict, 0) for verdict in (*VERDICTS, REFUSED)}
    return {"targets": survey.done} | {key.replace("-", "_"): n for key, n in found.items()}


def told_results(survey: Survey, wanted: Format, store: SurveyStorage) -> Told:
    """Return how the result is told."""
    joints, units = int(survey.about["joints"]), UNITS[survey.about["units"]]

    def of_columns(
        tell: Callable[[int, ReachColumns, FloatArray], bytes],
    ) -> Callable[[int, bytes], bytes]:
        def part(number: int, made: bytes) -> bytes:
            asked = read_piece(store.given(survey.id, number), units)
            return tell(number, columns_from(made), asked.positions_out(units))

        return part

    if wanted == "csv":
        same = _same(survey)
        lines = of_columns(lambda _, columns, places: reach_lines(columns, places, same))
        return Told(csv_text.MEDIA_TYPE, reach_head(joints), lines)
    if wanted == "npy":
        names = columns_told(joints)
        head = npy.npy_head((survey.counts.get(LINES, 0), len(names)))
        headers = {"X-Columns": ",".join(names)}
        return Told(npy.MEDIA_TYPE, head, of_columns(_doubles), headers=headers)
    about = {"survey": survey.id, **survey.about}
    head = json_bytes(about)[:-1] + b',"results":['
    tail = b'],"summary":' + json_bytes(summary_of(survey)) + b"}"
    return Told(JSON, head, of_columns(_items), tail)


def columns_told(joints: int) -> tuple[str, ...]:
    """Return the names of the columns of a table of doubles; verdicts are counted from 0.

    Examples
    --------
    >>> columns_told(1)[:6]
    ('code', 'verdict', 'solutions', 'solution', 'q1', 'margin')
    >>> columns_told(1)[6:]
    ('position_error', 'angle_error', 'x', 'y', 'z')
    """
    before, after = ("code", "verdict", "solutions", "solution"), ("position_error", "angle_error")
    return (*before, *joint_keys(joints), "margin", *after, *PLACE)


def _doubles(_: int, columns: ReachColumns, places: FloatArray) -> bytes:
    told = columns.codes, columns.verdicts.which, columns.counts, columns.ranks
    numbers = columns.joints, columns.margins, columns.errors, places[columns.targets]
    return npy.npy_bytes(np.column_stack([*told, *numbers])).tobytes()


def _same(survey: Survey) -> SameInAll:
    """Return what all lines share: the moment is that of the survey, however often it is read."""
    arm = survey.about["arm"]
    at = round(survey.created_at.timestamp() * 1000)
    return SameInAll(0, 0, at, survey.about["units"], arm["revision"] or 0, arm["digest"])


def _items(number: int, columns: ReachColumns, places: FloatArray) -> bytes:
    where = [None if isnan(place[0]) else place for place in places.tolist()]
    texts = _Spelled(*(getattr(columns, name).told() for name in _Spelled._fields))
    items: list[dict[str, Any]] = []
    for line, rank in enumerate(columns.ranks.tolist()):
        if rank <= 1:
            items.append(_item(columns, texts, line, where[len(items)]))
        if rank:
            items[-1]["solutions"].append(_solution(columns, texts, line))
    return (b"," if number else b"") + json_bytes(items)[1:-1]


class _Spelled(NamedTuple):
    """Texts of all lines."""

    verdicts: list[str]
    proofs: list[str]
    branches: list[str]
    states: list[str]


def _item(
    columns: ReachColumns, texts: _Spelled, line: int, place: Sequence[float] | None
) -> dict[str, Any]:
    code, reason = int(columns.codes[line]), columns.reasons.get(line)
    verdict, why = texts.verdicts[line] or None, columns.why.get(line) or {}
    said = {"say": reason} if reason else None
    item: dict[str, Any] = {
        "name": columns.names.get(line),
        "position": place,
        "ok": code < REFUSALS_FROM,
        "code": code,
        "verdict": verdict,
        "proof": texts.proofs[line] or None,
        "reason": why if why and verdict else said,
        "found": int(columns.counts[line]),
        "solutions": [],
    }
    return item if verdict or not why else {**item, "problem": why}


def _solution(columns: ReachColumns, texts: _Spelled, line: int) -> dict[str, Any]:
    margin, (position, angle) = float(columns.margins[line]), columns.errors[line].tolist()
    return {
        "joints": columns.joints[line].tolist(),
        "margin": margin if np.isfinite(margin) else None,
        "branch": texts.branches[line],
        "state": texts.states[line],
        "position_error": position,
        "angle_error": angle,
    }
