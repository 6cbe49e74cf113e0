"""What a survey of targets found: kept as columns, told as JSON, CSV or a table of doubles.

Columns are kept as JSON, whose shortest doubles come back to the last bit, and are told piece by
piece, so that a million targets never stand in memory. Left out: making them (reach_checks.py).
"""

import zlib
from collections import Counter
from collections.abc import Callable, Mapping
from dataclasses import fields, replace
from functools import partial
from typing import Any

import numpy as np
import orjson

from kinematics.reach.targets import VERDICTS
from kinematics.table import FloatArray
from service.storage.ports import Survey
from service.surveys.kinds import Told
from service.wire import csv_text, npy
from service.wire.answers import json_bytes
from service.wire.csv_text import REFUSALS_FROM
from service.wire.formats import JSON, Format
from service.wire.reach_lines import ReachColumns, SameInAll, joint_keys, reach_head, reach_lines

REFUSED, LINES = "refused", "lines"
_NUMBERS = {"codes": np.int64, "joints": np.float64, "margins": np.float64, "errors": np.float64}
_OF_VERDICT = {verdict: number for number, verdict in enumerate(VERDICTS)}


def columns_bytes(columns: ReachColumns) -> bytes:
    """Return columns as they are kept."""
    document = {field.name: getattr(columns, field.name) for field in fields(columns)}
    document["applying"] = {str(code): where for code, where in columns.applying.items()}
    # JSON has no infinity, which is the margin without travel limits.
    document["unlimited"] = np.isposinf(columns.margins)
    return orjson.dumps(document, option=orjson.OPT_SERIALIZE_NUMPY)


def columns_from(kept: bytes, joints: int) -> ReachColumns:
    """Return the columns that were kept.

    Examples
    --------
    >>> numbers = np.array([0.1, -0.0, np.inf])
    >>> joints, codes, no = numbers[:, None], np.zeros(3, dtype=np.int64), [""] * 3
    >>> errors = np.zeros((3, 2))
    >>> columns = ReachColumns(
    ...     codes, {}, no, [1] * 3, joints, numbers, no, [1] * 3, no, no, errors, no, no
    ... )
    >>> columns_from(columns_bytes(columns), 1).margins
    array([ 0.1, -0. ,  inf])
    """
    document: dict[str, Any] = orjson.loads(kept)
    unlimited = np.array(document.pop("unlimited"), dtype=np.bool_)
    numbers = {name: np.array(document[name], dtype) for name, dtype in _NUMBERS.items()}
    numbers["margins"][unlimited] = np.inf
    shape = (len(unlimited), joints)
    columns = ReachColumns(**{**document, **numbers, "joints": numbers["joints"].reshape(shape)})
    applying = {int(code): np.array(where, np.bool_) for code, where in columns.applying.items()}
    return replace(columns, applying=applying)


def counts_of(columns: ReachColumns) -> Mapping[str, int]:
    """Return how many targets there are of each verdict, and how many lines tell them."""
    counts = Counter[str]({LINES: len(columns.verdicts)})
    for verdict, rank in zip(columns.verdicts, columns.ranks, strict=True):
        if rank <= 1:
            counts[verdict or REFUSED] += 1
    return counts


def summary_of(survey: Survey) -> dict[str, int]:
    """Return what was found in all, as answers about targets have it."""
    found = {verdict: survey.counts.get(verdict, 0) for verdict in (*VERDICTS, REFUSED)}
    return {"targets": survey.done} | {key.replace("-", "_"): n for key, n in found.items()}


def told_results(survey: Survey, wanted: Format) -> Told:
    """Return how the result is told."""
    joints = int(survey.about["joints"])

    def of_columns(tell: Callable[[int, ReachColumns], bytes]) -> Callable[[int, bytes], bytes]:
        return lambda number, made: tell(number, columns_from(zlib.decompress(made), joints))

    if wanted == "csv":
        same = _same(survey)
        lines = of_columns(lambda _, columns: reach_lines(columns, same))
        return Told(csv_text.MEDIA_TYPE, reach_head(joints), lines)
    if wanted == "npy":
        names = columns_told(joints)
        head = npy.npy_head((survey.counts.get(LINES, 0), len(names)))
        headers = {"X-Columns": ",".join(names)}
        return Told(npy.MEDIA_TYPE, head, of_columns(_doubles), headers=headers)
    about = {"survey": survey.id, **survey.about}
    head = json_bytes(about)[:-1] + b',"results":['
    tail = b'],"summary":' + json_bytes(summary_of(survey)) + b"}"
    return Told(JSON, head, of_columns(partial(_items)), tail)


def columns_told(joints: int) -> tuple[str, ...]:
    """Return the names of the columns of a table of doubles; verdicts are counted from 0.

    Examples
    --------
    >>> columns_told(1)
    ('code', 'verdict', 'solutions', 'solution', 'q1', 'margin', 'position_error', 'angle_error')
    """
    before, after = ("code", "verdict", "solutions", "solution"), ("position_error", "angle_error")
    return (*before, *joint_keys(joints), "margin", *after)


def _doubles(_: int, columns: ReachColumns) -> bytes:
    verdicts = [_OF_VERDICT.get(verdict, -1) for verdict in columns.verdicts]
    told: list[FloatArray] = [
        *(np.array(column, dtype=float) for column in (columns.codes, verdicts)),
        *(np.array(column, dtype=float) for column in (columns.counts, columns.ranks)),
    ]
    table = np.column_stack([*told, columns.joints, columns.margins, columns.errors])
    return npy.npy_bytes(table).tobytes()


def _same(survey: Survey) -> SameInAll:
    """Return what all lines share: the moment is that of the survey, however often it is read."""
    arm = survey.about["arm"]
    at = round(survey.created_at.timestamp() * 1000)
    return SameInAll(0, 0, at, survey.about["units"], arm["revision"] or 0, arm["digest"])


def _items(number: int, columns: ReachColumns) -> bytes:
    items: list[dict[str, Any]] = []
    for line, rank in enumerate(columns.ranks):
        if rank <= 1:
            items.append(_item(columns, line))
        if rank:
            items[-1]["solutions"].append(_solution(columns, line))
    return (b"," if number else b"") + json_bytes(items)[1:-1]


def _item(columns: ReachColumns, line: int) -> dict[str, Any]:
    code, verdict = int(columns.codes[line]), columns.verdicts[line]
    reason = columns.reasons[line]
    return {
        "name": columns.names[line] or None,
        "ok": code < REFUSALS_FROM,
        "code": code,
        "verdict": verdict or None,
        "proof": columns.proofs[line] or None,
        "reason": {"say": reason} if reason else None,
        "found": columns.counts[line],
        "solutions": [],
    }


def _solution(columns: ReachColumns, line: int) -> dict[str, Any]:
    margin, (position, angle) = float(columns.margins[line]), columns.errors[line].tolist()
    return {
        "joints": columns.joints[line].tolist(),
        "margin": margin if np.isfinite(margin) else None,
        "branch": columns.branches[line],
        "state": columns.states[line],
        "position_error": position,
        "angle_error": angle,
    }
