"""Joint vectors as CSV (RFC 4180): a header ``q1..qn[,name]``, then one line for each.

Orientations are read in the same way, with another letter in the header.

A line of another width refuses all; a cell that is no number spoils its own line only. Left out:
whether the numbers can be used (operations/joint_table.py).
"""

import csv
import io
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass, field
from itertools import chain

import numpy as np
import orjson

from kinematics.table import FloatArray
from service.details import Detail
from service.errors import ServiceError, Unparseable, UnusableValue
from service.wire.query import number

MEDIA_TYPE = "text/csv"
NAME = "name"
_BLOCK = 1000
# What a plain number is made of; a text of these that JSON can read holds nothing else.
_OF_NUMBERS = b"0123456789+-.eE, "


class WrongColumnCount(UnusableValue):
    """A line, or the header, has another number of columns than the arm needs."""

    code = "wrong-joint-count"


@dataclass
class CsvRows:
    """What the lines say.

    Attributes
    ----------
    values : (rows, joints); NaN where a cell holds no number.
    lines : number of the line each row begins in; the header is line 1.
    unreadable : what is wrong with rows that hold something that is no number.
    names : one for each row, if there is such a column.
    """

    values: FloatArray
    lines: list[int] = field(default_factory=list)
    unreadable: dict[int, Detail] = field(default_factory=dict)
    names: list[str] | None = None


def read_csv(
    raw: bytes,
    joints: int,
    most: int,
    between: Callable[[], None] = lambda: None,
    *,
    letter: str = "q",
) -> CsvRows:
    """Return the joint vectors of a CSV file; at most ``most`` and one more are read.

    Parameters
    ----------
    raw : UTF-8, with or without a byte order mark; lines end with CRLF or LF.
    joints : of the arm: columns beside the names.
    between : called now and then; may raise to give up.
    letter : the columns are called by it and their number.

    Raises
    ------
    Unparseable : empty, not UTF-8, quotes that do not match.
    WrongColumnCount : the header or a line; ``where`` is the number of the line.
    UnusableValue : the header has other names.

    Examples
    --------
    >>> rows = read_csv(b"q1,q2,name\\r\\n1.5,+2,above\\r\\n3,x,below\\r\\n", 2, 10)
    >>> rows.values.tolist(), rows.names, rows.unreadable[1].where
    ([[1.5, 2.0], [3.0, nan]], ['above', 'below'], (3, 'q2'))
    """
    if not raw:
        way_out = f"send a header {letter}1,{letter}2,... and lines below it"
        raise Unparseable("the body is empty", way_out=way_out)
    text = io.TextIOWrapper(io.BytesIO(raw), encoding="utf-8-sig", newline="")
    reader = csv.reader(text, strict=True)
    try:
        named = _named(next(reader, []), joints, letter)
        found = CsvRows(np.empty((0, joints)), names=[] if named else None)
        parts: list[FloatArray] = []
        for rows, lines in blocks(reader, joints + named):
            between()
            if found.names is not None:
                found.names += [row[joints] for row in rows]
            parts.append(_values(rows, lines, joints, letter, found))
            found.lines += lines
            if len(found.lines) > most:
                break
    except UnicodeDecodeError:
        say = f"not UTF-8 after line {reader.line_num}"
        raise Unparseable(say, where=(reader.line_num,), way_out="send UTF-8") from None
    except csv.Error as error:
        say = f"not CSV at line {reader.line_num}: {error}"
        raise Unparseable(say, where=(reader.line_num,)) from None
    found.values = np.concatenate(parts) if parts else found.values
    return found


def _named(header: Sequence[str], joints: int, letter: str) -> bool:
    """Return whether the header ends with a column for names."""
    named = bool(header) and header[-1] == NAME
    given = len(header) - named
    wanted = [f"{letter}{joint}" for joint in range(1, joints + 1)]
    way_out = f"begin with the line {','.join([*wanted, NAME])}; {NAME} may be left out"
    if list(header[:given]) == wanted:
        return named
    if given != joints:
        raise wrong_width(given, joints, 1, way_out)
    wrong = next(place for place, name in enumerate(header) if name != wanted[place])
    raise UnusableValue(
        f"column {wrong + 1} is not {wanted[wrong]}",
        where=(1, wrong + 1),
        value=header[wrong],
        way_out=way_out,
    )


def blocks(reader: "csv._reader", width: int) -> Iterator[tuple[list[list[str]], list[int]]]:  # type: ignore[name-defined]
    """Give rows a block at a time, with the lines they begin in; all are ``width`` wide."""
    rows: list[list[str]] = []
    lines: list[int] = []
    line, blank = reader.line_num + 1, 0
    for row in reader:
        if len(row) != width:
            if row:
                raise wrong_width(len(row), width, line, "give every line the header's columns")
            blank = blank or line
        elif blank:
            raise wrong_width(0, width, blank, "leave out blank lines")
        else:
            rows.append(row)
            lines.append(line)
        line = reader.line_num + 1
        if len(rows) == _BLOCK:
            yield rows, lines
            rows, lines = [], []
    yield rows, lines


def _values(
    rows: Sequence[Sequence[str]], lines: Sequence[int], joints: int, letter: str, found: CsvRows
) -> FloatArray:
    cells = chain.from_iterable(row[:joints] for row in rows)
    values = all_at_once(",".join(cells).encode(), len(rows) * joints)
    if values is None:
        first = len(found.lines)
        values = np.full((len(rows), joints), np.nan)
        for index, row in enumerate(rows):
            try:
                for joint in range(joints):
                    values[index, joint] = number(row[joint].strip(), f"{letter}{joint + 1}")
            except ServiceError as error:
                where = (lines[index], f"{letter}{joint + 1}")
                found.unreadable[first + index] = Detail(
                    error.code, error.say, where, "body", row[joint], error.way_out
                )
    return values.reshape(len(rows), joints)


def all_at_once(text: bytes, count: int) -> FloatArray | None:
    """Return the numbers of a text in which all are written as JSON has it, else None."""
    if text.translate(None, _OF_NUMBERS):
        return None
    try:
        numbers = orjson.loads(b"[" + text + b"]")
    except orjson.JSONDecodeError:
        return None
    return np.array(numbers, dtype=np.float64) if len(numbers) == count else None


def wrong_width(given: int, wanted: int, line: int, way_out: str) -> WrongColumnCount:
    return WrongColumnCount(
        f"line {line} has {given} columns where {wanted} are needed",
        where=(line,),
        value=given,
        way_out=way_out,
    )
