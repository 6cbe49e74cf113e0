"""The boundaries of an envelope as a table: a row for each point of a curve, as CSV or as NPY.

Idea: both have the same columns under the same names; words of the CSV are numbers in the NPY.
Areas and volume, with how far off they may be, are no points of a boundary: the JSON result, the
sheet and the report tell them. Left out: the envelope itself (envelopes.py).
"""

from collections.abc import Iterator
from itertools import count
from typing import NamedTuple

import numpy as np

from kinematics.envelope.shapes import PLAN, SECTION, SIDE
from kinematics.number_checks import FloatArray
from service.operations.envelopes import TRAVEL, WORKING
from service.storage.ports import Document
from service.surveys.kinds import Told
from service.wire import csv_text, npy
from service.wire.csv_text import number_texts

_WITHIN = {"travel": TRAVEL, "working_travel": WORKING}
_WITHINS = (TRAVEL, WORKING)
_VIEWS = (SECTION, SIDE, PLAN)
_BOUNDARIES = ("inner", "outer")
"""Words by the numbers that stand for them in NPY."""


class _Curve(NamedTuple):
    """One curve: its words, its number in its view, its points (count, 2) in the user's unit."""

    within: str
    view: str
    number: int
    boundary: str
    points: FloatArray


def columns_of(unit: str) -> list[str]:
    """Return the names of the columns.

    Examples
    --------
    >>> columns_of("mm")
    ['within', 'view', 'curve', 'boundary', 'radius_or_x_mm', 'height_or_y_mm']
    """
    return ["within", "view", "curve", "boundary", f"radius_or_x_{unit}", f"height_or_y_{unit}"]


def told_as_csv(answer: Document, unit: str) -> Told:
    """Return the boundaries of an answer as CSV.

    Examples
    --------
    >>> square = {"outer": True, "points": [[0, 0], [2.5, 0], [2.5, 1], [0, 1]]}
    >>> answer = {"travel": {"section": {"kind": "side", "curves": [square]},
    ...                      "plan": {"kind": "plan", "curves": []}}, "working_travel": None}
    >>> told_as_csv(answer, "m").head.split()[:3]  # doctest: +NORMALIZE_WHITESPACE
    [b'within,view,curve,boundary,radius_or_x_m,height_or_y_m',
     b'travel,side,1,outer,0.0,0.0', b'travel,side,1,outer,2.5,0.0']
    """
    lines = [",".join(columns_of(unit))]
    for curve in _curves(answer):
        begin = f"{curve.within},{curve.view},{curve.number},{curve.boundary},"
        lines += [begin + place for place in number_texts(curve.points)]
    return Told(csv_text.MEDIA_TYPE, ("\r\n".join(lines) + "\r\n").encode("ascii"))


def told_as_npy(answer: Document, unit: str) -> Told:
    """Return the boundaries of an answer as a table of doubles."""
    rows = [
        np.column_stack(
            [
                np.full(len(curve.points), _WITHINS.index(curve.within)),
                np.full(len(curve.points), _VIEWS.index(curve.view)),
                np.full(len(curve.points), curve.number),
                np.full(len(curve.points), _BOUNDARIES.index(curve.boundary)),
                curve.points,
            ]
        )
        for curve in _curves(answer)
    ]
    columns = columns_of(unit)
    table = np.concatenate([np.empty((0, len(columns))), *rows])
    headers = {"X-Columns": ",".join(columns)}
    return Told(npy.MEDIA_TYPE, npy.npy_head(table.shape) + table.tobytes(), headers=headers)


def _curves(answer: Document) -> Iterator[_Curve]:
    """Yield the curves in the order of the answer, counted from 1 in each view."""
    for key, within in _WITHIN.items():
        reach = answer.get(key)
        for view in (reach["section"], reach["plan"]) if reach else ():
            for number, curve in zip(count(1), view["curves"], strict=False):
                points = np.array(curve["points"], np.float64)
                boundary = _BOUNDARIES[curve["outer"]]
                yield _Curve(within, view["kind"], number, boundary, points)
