"""Parameters as controllers print them."""

import math
import time
from urllib.parse import parse_qsl, quote_plus

import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st
from starlette.requests import Request

from service.errors import ServiceError
from service.problems import problem_of
from service.wire.query import known_parameters, number, numbers, query_pairs, whole_number


def asked(query: str) -> Request:
    return Request({"type": "http", "query_string": query.encode(), "headers": []})


def code_of(error: ServiceError) -> tuple[str, int, int]:
    problem = problem_of(error)
    return problem.code, problem.number, problem.status


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("1.5E+01", 15.0),
        ("1.5E 01", 15.0),
        ("+3.0", 3.0),
        (" 3.0", 3.0),
        ("007", 7.0),
        ("-0.0", 0.0),
        (".5", 0.5),
        ("5.", 5.0),
        ("1e-3", 0.001),
    ],
)
def test_numbers_as_controllers_print_them(text: str, value: float) -> None:
    assert number(text, "q1") == value


def test_a_raw_plus_arrives_as_a_blank_and_is_read() -> None:
    given = known_parameters(asked("q1=+3.5&q=+1,-2.5E+01"), {"q1", "q"})
    assert number(given["q1"], "q1") == 3.5
    assert [number(part, "q") for part in given["q"].split(",")] == [1.0, -25.0]


@pytest.mark.parametrize(
    "text",
    ["", " ", "abc", "1,5", "1 5", "0x10", "1_000", "--1", "1e", "٣", "1.5.2", "  3", "+-3", "3 "],
)
def test_no_number_cannot_be_read(text: str) -> None:
    with pytest.raises(ServiceError) as caught:
        number(text, "q1")
    assert code_of(caught.value) == ("unparseable", 100, 400)
    entry = problem_of(caught.value).document("x")["errors"][0]
    assert (entry["pointer"], entry["in"], entry["value"]) == ("/q1", "query", text)


def test_a_decimal_comma_is_told_what_to_write() -> None:
    with pytest.raises(ServiceError) as caught:
        number("1,5", "q1")
    assert "decimal point" in caught.value.way_out


@pytest.mark.parametrize("text", ["nan", "NaN", "inf", "-Infinity", "+inf", " inf", "1e999"])
def test_not_finite_has_its_own_code(text: str) -> None:
    with pytest.raises(ServiceError) as caught:
        number(text, "q1")
    assert code_of(caught.value) == ("not-finite", 102, 422)


MANY_ZEROS = "0" * 5000
"""More than the interpreter reads of an integer, with or without digits that count."""


@pytest.mark.parametrize(
    ("text", "value"),
    [
        *[("12", 12), ("+12", 12), (" 12", 12), ("-007", -7), ("-0", 0)],
        *[(MANY_ZEROS, 0), (f"-{MANY_ZEROS}12", -12), (f"+{MANY_ZEROS}{10**17}", 10**17)],
    ],
)
def test_whole_numbers(text: str, value: int) -> None:
    assert whole_number(text, "tag") == value


@pytest.mark.parametrize(
    ("text", "code"),
    [
        ("1.0", "unparseable"),
        ("", "unparseable"),
        ("1_0", "unparseable"),
        ("9" * 19, "unusable-value"),
        ("9" * 5000, "unusable-value"),
    ],
)
def test_no_whole_number(text: str, code: str) -> None:
    with pytest.raises(ServiceError) as caught:
        whole_number(text, "tag")
    assert code_of(caught.value)[0] == code


def test_unknown_and_repeated_parameters_are_refused_together() -> None:
    with pytest.raises(ServiceError) as caught:
        known_parameters(asked("jonits=1&q=1&q=2"), {"joints", "q"})
    problem = problem_of(caught.value)
    assert problem.code == "unknown-field"
    entries = problem.document("x")["errors"]
    assert [(entry["pointer"], entry["in"]) for entry in entries] == [
        ("/jonits", "query"),
        ("/q", "query"),
    ]
    assert 'did you mean "joints"?' in entries[0]["way_out"]


def test_a_repeated_parameter_alone_is_an_unusable_value() -> None:
    with pytest.raises(ServiceError) as caught:
        known_parameters(asked("q=1&q=1"), {"q"})
    assert code_of(caught.value) == ("unusable-value", 105, 422)


