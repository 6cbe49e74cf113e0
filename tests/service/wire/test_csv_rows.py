"""Joint vectors as CSV: widths refuse all, cells spoil their own line, names pass through."""

import csv
import io

import numpy as np
import pytest

from service.errors import Unparseable, UnusableValue
from service.wire.csv_rows import WrongColumnCount, read_csv
from service.wire.csv_text import Columns, SameInAll, csv_head, csv_lines
from service.wire.flat import NO_NUMBER

SAME = SameInAll(7, 3, 1_700_000_000_000, "xyz-fixed", "mm-deg", 1, 2, 4, "0123abcd")


@pytest.mark.parametrize(
    "raw",
    [
        b"q1,q2\r\n1,2\r\n3,4.5\r\n",
        b"q1,q2\n1,2\n3,4.5\n",
        b"q1,q2\n1,2\n3,4.5",
        b"\xef\xbb\xbfq1,q2\r\n1,2\r\n3,4.5\r\n",
        b'"q1","q2"\r\n"1","2"\r\n3,4.5\r\n',
        b"q1,q2\n+1,+2.0\n3.0E+00,45e-1\n",
        b"q1,q2\n001,2.\n 3 , 4.5 \n",
        b"q1,q2\n1,2\n3,4.5\n\n\r\n",
    ],
)
def test_the_same_in_many_spellings(raw: bytes) -> None:
    found = read_csv(raw, 2, 10)
    assert found.values.tolist() == [[1.0, 2.0], [3.0, 4.5]]
    assert (found.lines, found.names, found.unreadable) == ([2, 3], None, {})


def test_every_digit_is_read() -> None:
    values = np.random.default_rng(1).normal(size=(2500, 3)) * 10.0 ** np.arange(-6, 3, 3)
    text = "q1,q2,q3\n" + "".join(",".join(map(repr, row)) + "\n" for row in values.tolist())
    assert np.array_equal(read_csv(text.encode(), 3, 5000).values, values)


def test_names_may_hold_anything() -> None:
    raw = 'q1,name\r\n1,"a, ""b"""\r\n2,"two\r\nlines"\r\n3,\r\n4,Öse\r\n'.encode()
    found = read_csv(raw, 1, 10)
    assert found.names == ['a, "b"', "two\r\nlines", "", "Öse"]
    assert found.lines == [2, 3, 5, 6]
    assert found.values.ravel().tolist() == [1.0, 2.0, 3.0, 4.0]


@pytest.mark.parametrize(
    ("cell", "code"),
    [
        ("abc", "unparseable"),
        ("", "unparseable"),
        ('"1,5"', "unparseable"),
        ("1 2", "unparseable"),
        ("0x10", "unparseable"),
        ("1_0", "unparseable"),
        ("true", "unparseable"),
        ("[1]", "unparseable"),
        ("٣", "unparseable"),
        ("nan", "not-finite"),
        ("-inf", "not-finite"),
        ("1e999", "not-finite"),
    ],
)
def test_a_cell_that_is_no_number_spoils_its_line_only(cell: str, code: str) -> None:
    found = read_csv(f"q1,q2\n1,2\n3,{cell}\n5,6\n".encode(), 2, 10)
    assert list(found.unreadable) == [1]
    detail = found.unreadable[1]
    assert (detail.code, detail.where, detail.location) == (code, (3, "q2"), "body")
    assert found.values[[0, 2]].tolist() == [[1.0, 2.0], [5.0, 6.0]]
    assert np.isnan(found.values[1, 1])


def test_a_line_far_down_is_found() -> None:
    raw = "q1,name\n" + "".join(f'1,"n\n{i}"\n' for i in range(3000)) + "x,last\n"
    found = read_csv(raw.encode(), 1, 5000)
    assert found.unreadable[3000].where == (6002, "q1")
    with pytest.raises(WrongColumnCount) as caught:
        read_csv((raw + "1,2,3\n").encode(), 1, 5000)
    assert caught.value.where == (6003,)


