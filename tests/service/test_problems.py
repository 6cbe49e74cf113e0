"""One table, one tree, one shape: codes are held here against the contract's numbers."""

import ast
import json
import math
import re
from collections.abc import Iterator
from pathlib import Path

import pytest
from pydantic import BaseModel, Field, ValidationError

from kinematics import errors as core
from service import errors, problems
from service.details import Detail
from service.errors import ServiceError
from service.problems import ANSWERS, KINDS, problem_of

SERVICE = Path(problems.__file__).parent
CONTRACT = {
    "unparseable": (100, 400),
    "duplicate-key": (100, 400),
    "wrong-media-type": (100, 415),
    "request-timeout": (100, 408),
    "wrong-joint-count": (101, 422),
    "not-finite": (102, 422),
    "unknown-arm": (103, 404),
    "unknown-survey": (103, 404),
    "unknown-record": (103, 404),
    "unknown-tool": (104, 422),
    "unknown-frame": (104, 422),
    "unusable-value": (105, 422),
    "missing-field": (105, 422),
    "out-of-range": (105, 422),
    "not-connected": (105, 422),
    "not-rigid": (106, 422),
    "unknown-revision": (107, 404),
    "digest-differs": (107, 409),
    "name-taken": (107, 409),
    "in-use": (107, 409),
    "revision-differs": (107, 412),
    "precondition-required": (107, 428),
    "too-large": (108, 413),
    "not-available": (109, 503),
    "not-finished": (109, 409),
    "no-live-pose": (109, 409),
    "internal": (109, 500),
    "unknown-field": (110, 422),
    "unknown-path": (110, 404),
    "method-not-allowed": (110, 405),
    "tool-not-said": (111, 422),
    "form-not-flat": (112, 422),
    "number-does-not-fit": (113, 422),
}


class Row(BaseModel, extra="forbid"):
    alpha: float = Field(allow_inf_nan=False)


class Table(BaseModel, extra="forbid"):
    rows: list[Row]
    near: str | Row = ""


def below(kind: type[Exception]) -> Iterator[type[Exception]]:
    for child in kind.__subclasses__():
        yield child
        yield from below(child)


def refusal(body: object) -> problems.Problem:
    with pytest.raises(ValidationError) as caught:
        Table.model_validate(body)
    return problem_of(caught.value, body=body)


def test_the_table_is_the_contract() -> None:
    assert {code: (kind.number, kind.status) for code, kind in KINDS.items()} == CONTRACT
    assert all(kind.title for kind in KINDS.values())
    assert sorted(ANSWERS) == [0, 1, 2, 3, 4, 5, 6, 7, 8, 200, 201, 202]
    assert not set(ANSWERS) & {kind.number for kind in KINDS.values()}


def test_codes_with_two_statuses() -> None:
    second = {code: kind.statuses[1:] for code, kind in KINDS.items() if len(kind.statuses) > 1}
    assert second == {
        "unknown-arm": (422,),
        "unknown-revision": (422,),
        "too-large": (422,),
        "not-available": (422,),
    }


def test_every_status_that_the_service_says_is_one_of_its_code() -> None:
    """Read from the text: ``Kind(..., status=422)``, and ``error.status = 422`` in a handler.

    ``ServiceError`` itself carries complaints of the core, so it stands for all of theirs.
    """
    found = [pair for path in sorted(SERVICE.rglob("*.py")) for pair in statuses_said(path)]
    assert len(found) >= 8
    assert [(code, status) for code, status in found if status not in KINDS[code].statuses] == []


def statuses_said(path: Path) -> Iterator[tuple[str, int]]:
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Call):
            for keyword in node.keywords:
                said = keyword.value
                if keyword.arg == "status" and isinstance(said, ast.Constant) and said.value:
                    yield from ((code, said.value) for code in codes_of(ast.unparse(node.func)))
        if isinstance(node, ast.ExceptHandler) and node.type is not None:
            for status in statuses_set(node):
                names = [name.id for name in ast.walk(node.type) if isinstance(name, ast.Name)]
                told = {
                    text.value
                    for text in ast.walk(node)
                    if isinstance(text, ast.Constant) and text.value in KINDS
                }
                # A handler for all kinds asks for the codes it means.
                codes = (
                    told if names == ["ServiceError"] else {c for n in names for c in codes_of(n)}
                )
                assert codes, path
                yield from ((code, status) for code in codes)


def statuses_set(handler: ast.ExceptHandler) -> Iterator[int]:
    for node in ast.walk(handler):
        if isinstance(node, ast.Assign) and isinstance(node.targets[0], ast.Tuple):
            targets = node.targets[0].elts
            # Whole values taken apart set no status that could be read here.
            whole = not isinstance(node.value, ast.Tuple)
            assert not (whole and any("status" in ast.unparse(target) for target in targets))
            values = [] if whole else node.value.elts  # type: ignore[attr-defined]
            pairs = list(zip(targets, values, strict=not whole))
        elif isinstance(node, ast.Assign):
            pairs = [(node.targets[0], node.value)]
        else:
            continue
        for target, value in pairs:
            if isinstance(target, ast.Attribute) and target.attr == "status":
                assert isinstance(value, ast.Constant)
                yield value.value


def codes_of(name: str) -> set[str]:
    """Return the codes a class of errors stands for; none for another call with a status."""
    if name == "ServiceError":
        return {kind.code for kind in below(core.KinematicsError)}
    return {kind.code for kind in below(ServiceError) if kind.__name__ == name}


