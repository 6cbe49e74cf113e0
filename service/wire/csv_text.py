"""Flat answers about many postures as CSV (RFC 4180): the flat keys, one line for each vector.

Numbers are printed as in JSON, the shortest text that reads back as the same double. Left out:
the answer about one posture (flat.py).
"""

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
import orjson
from numpy.typing import NDArray

from kinematics.table import FloatArray
from service.wire.csv_rows import NAME
from service.wire.flat import FLAGS, LARGEST_CONDITION, NO_LIMITS_MARGIN, NO_NUMBER

MEDIA_TYPE = "text/csv; charset=utf-8; header=present"
_END = "\r\n"
_NEEDS_QUOTES = re.compile(r'[",\r\n]')
FIRST = ("ok", "code", "flags", "seq", "tag", "t_ms")
_FORM = ("form",)
_LAST = ("units", "tool_no", "frame_no", "state", "condition", "margin", "revision", "digest")
REFUSALS_FROM = 100
"""The lowest code that is a refusal's."""


@dataclass(frozen=True)
class Columns:
    """What lines say; one entry for each joint vector, refused ones too.

    Attributes
    ----------
    numbers : (count, columns), NaN where refused.
    codes : (count,)
    applying : for each code that is no refusal, whether it applies, (count,).
    states : one for each vector, empty where refused; None if nobody asked.
    conditions : (count,), infinite where singular; None if nobody asked.
    margins : (count,), infinite without travel limits.
    """

    numbers: FloatArray
    codes: NDArray[np.int64]
    applying: Mapping[int, NDArray[np.bool_]]
    states: Sequence[str] | None
    conditions: FloatArray | None
    margins: FloatArray

    @property
    def refused(self) -> NDArray[np.bool_]:
        """Which vectors are refused, (count,)."""
        return np.asarray(self.codes >= REFUSALS_FROM)


@dataclass(frozen=True)
class SameInAll:
    """What is the same in all lines; ``form`` is None where there is no such column."""

    seq: int
    tag: int
    t_ms: int
    form: str | None
    units: str
    tool_no: int
    frame_no: int
    revision: int
    digest: str


def csv_head(numbers: Sequence[str], *, has_form: bool, has_name: bool) -> bytes:
    """Return the first line.

    Examples
    --------
    >>> csv_head(["x"], has_form=False, has_name=True)
    b'ok,code,flags,seq,tag,t_ms,x,units,tool_no,frame_no,state,condition,margin,revision,digest,name\\r\\n'
    """
    keys = [*FIRST, *numbers, *(_FORM if has_form else ()), *_LAST, *([NAME] if has_name else ())]
    return (",".join(keys) + _END).encode("ascii")


def csv_lines(columns: Columns, same: SameInAll, names: Sequence[str] | None) -> bytes:
    """Return one line for each vector of ``columns``."""
    count = len(columns.codes)
    if not count:
        return b""
    stamp = (same.seq, same.tag, same.t_ms)
    first = line_begins(columns.codes, columns.applying, stamp)
    comma = "," if columns.numbers.shape[1] else ""
    refused = columns.refused
    numbers = number_texts(np.where(refused[:, None], NO_NUMBER, columns.numbers))
    form = "" if same.form is None else f",{same.form}"
    middle = f"{form},{same.units},{same.tool_no},{same.frame_no},"
    states = columns.states or [""] * count
    measures = _measures(columns, refused)
    end = f",{same.revision},{same.digest}"
    lines = [
        f"{before}{comma}{values}{middle}{state},{measured}{end}"
        for before, values, state, measured in zip(first, numbers, states, measures, strict=True)
    ]
    if names is not None:
        lines = [f"{line},{quoted(name)}" for line, name in zip(lines, names, strict=True)]
    return (_END.join(lines) + _END).encode("utf-8")


def _measures(columns: Columns, refused: NDArray[np.bool_]) -> list[str]:
    margins = np.where(np.isinf(columns.margins), NO_LIMITS_MARGIN, columns.margins)
    margins = np.where(refused, NO_NUMBER, margins)
    if columns.conditions is None:
        return [f",{margin}" for margin in number_texts(margins[:, None])]
    conditions = np.minimum(columns.conditions, LARGEST_CONDITION)
    conditions = np.where(refused, NO_NUMBER, conditions)
    return number_texts(np.stack([conditions, margins], axis=1))


def line_begins(
    codes: NDArray[np.int64], applying: Mapping[int, NDArray[np.bool_]], stamp: Sequence[int]
) -> list[str]:
    """Return what stands before the numbers; few lines differ there, so each text is made once.

    Parameters
    ----------
    codes : (count,).
    applying : for each code that is no refusal, where it applies, (count,).
    stamp : seq, tag and t_ms.

    Examples
    --------
    >>> line_begins(np.array([0, 105]), {}, (1, 2, 3))
    ['1,0,0,1,2,3', '0,105,0,1,2,3']
    """
    flags = np.zeros(len(codes), dtype=np.int64)
    for code, applies in applying.items():
        flags += np.where(applies, FLAGS[code], 0)
    kinds = (codes << 16) + flags
    same = ",".join(map(str, stamp))
    texts = {
        kind: f"{int(kind >> 16 < REFUSALS_FROM)},{kind >> 16},{kind & 0xFFFF},{same}"
        for kind in np.unique(kinds).tolist()
    }
    return [texts[kind] for kind in kinds.tolist()]


def number_texts(numbers: FloatArray) -> list[str]:
    """Return the numbers of each row with commas between them."""
    if not numbers.shape[1]:
        return [""] * len(numbers)
    plain = np.ascontiguousarray(numbers + 0.0)  # -0.0 becomes 0.0
    printed = orjson.dumps(plain, option=orjson.OPT_SERIALIZE_NUMPY)
    return printed[2:-2].decode("ascii").split("],[")


def plain_lines(numbers: FloatArray) -> bytes:
    """Return a line for each row of a table that holds numbers alone, (count, columns).

    Examples
    --------
    >>> plain_lines(np.array([[1.0, 0.5]]))
    b'1.0,0.5\\r\\n'
    """
    return (_END.join(number_texts(numbers)) + _END).encode("ascii")


def quoted(name: str) -> str:
    return '"' + name.replace('"', '""') + '"' if _NEEDS_QUOTES.search(name) else name