def test_an_empty_value_is_a_parameter() -> None:
    assert known_parameters(asked("tag=&q"), {"tag", "q"}) == {"tag": "", "q": ""}


# --- pairs ---------------------------------------------------------------------------------

many = settings(max_examples=400, deadline=None, derandomize=True, database=None)
AWKWARD = st.text(st.sampled_from("aq1=&;%+.,-/? 2fFé€\x00\n\x7f"), max_size=40)
WRITTEN = st.lists(st.tuples(st.text(max_size=6), st.text(max_size=6)), max_size=5).map(
    lambda pairs: "&".join(f"{quote_plus(name)}={quote_plus(text)}" for name, text in pairs)
)


@many
@example(b"")
@example(b"q=1,2&form")
@example(b"&&a==b&=c&=&a")
@example(b"q=%2B1&q=+1&%zz=%e2%82&=%00")
@example("q=é".encode("latin-1"))
@given(raw=st.one_of(st.binary(max_size=40), AWKWARD.map(str.encode), WRITTEN.map(str.encode)))
def test_pairs_are_read_as_the_standard_library_reads_them(raw: bytes) -> None:
    request = Request({"type": "http", "query_string": raw, "headers": []})
    assert query_pairs(request) == parse_qsl(raw.decode("latin-1"), keep_blank_values=True)
    assert query_pairs(request) == request.query_params.multi_items()


# --- several numbers in one parameter ------------------------------------------------------

PIECES = st.one_of(
    st.floats().map(repr),
    st.integers(-(10**400), 10**400).map(str),
    st.from_regex(
        r"[+ -]?([0-9]{1,3}\.?[0-9]{0,3}|\.[0-9]{1,3})([eE][+ -]?[0-9]{1,4})?", fullmatch=True
    ),
    st.text(st.sampled_from("+-.eE 0123456789infaINF_\n\u0663"), max_size=8),
    st.just(""),
)


def outcome(texts: list[str]) -> list[float] | tuple[object, ...]:
    """Return what the pieces say, one by one; or the refusal of the first that says nothing."""
    try:
        return [number(text, "q") for text in texts]
    except ServiceError as error:
        return told(error)


def told(error: ServiceError) -> tuple[object, ...]:
    (detail,) = error.details()
    return (type(error), *(getattr(detail, part) for part in ("code", "say", "where", "location")),
            detail.value, detail.way_out)  # fmt: skip


@many
@example(["1", "2.5", ".5", "5.", "1e-3", "+1E+2", "-0"])
@example(["1", " 2", "1e 3"])
@example(["1e999", "x"])
@example(["1", "1e999"])
@example(["1", ""])
@example(["1", "nan"])
@example(["1\n"])
@given(texts=st.lists(PIECES, min_size=1, max_size=6))
def test_several_numbers_are_read_piece_by_piece(texts: list[str]) -> None:
    whole = ",".join(texts)
    if not whole:
        assert numbers(whole, "q") == []
        return
    expected = outcome(texts)
    if isinstance(expected, tuple):
        with pytest.raises(ServiceError) as caught:
            numbers(whole, "q")
        assert told(caught.value) == expected
    else:
        found = numbers(whole, "q")
        assert found == expected
        assert [math.copysign(1, value) for value in found] == [
            math.copysign(1, value) for value in expected
        ]


@pytest.mark.parametrize(
    "text",
    [
        ",".join(["1234567890"] * 32) + ",x",
        ",".join(["12345.67890e+10"] * 32) + ",",
        "1" * 60_000 + "x",
        "1" * 60_000,
        ",".join(["1"] * 30_000) + ",x",
        "." + "1" * 60_000 + "e",
    ],
    ids=lambda text: f"{text[:12]}...{text[-3:]}",
)
def test_what_is_no_number_is_told_at_once(text: str) -> None:
    """However long it is, and however many ways there are to cut it: a query is not a trap."""
    started = time.process_time()
    with pytest.raises(ServiceError):
        numbers(text, "q")
    # Some milliseconds; a pattern that tries every cut takes minutes or ages.
    assert time.process_time() - started < 1.0
