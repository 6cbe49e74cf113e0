"""Parameters as controllers print them."""

import pytest
from starlette.requests import Request

from service.errors import ServiceError
from service.problems import problem_of
from service.wire.query import known_parameters, number, whole_number


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


@pytest.mark.parametrize(("text", "value"), [("12", 12), ("+12", 12), (" 12", 12), ("-007", -7)])
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
