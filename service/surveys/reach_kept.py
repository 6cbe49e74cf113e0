"""What a survey of targets found, as it is kept: arrays as they stand, and the few texts as JSON.

Doubles are kept as they are, so they come back to the last bit; nothing is compressed, for random
digits would not shrink. Left out: making columns (reach_checks.py), telling them
(reach_results.py).
"""

from collections import Counter
from collections.abc import Mapping
from typing import Any

import numpy as np
import orjson
from numpy.typing import NDArray

from kinematics.reach.targets import VERDICTS
from service.wire.reach_lines import ReachColumns, Texts

REFUSED, LINES = "refused", "lines"
_TEXTS = ("verdicts", "proofs", "branches", "states")
_NUMBERS = {"joints": "<f8", "margins": "<f8", "errors": "<f8"}
_COUNTS = {"codes": "<i4", "counts": "<i8", "ranks": "<i4"}
_HEAD = 8
"""Bytes that say how long the JSON is, which is filled up to a multiple of as many."""


def columns_bytes(columns: ReachColumns) -> bytes:
    """Return columns as they are kept."""
    texts: Mapping[str, Texts] = {name: getattr(columns, name) for name in _TEXTS}
    head = {
        "lines": len(columns.codes),
        "joints": columns.joints.shape[1],
        "applying": list(columns.applying),
        "words": {name: text.words for name, text in texts.items()},
        "reasons": list(columns.reasons.items()),
        "names": list(columns.names.items()),
        "why": list(columns.why.items()),
    }
    told = orjson.dumps(head, option=orjson.OPT_SERIALIZE_NUMPY)
    told += b" " * (-len(told) % _HEAD)
    arrays = [
        *(np.ascontiguousarray(getattr(columns, name), kind) for name, kind in _NUMBERS.items()),
        *(np.ascontiguousarray(getattr(columns, name), kind) for name, kind in _COUNTS.items()),
        *(np.ascontiguousarray(text.which, "<i2") for text in texts.values()),
        *(np.ascontiguousarray(where, "?") for where in columns.applying.values()),
    ]
    return b"".join(
        [len(told).to_bytes(_HEAD, "little"), told, *(each.tobytes() for each in arrays)]
    )


def columns_from(kept: bytes) -> ReachColumns:
    """Return the columns that were kept.

    Examples
    --------
    >>> numbers, whole = np.array([0.1, -0.0, np.inf]), np.array([0, 1, 2])
    >>> no = Texts((), np.array([-1, -1, -1]))
    >>> columns = ReachColumns(
    ...     whole, {}, no, whole, numbers[:, None], numbers, no, whole, no, no,
    ...     np.zeros((3, 2)), {1: "too far"}, {},
    ... )
    >>> back = columns_from(columns_bytes(columns))
    >>> back.margins, back.reasons
    (array([ 0.1, -0. ,  inf]), {1: 'too far'})
    """
    begin = _HEAD + int.from_bytes(kept[:_HEAD], "little")
    head: dict[str, Any] = orjson.loads(kept[_HEAD:begin])
    lines, shapes = head["lines"], {"joints": (head["joints"],), "errors": (2,)}
    taken = begin

    def array(kind: str, shape: tuple[int, ...] = ()) -> NDArray[Any]:
        nonlocal taken
        found = np.frombuffer(kept, kind, lines * int(np.prod(shape)), taken)
        taken += found.nbytes
        return found.reshape(lines, *shape)

    columns: dict[str, Any] = {
        name: array(kind, shapes.get(name, ())) for name, kind in (_NUMBERS | _COUNTS).items()
    }
    columns |= {name: Texts(head["words"][name], array("<i2").astype(np.intp)) for name in _TEXTS}
    applying = {code: array("?") for code in head["applying"]}
    return ReachColumns(
        **columns,
        applying=applying,
        reasons=dict(head["reasons"]),
        names=dict(head["names"]),
        why=dict(head.get("why", ())),  # what was kept long ago has none
    )


def counts_of(columns: ReachColumns) -> Mapping[str, int]:
    """Return how many targets there are of each verdict, and how many lines tell them."""
    first = columns.verdicts.which[columns.ranks <= 1]
    counts = Counter[str]({LINES: len(columns.codes)})
    for verdict, count in enumerate(np.bincount(first + 1, minlength=1 + len(VERDICTS)).tolist()):
        if count:
            counts[(REFUSED, *VERDICTS)[verdict]] += count
    return counts
