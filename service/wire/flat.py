"""Flat answers: one level, fixed order, every key always there.

Left out: fixed-width text (fixed_text.py) and csv about many postures (csv_text.py).
"""

import math
from collections.abc import Mapping, Sequence
from typing import Any

from service.wire.answers import json_bytes
from service.wire.single import SingleAnswer

CSV_MEDIA_TYPE = "text/csv; charset=utf-8"

NO_NUMBER = -999999.9999
"""Stands at the place of every number of a pose that could not be told."""

NO_ENTRY = -999999.9
"""The same for an entry of a Jacobian; shorter, so that eight joints stay within 1 kB."""

LARGEST_CONDITION = 999999.9
NO_LIMITS_MARGIN = 9.9999
FLAGS = {1: 1, 2: 2, 3: 4, 4: 8, 5: 16, 6: 32, 7: 64, 8: 128}
"""Bit of each code that is no refusal."""

JACOBIAN_DECIMALS = (10, 10, 10, 10, 10, 10, 10, 8, 6)
"""Decimals of a flat Jacobian by its number of joints, so that eight joints stay within 1 kB."""

POSE_KEYS = ("x", "y", "z", "r1", "r2", "r3")
"""The keys of a flat pose that hold its numbers."""


def flat_pose(
    answer: SingleAnswer, *, form: str, seq: int, tag: int, t_ms: int
) -> dict[str, object]:
    """Return the pose of one posture as a flat answer."""
    orientation: Any = answer.item["orientation"]
    position: Any = answer.item["position"]
    told = _head(answer, seq, tag, t_ms)
    told["x"], told["y"], told["z"] = position
    told["r1"], told["r2"], told["r3"] = orientation["values"]
    told["form"] = form
    told.update(_tail(answer))
    return told


def flat_jacobian(
    answer: SingleAnswer, *, seq: int, tag: int, t_ms: int, scale: int | None = None
) -> dict[str, object]:
    """Return the Jacobian of one posture as a flat answer, ``j11`` ... ``j6n`` by rows.

    Entries keep as many decimals as fit; beside a ``scale`` all, as they become integers next.
    """
    matrix: Any = answer.item["matrix"]
    entries = _entries(matrix) if scale is None else _whole_entries(matrix)
    return _head(answer, seq, tag, t_ms) | entries | _tail(answer)


def flat_jacobian_row(
    answer: SingleAnswer, row: int, *, seq: int, tag: int, t_ms: int
) -> dict[str, object]:
    """Return one row, 1 to 6, of the Jacobian as a flat answer, its entries not rounded."""
    matrix: Any = answer.item["matrix"]
    entries = [float(entry) for entry in matrix[row - 1]]
    keys = jacobian_row_keys(row, len(entries))
    return _head(answer, seq, tag, t_ms) | dict(zip(keys, entries, strict=True)) | _tail(answer)


def flat_pose_refusal(code: int, *, seq: int, tag: int, t_ms: int) -> dict[str, object]:
    """Return a flat pose without its numbers, with every key at its place."""
    numbers_gone: dict[str, object] = dict.fromkeys(POSE_KEYS, NO_NUMBER)
    return _refused_head(code, seq, tag, t_ms) | numbers_gone | {"form": ""} | _refused_tail()


def flat_jacobian_refusal(
    code: int, joints: int, *, seq: int, tag: int, t_ms: int
) -> dict[str, object]:
    """Return a flat Jacobian of an arm of so many joints, without its numbers."""
    entries_gone: dict[str, object] = dict.fromkeys(jacobian_keys(joints), NO_ENTRY)
    return _refused_head(code, seq, tag, t_ms) | entries_gone | _refused_tail()


def flat_jacobian_row_refusal(
    code: int, joints: int, *, seq: int, tag: int, t_ms: int
) -> dict[str, object]:
    """Return a row of the Jacobian of an arm of so many joints, without its numbers."""
    # Which row it would have been may be the very thing that cannot be told.
    entries_gone: dict[str, object] = dict.fromkeys(jacobian_row_keys(1, joints), NO_NUMBER)
    return _refused_head(code, seq, tag, t_ms) | entries_gone | _refused_tail()


def csv_of_one(told: Mapping[str, object]) -> bytes:
    """Return a flat answer as CSV (RFC 4180): the keys, then the values, printed as in JSON.

    Examples
    --------
    >>> csv_of_one({"ok": 1, "x": -0.5, "state": "near"})
    b'ok,x,state\\r\\n1,-0.5,near\\r\\n'
    """
    # Neither names nor other texts of a caller's are among them: nothing needs quotes.
    values = [
        text if isinstance(text, str) else json_bytes(text).decode() for text in told.values()
    ]
    return "".join(",".join(line) + "\r\n" for line in (told, values)).encode("ascii")


def jacobian_keys(joints: int) -> tuple[str, ...]:
    """Return the keys of a flat Jacobian that hold its entries, by rows.

    Examples
    --------
    >>> jacobian_keys(2)[:3]
    ('j11', 'j12', 'j21')
    """
    return tuple(key for row in range(1, 7) for key in jacobian_row_keys(row, joints))


def jacobian_row_keys(row: int, joints: int) -> tuple[str, ...]:
    """Return the keys of one row of a flat Jacobian, ``j<row>1`` ... ``j<row>n``."""
    return tuple(f"j{row}{column}" for column in range(1, joints + 1))


def _refused_head(code: int, seq: int, tag: int, t_ms: int) -> dict[str, object]:
    return {"ok": 0, "code": code, "flags": 0, "seq": seq, "tag": tag, "t_ms": t_ms}


def _refused_tail() -> dict[str, object]:
    return {
        "units": "",
        "tool_no": 0,
        "frame_no": 0,
        "state": "",
        "condition": NO_NUMBER,
        "margin": NO_NUMBER,
        "revision": 0,
        "digest": "",
    }


def _entries(matrix: Sequence[Sequence[float]]) -> dict[str, float]:
    joints = len(matrix[0])
    decimals = JACOBIAN_DECIMALS[min(joints, len(JACOBIAN_DECIMALS) - 1)]
    entries = [round(entry, decimals) + 0.0 for row in matrix for entry in row]
    return dict(zip(jacobian_keys(joints), entries, strict=True))


def _whole_entries(matrix: Sequence[Sequence[float]]) -> dict[str, float]:
    entries = [float(entry) for row in matrix for entry in row]
    return dict(zip(jacobian_keys(len(matrix[0])), entries, strict=True))


def _head(answer: SingleAnswer, seq: int, tag: int, t_ms: int) -> dict[str, object]:
    return {
        "ok": 1,
        "code": answer.item["code"],
        "flags": sum([FLAGS[code] for code in answer.codes if code in FLAGS]),
        "seq": seq,
        "tag": tag,
        "t_ms": t_ms,
    }


def _tail(answer: SingleAnswer) -> dict[str, object]:
    arm: Any = answer.head["arm"]
    told: Any = answer.item["singularity"]
    singularity: Mapping[str, Any] = told or {"state": "none", "condition_number": 0.0}
    condition = singularity["condition_number"]
    return {
        "units": answer.head["units"],
        "tool_no": answer.tool_number,
        "frame_no": answer.frame_number,
        "state": singularity["state"],
        "condition": LARGEST_CONDITION if condition is None else min(condition, LARGEST_CONDITION),
        "margin": NO_LIMITS_MARGIN if math.isinf(answer.margin) else answer.margin,
        "revision": arm["revision"],
        "digest": arm["digest"],
    }