@pytest.mark.parametrize(
    ("raw", "line"),
    [
        (b"q1\n1\n", 1),
        (b"q1,q2,q3\n1,2,3\n", 1),
        (b"name\nx\n", 1),
        (b"\n1,2\n", 1),
        (b"q1,q2\n1,2\n1\n", 3),
        (b"q1,q2\n1,2\n1,2,3\n1,2\n", 3),
        (b"q1,q2,name\n1,2\n", 2),
        (b"q1,q2\n1,2\n\n3,4\n", 3),
        (b"q1,q2\n1;2\n", 2),
    ],
)
def test_another_width_refuses_all(raw: bytes, line: int) -> None:
    with pytest.raises(WrongColumnCount) as caught:
        read_csv(raw, 2, 10)
    assert (caught.value.code, caught.value.where) == ("wrong-joint-count", (line,))


@pytest.mark.parametrize("header", ["q2,q1", "Q1,Q2", "q1,q2 ", "1,2", "q1,j2,name", "q01,q2"])
def test_another_header_is_told(header: str) -> None:
    with pytest.raises(UnusableValue) as caught:
        read_csv(f"{header}\n1,2\n".encode(), 2, 10)
    assert caught.value.code == "unusable-value"
    assert caught.value.where[0] == 1
    assert "q1,q2,name" in caught.value.way_out


@pytest.mark.parametrize(
    "raw",
    [
        b"",
        b"q1,q2\n\xff,1\n",
        b'q1,q2\n"1,2\n',
        b'q1,q2\n"1"x,2\n',
        "q1,q2\n1,2\n".encode("utf-16"),
    ],
)
def test_what_is_no_csv(raw: bytes) -> None:
    with pytest.raises(Unparseable):
        read_csv(raw, 2, 10)


def test_an_arm_without_joints_has_lines_all_the_same() -> None:
    assert read_csv(b"name\na\nb\n", 0, 10).values.shape == (2, 0)
    assert read_csv(b"\n\n\n", 0, 10).values.shape == (2, 0)


def test_reading_stops_soon_after_the_limit() -> None:
    raw = b"q1\n" + b"1\n" * 5000 + b"too,many\n"
    assert len(read_csv(raw, 1, 1500).lines) == 2000


def test_reading_can_be_given_up() -> None:
    def give_up() -> None:
        raise TimeoutError

    with pytest.raises(TimeoutError):
        read_csv(b"q1\n1\n", 1, 10, give_up)


def test_lines_have_the_keys_of_a_flat_answer() -> None:
    columns = Columns(
        numbers=np.array([[1.0, -0.0], [np.nan, np.nan]]),
        codes=np.array([4, 102]),
        applying={3: np.array([True, False]), 4: np.array([True, False])},
        states=["singular", ""],
        conditions=np.array([np.inf, np.nan]),
        margins=np.array([np.inf, np.nan]),
    )
    raw = csv_head(["x", "y"], has_form=True, has_name=True)
    raw += csv_lines(columns, SAME, ['say "a, b"', "two\nlines"])
    assert raw.count(b"\r\n") == 3
    first, second = csv.DictReader(io.StringIO(raw.decode(), newline=""))
    assert first == {
        "ok": "1", "code": "4", "flags": "12", "seq": "7", "tag": "3", "t_ms": "1700000000000",
        "x": "1.0", "y": "0.0", "form": "xyz-fixed", "units": "mm-deg", "tool_no": "1",
        "frame_no": "2", "state": "singular", "condition": "999999.9", "margin": "9.9999",
        "revision": "4", "digest": "0123abcd", "name": 'say "a, b"',
    }  # fmt: skip
    assert (second["ok"], second["code"], second["flags"]) == ("0", "102", "0")
    gone = {second[key] for key in ("x", "y", "condition", "margin")}
    assert gone == {str(NO_NUMBER)}
    assert (second["state"], second["name"]) == ("", "two\nlines")


def test_lines_without_judgement_and_without_numbers() -> None:
    columns = Columns(np.zeros((1, 0)), np.array([0]), {}, None, None, np.array([0.25]))
    line = csv_lines(columns, SameInAll(1, 0, 2, None, "m-rad", 0, 0, 0, "d"), None)
    assert line == b"1,0,0,1,0,2,m-rad,0,0,,,0.25,0,d\r\n"
