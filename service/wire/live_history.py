"""Live poses of the last ten minutes: what is asked with, and the answer in columns or lines.

Left out: how poses are found (service/operations/live_history.py).
"""

from collections.abc import Mapping
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.orientation_forms import TRIPLES
from kinematics.table import FloatArray
from service.errors import FormNotFlat
from service.live.history import KEPT_S
from service.web.document import parameter
from service.wire.answer_models import ArmIdentity, Open
from service.wire.answers import json_bytes
from service.wire.controller import FLAT_FORM, Format, single_question, wanted_format
from service.wire.flat import POSE_KEYS
from service.wire.live_query import LIVE_SHOWN, moment_in
from service.wire.models import UnitsName
from service.wire.query import number, unusable, whole_number
from service.wire.question_parameters import one_of
from service.wire.single import SingleQuestion

MOST_SAMPLES = 30_000
"""All of ten minutes: fifty a second are kept."""
_USUAL_SAMPLES = 1000
_POSE = frozenset({"tool", "frame", "form", "units", "tx", "ty", "tz", "tr1", "tr2", "tr3"})
PARAMETERS_OF_HISTORY = _POSE | {"from", "to", "every_ms", "limit", "format"}
_TIME = "A time, RFC 3339 or Unix milliseconds; "
HISTORY_SHOWN: tuple[dict[str, Any], ...] = (
    *(known for known in LIVE_SHOWN if known["name"] in _POSE),
    parameter("format", "Columns in JSON, or lines.", one_of("json", "csv")),
    parameter("from", _TIME + "the oldest that is kept if left out."),
    parameter("to", _TIME + "now if left out."),
    parameter(
        "every_ms",
        "One sample of each step of so many milliseconds, the last in it, counted back from the "
        "newest.",
        {"type": "number", "minimum": 0, "maximum": KEPT_S * 1000.0},
    ),
    parameter(
        "limit",
        f"How many samples at most, the newest; {_USUAL_SAMPLES} if left out.",
        {"type": "integer", "minimum": 1, "maximum": MOST_SAMPLES},
    ),
)


class HistoryQuestion(NamedTuple):
    """What is asked of the last ten minutes; times are Unix milliseconds."""

    pose: SingleQuestion
    wanted: Format
    from_ms: float
    to_ms: float
    every_ms: float
    limit: int


class HistoryAnswer(Open):
    """Samples of the last ten minutes, the oldest first; the n-th entry of each list is the n-th.

    `positions` are the path of the tool. `sequence` is -1 where the source said none.
    """

    arm: ArmIdentity
    units: UnitsName
    frame: str
    tool: Any
    form: str
    t_ms: list[int]
    sequence: list[int]
    simulated: list[bool]
    joints: list[list[float]]
    positions: list[list[float]]
    orientations: list[Any]


def history_question(arm: str, said: Mapping[str, str]) -> HistoryQuestion:
    """Return the question of a query string.

    Raises
    ------
    ServiceError, KinematicsError : a parameter that cannot be used.
    """
    wanted = wanted_format(said)
    if wanted not in ("json", "csv"):
        raise unusable("format", said["format"], "format=json or format=csv")
    pose = single_question(arm, {key: said[key] for key in _POSE & said.keys()}, wanted)
    if wanted == "csv" and pose.form not in TRIPLES:
        raise FormNotFlat(
            f"the form {pose.form} has no columns",
            where=("form",),
            location="query",
            value=pose.form,
            way_out=f"use one of the 24 angle triples, e.g. {FLAT_FORM}",
        )
    every_ms = number(said["every_ms"], "every_ms") if "every_ms" in said else 0.0
    if not 0.0 <= every_ms <= KEPT_S * 1000.0:
        raise unusable(
            "every_ms", said["every_ms"], f"give milliseconds from 0 to {KEPT_S * 1000.0:.0f}"
        )
    limit = whole_number(said["limit"], "limit") if "limit" in said else _USUAL_SAMPLES
    if not 1 <= limit <= MOST_SAMPLES:
        raise unusable("limit", said["limit"], f"give a whole number from 1 to {MOST_SAMPLES}")
    from_ms, to_ms = (
        moment_in(said[name], name) if name in said else open_end
        for name, open_end in (("from", float("-inf")), ("to", float("inf")))
    )
    return HistoryQuestion(pose, wanted, from_ms, to_ms, every_ms, limit)


def columns(
    head: Mapping[str, object],
    form: str,
    happened_ms: FloatArray,
    sequence: FloatArray,
    simulated: NDArray[np.bool_],
    joints: FloatArray,
    positions: FloatArray,
    orientations: FloatArray,
) -> bytes:
    """Return the answer in JSON."""
    return json_bytes(
        {
            **head,
            "form": form,
            "t_ms": happened_ms.astype(np.int64),
            "sequence": sequence.astype(np.int64),
            "simulated": simulated.tolist(),
            "joints": joints,
            "positions": positions,
            "orientations": np.ascontiguousarray(orientations),
        }
    )


def lines(
    happened_ms: FloatArray,
    sequence: FloatArray,
    simulated: NDArray[np.bool_],
    joints: FloatArray,
    positions: FloatArray,
    orientations: FloatArray,
) -> bytes:
    """Return the answer as CSV (RFC 4180): a line for each sample, numbers printed as in JSON."""
    names = [f"q{joint}" for joint in range(1, joints.shape[1] + 1)]
    head = ",".join(["t_ms", "sequence", "simulated", *names, *POSE_KEYS])
    if not len(joints):
        return f"{head}\r\n".encode("ascii")
    whole = np.column_stack([happened_ms, sequence, simulated]).astype(np.int64)
    real = np.ascontiguousarray(np.column_stack([joints, positions, orientations]))
    shown = (json_bytes(part)[2:-2].split(b"],[") for part in (whole, real))
    told = b"\r\n".join([first + b"," + second for first, second in zip(*shown, strict=True)])
    return head.encode("ascii") + b"\r\n" + told + b"\r\n"
