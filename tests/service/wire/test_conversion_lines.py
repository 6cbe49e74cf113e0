"""Items and lines about many orientations: plain ones cut from one print, others beside them."""

import json

import numpy as np
import pytest

from service.wire.conversion_lines import csv_head, csv_lines, item_bytes

TRIPLES = np.array([[0.1, -2.0, 3e-17], [1e22, 0.0, 90.0], [4.0, 5.0, 6.0]])
MATRICES = np.arange(27, dtype=float).reshape(3, 3, 3) / 7
REFUSED = {"code": 105, "findings": [], "problem": {"code": "unusable-value"}}
REPAIRED = {"code": 6, "findings": [{"code": 6}]}


def plain(values: np.ndarray) -> list[dict[str, object]]:
    return [{"ok": True, "code": 0, "values": one, "findings": []} for one in values.tolist()]


@pytest.mark.parametrize("values", [TRIPLES, MATRICES, TRIPLES[:1], MATRICES[:1]])
def test_plain_items(values: np.ndarray) -> None:
    assert json.loads(b"[" + item_bytes(values, {}) + b"]") == plain(values)


@pytest.mark.parametrize("values", [TRIPLES, MATRICES])
@pytest.mark.parametrize("place", [0, 1, 2])
def test_items_that_say_more_stand_at_their_place(values: np.ndarray, place: int) -> None:
    for more, is_refused in ((REFUSED, True), (REPAIRED, False)):
        expected = plain(values)
        expected[place] |= more
        if is_refused:
            expected[place] |= {"ok": False, "values": None}
        found = json.loads(b"[" + item_bytes(values, {place: more}) + b"]")
        assert found == expected
        assert list(found[place])[:4] == ["ok", "code", "values", "findings"]


def test_none_at_all() -> None:
    assert item_bytes(np.empty((0, 3)), {}) == b""
    assert (
        csv_lines(np.empty((0, 3)), np.empty(0, dtype=np.int64), {}, (1, 2, 3), ("a",), None) == b""
    )


def test_lines() -> None:
    codes = np.array([0, 105, 6])
    applying = {5: np.array([False, False, True]), 6: np.array([False, False, True])}
    values = np.where(codes[:, None] == 105, np.nan, TRIPLES)
    lines = csv_lines(
        values, codes, applying, (4, 0, 9), ("zyx-fixed", "mm-deg"), ["a", 'b"', "c,"]
    )
    assert lines.decode().split("\r\n") == [
        "1,0,0,4,0,9,0.1,-2.0,3e-17,zyx-fixed,mm-deg,a",
        '0,105,0,4,0,9,-999999.9999,-999999.9999,-999999.9999,zyx-fixed,mm-deg,"b"""',
        '1,6,48,4,0,9,4.0,5.0,6.0,zyx-fixed,mm-deg,"c,"',
        "",
    ]
    assert csv_head(["r1"], has_name=False) == b"ok,code,flags,seq,tag,t_ms,r1,form,units\r\n"
