"""Samples of a survey told as JSON, CSV or NPY, as ``/v1/reach/samples`` tells them.

Orientations are quaternions in every format, for they are kept so. Left out: making samples
(samples.py).
"""

from collections.abc import Callable

import numpy as np

from kinematics.table import FloatArray
from service.convert import UNITS
from service.storage.ports import Survey, SurveyStorage
from service.surveys.kinds import Told
from service.surveys.sample_extremes import best_of, extremes_length, extremes_told
from service.wire import csv_text, npy
from service.wire.answers import json_bytes
from service.wire.formats import JSON, Format

JUDGED, NEAR, SINGULAR = "judged", "near", "singular"
"""What is counted of samples."""

_NOT_TOLD = ("columns", "joints", "task")
_WIDTHS = {"x": ("position", 3), "qw": ("orientation", 4)}
"""What begins at a column, and how many columns it has; joints are the rest."""


def told_results(survey: Survey, wanted: Format, store: SurveyStorage) -> Told:
    """Return how the result is told."""
    columns: list[str] = survey.about["columns"]
    head_length = extremes_length(survey.about["joints"])
    headers = {"X-Columns": ",".join(columns)}

    def of_table(tell: Callable[[FloatArray], bytes]) -> Callable[[int, bytes], bytes]:
        return lambda number, made: tell(table_from(made, head_length, len(columns)))

    if wanted == "npy":
        head = npy.npy_head((survey.total, len(columns)))
        return Told(npy.MEDIA_TYPE, head, lambda _, made: made[head_length:], headers=headers)
    if wanted == "csv":
        head = (",".join(columns) + "\r\n").encode("ascii")
        return Told(csv_text.MEDIA_TYPE, head, of_table(csv_text.plain_lines), headers=headers)
    shown = {key: value for key, value in survey.about.items() if key not in _NOT_TOLD}
    about = {"survey": survey.id, **shown, "summary": summary_of(survey, store)}
    items = of_table(lambda table: _items(table, columns))
    return Told(
        JSON,
        json_bytes(about)[:-1] + b',"samples":[',
        lambda number, made: (b"," if number else b"") + items(number, made),
        b"]}",
    )


def table_from(made: bytes, head_length: int, columns: int) -> FloatArray:
    """Return what a piece tells of its samples, (samples, columns)."""
    return np.frombuffer(made, "<f8", offset=head_length).reshape(-1, columns)


def summary_of(survey: Survey, store: SurveyStorage) -> dict[str, object]:
    """Return what all samples say together, as answered."""
    joints, counts = int(survey.about["joints"]), survey.counts
    best = best_of(store.beginnings(survey.id, extremes_length(joints)), joints)
    judged = counts[JUDGED]
    return {
        "extremes": extremes_told(best, UNITS[survey.about["units"]]),
        "singularity": {
            "judged": judged,
            "near": counts.get(NEAR, 0) / judged,
            "singular": counts.get(SINGULAR, 0) / judged,
            "task": survey.about["task"],
        },
    }


def _items(table: FloatArray, columns: list[str]) -> bytes:
    told: dict[str, list[list[float]]] = {}
    at = 0
    while at < len(columns):
        name, width = _WIDTHS.get(columns[at], ("joints", len(columns) - at))
        told[name] = table[:, at : at + width].tolist()
        at += width
    each = zip(*told.values(), strict=True)
    return json_bytes([dict(zip(told, values, strict=True)) for values in each])[1:-1]
