"""Records as lines of a table: columns by name, and nothing a spreadsheet would run."""

import csv
import io
from typing import Any

import pytest

from service.records.ports import Widths
from service.wire.record_lines import lines_head, lines_of

RECORD: dict[str, Any] = {
    "id": "01",
    "arm": {"name": "a", "revision": 3, "digest": "d", "table_digest": "t", "setup_digest": "s"},
    "units": "mm-deg",
    "frame": "base",
    "tool": "pen",
    "source": "given",
    "quality": "good",
    "reason": None,
    "code": 0,
    "flags": 0,
    "joints": [1.5, -2.0],
    "position": [1.0, 2.0, -3.25],
    "orientation": {"form": "xyz-fixed", "values": [10.0, -20.0, 30.0]},
    "margin": None,
    "singularity": None,
    "sampled_at": "2026-01-01T00:00:00.000Z",
    "received_at": "2026-01-01T00:00:00.001Z",
    "computed_at": "2026-01-01T00:00:00.002Z",
    "serial": "HP-1",
    "tag": -4,
    "fields": {},
    "software": "1",
}
WIDTHS = Widths(3, 4)


def table(*records: dict[str, Any], widths: Widths = WIDTHS) -> list[dict[str, str]]:
    text = (lines_head(widths) + lines_of(records, widths)).decode("utf-8")
    return list(csv.DictReader(io.StringIO(text, newline=""), strict=True))


def test_each_value_stands_below_its_name() -> None:
    (line,) = table(RECORD)
    told = {key: line[key] for key in ("arm", "revision", "serial", "tag", "z", "form", "margin")}
    assert told == {
        "arm": "a",
        "revision": "3",
        "serial": "HP-1",
        "tag": "-4",
        "z": "-3.25",
        "form": "xyz-fixed",
        "margin": "",
    }
    assert [line[f"r{number}"] for number in range(1, 5)] == ["10.0", "-20.0", "30.0", ""]
    assert [line[f"q{number}"] for number in range(1, 4)] == ["1.5", "-2.0", ""]
    assert len(set(line)) == 26 + 4 + 3 + 2


def test_a_tool_given_by_its_pose_stays_one_cell() -> None:
    tool = {"position": [0, 0, 1], "orientation": {"form": "xyz-fixed", "values": [0, 0, 0]}}
    (line,) = table({**RECORD, "tool": tool})
    assert line["tool"].startswith('{"position":[0,0,1]')


@pytest.mark.parametrize("begin", ["=", "+", "-", "@"])
@pytest.mark.parametrize("key", ["serial", "reason", "tool", "frame"])
def test_a_text_that_would_be_run_gets_an_apostrophe(begin: str, key: str) -> None:
    (line,) = table({**RECORD, key: f"{begin}1,\"'"})
    assert line[key] == f"'{begin}1,\"'"


def test_numbers_keep_their_sign() -> None:
    (line,) = table({**RECORD, "margin": -0.25})
    assert (line["margin"], line["tag"]) == ("-0.25", "-4")


def test_no_records_are_no_lines() -> None:
    assert table() == []
    assert lines_of([], Widths(0, 0)) == b""
