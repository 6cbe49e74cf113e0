"""Large bodies say what small ones say; joint vectors are cut out only where that is safe."""

import json

import numpy as np
import pytest

from service.errors import DuplicateKey, Unparseable
from service.wire.body import parse_json
from service.wire.large_json import parse_large_json

TABLE = np.random.default_rng(2).normal(size=(50, 3))
ASKED = {"arm": "x", "joints": TABLE.tolist(), "tool": {"matrix": [[1, 0], [0, 1]]}, "task": ["vx"]}


@pytest.mark.parametrize("indent", [None, 1])
@pytest.mark.parametrize("names", [list(ASKED), list(ASKED)[::-1], ["joints"], ["tool", "joints"]])
def test_the_vectors_are_cut_out(names: list[str], indent: int | None) -> None:
    text = json.dumps({name: ASKED[name] for name in names}, indent=indent)
    found = parse_large_json(text.encode())
    assert found.table is not None
    assert np.array_equal(found.table, TABLE)
    assert found.document == {name: ASKED[name] for name in names} | {"joints": []}


@pytest.mark.parametrize(
    "text",
    [
        '{"joints": [[1, 2], [3]]}',
        '{"joints": [[1, null]]}',
        '{"joints": [[1, true], [false, 2]]}',
        '{"joints": [[1, "2"]]}',
        '{"joints": [[], []]}',
        '{"joints": []}',
        '{"joints": [[[1, 2]]]}',
        '{"joints": 1, "more": [[1, 2]]}',
        '{"more": {"joints": [[1, 2]]}}',
        '{"notes": "\\"joints\\": [[1, 2]]", "joints": [[1, "a"]]}',
        '{"notes": "joints", "more": [{"joints": [[1, 2]]}], "joints": [[3, 4]]}',
        '[{"joints": [[1, 2]]}]',
        '{"joints": [[NaN, 1]]}',
    ],
)
def test_what_is_not_plain_is_left_where_it_is(text: str) -> None:
    found = parse_large_json(text.encode())
    assert found.table is None
    assert repr(found.document) == repr(parse_json(text.encode()))


LONG = np.random.default_rng(3).normal(size=(6000, 3, 3))  # some 1 MB: read in many pieces


@pytest.mark.parametrize("separators", [None, (",", ":"), (" \n, ", " : ")])
@pytest.mark.parametrize("shape", [(-1, 3), (-1, 1), (6000, 9), LONG.shape])
def test_long_tables_are_read_piece_by_piece(
    shape: tuple[int, ...], separators: tuple[str, str] | None
) -> None:
    table = LONG.reshape(shape)
    text = json.dumps({"arm": "x", "joints": table.tolist()}, separators=separators)
    found = parse_large_json(text.encode(), deepest=3)
    assert found.table is not None
    assert np.array_equal(found.table, table)
    assert found.document == {"arm": "x", "joints": []}


@pytest.mark.parametrize("deepest", [2, 3])
@pytest.mark.parametrize("place", range(0, 6000, 1499))
@pytest.mark.parametrize(
    "row", ["[1, 2, 3],", "[1, 2],", "[],", "3,", "[1, 2, 3, 4],", "[[1, 2, 3]],", "[1, [2], 3],"]
)
def test_one_odd_row_anywhere_leaves_a_long_table_where_it_is(
    row: str, place: int, deepest: int
) -> None:
    rows = [f"[{place}.123456789, -2.5e-3, 7]," for place in range(6000)]
    rows.insert(place, row)
    text = '{"joints": [' + "".join(rows)[:-1] + "]}"
    found = parse_large_json(text.encode(), deepest=deepest)
    assert (found.table is None) == (row != "[1, 2, 3],")
    whole = parse_json(text.encode())
    assert isinstance(whole, dict)
    if found.table is None:
        assert found.document == whole
    else:
        assert found.table.tolist() == whole["joints"]


@pytest.mark.parametrize("place", range(0, 6000, 1499))
@pytest.mark.parametrize("slip", [",", "]", "[", "[1, 2, 3]", "[1, 2, 3", "1, 2, 3],", "}"])
def test_a_slip_anywhere_in_a_long_table_is_told_as_for_small_bodies(slip: str, place: int) -> None:
    rows = [f"[{place}.123456789, -2.5e-3, 7]," for place in range(6000)]
    rows.insert(place, slip)
    text = '{"joints": [' + "".join(rows)[:-1] + "]}"
    with pytest.raises(Unparseable) as small:
        parse_json(text.encode())
    with pytest.raises(Unparseable) as large:
        parse_large_json(text.encode())
    assert large.value.say == small.value.say


@pytest.mark.parametrize(
    "text",
    [
        '{"joints": [[1, 2]], "arm": "x", "joints": [[1, 2]]}',
        '{"joints": [[1, 2]], "arm": "x", "arm": "y"}',
        '{"joints": [[1, 2]], "arm" "x"}',
        '{"joints": [[1, 2], [3, 4]}',
        '{"joints": [[1, 2] [3, 4]]}',
        '{"joints": [[1, 02]]}',
        '{"joints": [[1, 2]]',
        "",
    ],
)
def test_what_is_wrong_is_told_as_for_small_bodies(text: str) -> None:
    with pytest.raises(Unparseable) as small:
        parse_json(text.encode())
    with pytest.raises(Unparseable) as large:
        parse_large_json(text.encode())
    assert (type(large.value), large.value.say, large.value.where) == (
        type(small.value),
        small.value.say,
        small.value.where,
    )


def test_a_key_that_stands_twice_below_is_found() -> None:
    with pytest.raises(DuplicateKey) as caught:
        parse_large_json(b'{"joints": [[1, 2]], "tool": {"x": 1, "x": 2}}')
    assert caught.value.where == ("tool", "x")
