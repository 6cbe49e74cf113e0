"""Many orientations as bytes: items of a nested answer, lines of CSV.

Few items differ but in their numbers, which are printed all at once. Left out: NPY (npy.py), and
how the orientations came (orientation_rows.py).
"""

from collections.abc import Mapping, Sequence

import numpy as np
import orjson
from numpy.typing import NDArray

from kinematics.table import FloatArray
from service.wire.answers import json_bytes
from service.wire.csv_rows import NAME
from service.wire.csv_text import FIRST, REFUSALS_FROM, line_begins, number_texts, quoted
from service.wire.flat import NO_NUMBER

_BEGIN = b'{"ok":true,"code":0,"values":'
_END = b',"findings":[]}'
_LINE_END = "\r\n"


def item_bytes(values: FloatArray, more: Mapping[int, Mapping[str, object]]) -> bytes:
    """Return items with commas between them.

    Parameters
    ----------
    values : (count, ...), of items that are refused anything.
    more : what items say beside ``ok`` and ``values``, ``code`` first, of those that say anything.

    Examples
    --------
    >>> item_bytes(np.array([[0.5, 1.0]]), {})
    b'{"ok":true,"code":0,"values":[0.5,1.0],"findings":[]}'
    """
    if not len(values):
        return b""
    printed = orjson.dumps(np.ascontiguousarray(values), option=orjson.OPT_SERIALIZE_NUMPY)[1:-1]
    between = b"]" * (values.ndim - 1) + b"," + b"[" * (values.ndim - 1)
    opening, closing = between.split(b",")[::-1]
    if not more:
        joined = closing + _END + b"," + _BEGIN + opening
        return _BEGIN + printed.replace(between, joined) + _END
    bare = printed[len(opening) : -len(closing)].split(between)
    return b",".join(
        _BEGIN + opening + numbers + closing + _END
        if place not in more
        else _special(opening + numbers + closing, more[place])
        for place, numbers in enumerate(bare)
    )


def csv_head(numbers: Sequence[str], *, has_name: bool) -> bytes:
    """Return the first line.

    Examples
    --------
    >>> csv_head(["r1"], has_name=True)
    b'ok,code,flags,seq,tag,t_ms,r1,form,units,name\\r\\n'
    """
    keys = [*FIRST, *numbers, "form", "units", *([NAME] if has_name else ())]
    return (",".join(keys) + _LINE_END).encode("ascii")


def csv_lines(
    values: FloatArray,
    codes: NDArray[np.int64],
    applying: Mapping[int, NDArray[np.bool_]],
    stamp: Sequence[int],
    end: Sequence[str],
    names: Sequence[str] | None,
) -> bytes:
    """Return one line for each orientation.

    Parameters
    ----------
    values : (count, numbers), of refused ones anything.
    codes : (count,).
    applying : for each code that is no refusal, where it applies, (count,).
    stamp, end : what stands in all lines before the numbers and after them.
    """
    if not len(values):
        return b""
    begins = line_begins(codes, applying, stamp)
    numbers = number_texts(np.where((codes >= REFUSALS_FROM)[:, None], NO_NUMBER, values))
    last = "," + ",".join(end)
    lines = [f"{begin},{told}{last}" for begin, told in zip(begins, numbers, strict=True)]
    if names is not None:
        lines = [f"{line},{quoted(name)}" for line, name in zip(lines, names, strict=True)]
    return (_LINE_END.join(lines) + _LINE_END).encode("utf-8")


def _special(numbers: bytes, more: Mapping[str, object]) -> bytes:
    rest = dict(more)
    code = rest.pop("code")
    assert isinstance(code, int)
    is_refused = code >= REFUSALS_FROM
    return b'{"ok":%s,"code":%d,"values":%s,%s' % (
        b"false" if is_refused else b"true",
        code,
        b"null" if is_refused else numbers,
        json_bytes(rest)[1:],
    )