def test_every_error_class_has_a_row() -> None:
    classes = [*below(ServiceError), *below(core.KinematicsError)]
    assert len(classes) >= 34
    assert [kind for kind in classes if kind.code not in KINDS] == []


def test_every_row_but_internal_has_a_class() -> None:
    classes = [core.KinematicsError, *below(ServiceError), *below(core.KinematicsError)]
    assert set(KINDS) - {kind.code for kind in classes} == {"internal"}


def test_the_tree_is_drawn_as_it_is() -> None:
    drawn = re.findall(r"[|']- (\w+)", errors.__doc__ or "")
    made = {kind.__name__ for kind in below(ServiceError) if kind.__module__ == errors.__name__}
    assert len(drawn) == len(set(drawn)) == 28
    assert set(drawn) == made


def test_a_document_has_one_shape() -> None:
    error = errors.UnknownArm('no arm "axle"', where=("arm",), value="axle", way_out="list them")
    assert problem_of(error).document("0af7") == {
        "type": "/docs/problems#unknown-arm",
        "title": KINDS["unknown-arm"].title,
        "status": 404,
        "detail": 'no arm "axle"',
        "code": "unknown-arm",
        "number": 103,
        "errors": [
            {
                "pointer": "/arm",
                "in": "body",
                "say": 'no arm "axle"',
                "value": "axle",
                "way_out": "list them",
            }
        ],
        "request_id": "0af7",
    }


def test_a_status_can_be_said() -> None:
    assert problem_of(errors.UnknownArm("no", status=422)).status == 422
    assert problem_of(errors.TooLarge("no")).status == 413
    assert problem_of(errors.TooLarge("no", status=422)).status == 422


def test_a_database_that_does_not_answer_says_when_to_ask_again() -> None:
    assert problem_of(errors.StorageUnavailable("no")).headers == {"Retry-After": "5"}
    later = errors.StorageUnavailable("no", headers={"Retry-After": "60"})
    assert problem_of(later).headers == {"Retry-After": "60"}
    assert problem_of(errors.StorageUnusable("no")).headers == {}


def test_of_several_codes_the_highest_wins_and_stands_first() -> None:
    several = [
        Detail("missing-field", "a"),
        Detail("unknown-field", "b"),
        Detail("not-finite", "c"),
    ]
    found = problem_of(ServiceError("three", errors=several))
    assert (found.code, found.number, found.status) == ("unknown-field", 110, 422)
    assert [detail.say for detail in found.errors] == ["b", "a", "c"]


def test_at_most_twenty_places_are_shown() -> None:
    many = refusal({"rows": [{} for _ in range(50)]}).document("x")
    assert len(many["errors"]) == 20
    assert many["detail"] == '"alpha" is missing (and 49 more)'


def test_a_bulk_of_complaints_is_counted() -> None:
    found = refusal({"rows": [{"alpha": "x"}] * 100_000})
    assert found.detail.endswith("(and 99999 more)")


def test_the_core_points_into_the_body() -> None:
    error = core.InvalidArm("travel is reversed", where=("travel",), value=[5, -5]).below("rows", 3)
    found = problem_of(error)
    assert (found.code, found.status) == ("unusable-value", 422)
    assert found.document("x")["errors"][0]["pointer"] == "/rows/3/travel"


def test_a_count_of_the_core_is_no_oversized_body() -> None:
    assert problem_of(core.TooManyRows("33 rows")).status == 422


def test_an_unforeseen_error_keeps_its_text_to_itself() -> None:
    document = problem_of(RuntimeError("secret /etc/place")).document("x")
    assert (document["code"], document["status"], document["errors"]) == ("internal", 500, [])
    assert "secret" not in json.dumps(document)


@pytest.mark.parametrize(
    ("body", "code", "pointer", "way_out"),
    [
        ({"rows": [{"alhpa": 1, "alpha": 1}]}, "unknown-field", "/rows/0/alhpa", '"alpha"'),
        ({"rows": [{}]}, "missing-field", "/rows/0/alpha", '"alpha"'),
        ({"rows": [{"alpha": math.nan}]}, "not-finite", "/rows/0/alpha", ""),
        ({"rows": [{"alpha": "x"}]}, "unusable-value", "/rows/0/alpha", ""),
        ({"rows": {}}, "unusable-value", "/rows", ""),
        ({"rows": [], "rows/~": 1}, "unknown-field", "/rows~1~0", "rows"),
        ([], "unusable-value", "", ""),
    ],
)
def test_what_pydantic_refuses(body: object, code: str, pointer: str, way_out: str) -> None:
    found = refusal(body)
    entry = found.document("x")["errors"][0]
    assert (found.code, entry["pointer"]) == (code, pointer)
    assert way_out in entry["way_out"]


def test_union_tags_are_no_part_of_a_pointer() -> None:
    found = refusal({"rows": [], "near": {"alpha": "x"}})
    pointers = {entry["pointer"] for entry in found.document("x")["errors"]}
    assert pointers == {"/near", "/near/alpha"}


@pytest.mark.parametrize(
    "value",
    [math.nan, math.inf, "\ud800", 10**5000, ["x" * 500] * 50, {"\udfff": object()}],
    ids=["nan", "infinity", "surrogate", "digits", "list", "object"],
)
def test_any_value_can_be_shown(value: object) -> None:
    entry = Detail("unusable-value", "no", ("a",), value=value).document()
    text = entry["value"] if isinstance(entry["value"], str) else json.dumps(entry["value"])
    assert 0 < len(text) <= 200
    json.dumps(entry, ensure_ascii=False, allow_nan=False).encode("utf-8")
