"""Bodies as models: what is required, what is refused, and where the complaint points."""

from typing import Any

import pytest
from pydantic import BaseModel, ValidationError

from service.wire import answer_models, models
from service.wire.models import Arm, ConversionRequest, JacobiansRequest, PosesRequest

ROW = {"joint": "revolute", "a": 1, "alpha": 0, "d": 0, "theta": 0}
ARM = {"name": "one-turn", "convention": "standard", "units": "m-rad", "rows": [ROW]}


def kinds(model: type[BaseModel], body: Any) -> dict[str, str]:
    """Return the kind of each complaint by its place."""
    with pytest.raises(ValidationError) as caught:
        model.model_validate(body)
    return {".".join(map(str, each["loc"])): each["type"] for each in caught.value.errors()}


def strict_models() -> list[type[BaseModel]]:
    found: list[type[BaseModel]] = []
    waiting: list[type[BaseModel]] = [models.Strict]
    while waiting:
        below = waiting.pop().__subclasses__()
        found += below
        waiting += below
    return [model for model in found if model.__module__ == models.__name__]


def test_every_body_refuses_what_it_does_not_know() -> None:
    found = strict_models()
    assert len(found) >= 12
    for model in found:
        assert model.model_config["extra"] == "forbid"
        assert model.model_config["strict"] is True


def test_the_least_arm() -> None:
    arm = Arm.model_validate(ARM)
    assert (arm.tools, arm.frames, arm.combined_travel, arm.default_tool) == ({}, {}, [], None)
    row = arm.rows[0]
    assert (row.direction, row.travel, row.couplings, row.passive) == (1, None, [], False)
    assert arm.model_dump(exclude_unset=True) == ARM


@pytest.mark.parametrize("missing", ["name", "convention", "units", "rows"])
def test_what_an_arm_must_say(missing: str) -> None:
    body = {key: value for key, value in ARM.items() if key != missing}
    assert kinds(Arm, body) == {missing: "missing"}


@pytest.mark.parametrize("missing", ["joint", "a", "alpha", "d", "theta"])
def test_what_a_row_must_say(missing: str) -> None:
    row = {key: value for key, value in ROW.items() if key != missing}
    assert kinds(Arm, {**ARM, "rows": [row]}) == {f"rows.0.{missing}": "missing"}


@pytest.mark.parametrize(
    ("value", "kind"),
    [
        ("1", "float_type"),
        (True, "float_type"),
        (None, "float_type"),
        ([1], "float_type"),
        (float("nan"), "finite_number"),
        (float("inf"), "finite_number"),
    ],
)
def test_a_number_is_a_finite_number(value: object, kind: str) -> None:
    for field in ("a", "alpha", "d", "theta"):
        body = {**ARM, "rows": [{**ROW, field: value}]}
        assert kinds(Arm, body) == {f"rows.0.{field}": kind}


@pytest.mark.parametrize(
    "name", ["", "-a", "A", "ä", "a b", "a_b", "a.b", "a\n", "a" * 49, "a/b", "١"]
)
def test_names_that_are_none(name: str) -> None:
    assert list(kinds(Arm, {**ARM, "name": name})) == ["name"]
    pose = {"position": [0, 0, 0]}
    assert kinds(Arm, {**ARM, "tools": {name: pose}})
    assert kinds(Arm, {**ARM, "frames": {name: pose}})


@pytest.mark.parametrize("name", ["a", "0", "a-", "a--b", "9-lives", "a" * 48])
def test_names(name: str) -> None:
    assert Arm.model_validate({**ARM, "name": name}).name == name


@pytest.mark.parametrize("direction", [0, 2, -2, "1", 1.5])
def test_a_direction_is_one_or_minus_one(direction: object) -> None:
    body = {**ARM, "rows": [{**ROW, "direction": direction}]}
    assert kinds(Arm, body) == {"rows.0.direction": "literal_error"}


@pytest.mark.parametrize("number", [0, -1, 1000, 1.5, "1"])
def test_a_number_that_a_controller_knows(number: object) -> None:
    assert list(kinds(Arm, {**ARM, "tools": {"pen": {"number": number}}})) == ["tools.pen.number"]


def test_the_three_kinds_of_arm() -> None:
    asked = {"joints": [[0]]}
    assert PosesRequest.model_validate({**asked, "arm": "one-turn"}).arm == "one-turn"
    pinned = PosesRequest.model_validate({**asked, "arm": {"name": "one-turn", "revision": 2}}).arm
    assert isinstance(pinned, models.ArmRevision)
    assert isinstance(PosesRequest.model_validate({**asked, "arm": ARM}).arm, Arm)


def test_a_complaint_speaks_of_the_kind_that_was_meant() -> None:
    asked = {"joints": [[0]]}
    for arm, complaints in [
        ({"name": "one-turn", "revision": 0}, {"arm.ArmRevision.revision": "greater_than_equal"}),
        ({**ARM, "revision": 1}, {"arm.Arm.revision": "extra_forbidden"}),
        (
            {"name": "one-turn", "convention": "standard", "units": "m-rad"},
            {"arm.Arm.rows": "missing"},
        ),
        (5, {"arm.str": "string_type"}),
        (["one-turn"], {"arm.str": "string_type"}),
    ]:
        assert kinds(PosesRequest, {**asked, "arm": arm}) == complaints


def test_tags_of_kinds_are_no_fields() -> None:
    """A tag stands in a complaint's path: spelt like a field it would be taken for one."""
    fields = {
        info.alias or name for model in strict_models() for name, info in model.model_fields.items()
    }
    assert len(fields) >= 30
    assert not fields & {"str", "list", "Arm", "ArmRevision", "Pose"}


def test_a_tool_is_a_name_or_a_pose() -> None:
    asked = {"arm": "one-turn", "joints": [[0]]}
    assert PosesRequest.model_validate({**asked, "tool": "pen"}).tool == "pen"
    pose = {"position": [0, 0, 1], "orientation": {"form": "xyz-fixed", "values": [0, 0, 0]}}
    assert isinstance(PosesRequest.model_validate({**asked, "tool": pose}).tool, models.Pose)
    assert kinds(PosesRequest, {**asked, "tool": 3}) == {"tool.str": "string_type"}
    assert list(kinds(PosesRequest, {**asked, "tool": {"position": [0, 0]}})) == [
        "tool.Pose.position"
    ]


def test_a_task_is_a_name_or_rows() -> None:
    asked = {"arm": "one-turn", "joints": [[0]]}
    for task in ("pose", "position", "orientation", ["vx"], ["wz", "vy"]):
        assert PosesRequest.model_validate({**asked, "task": task}).task == task
    for task in ("", "vx", [], ["vx", "vq"], [1], 5, ["vx"] * 7):
        assert kinds(PosesRequest, {**asked, "task": task})


def test_defaults_of_a_question() -> None:
    asked = JacobiansRequest.model_validate({"arm": "one-turn", "joints": []})
    assert (asked.links, asked.singularity) == (False, True)
    names = ("tool", "frame", "form", "units", "task", "speeds", "twists", "loads")
    assert [getattr(asked, name) for name in names] == [None] * 8


def test_what_a_conversion_must_say() -> None:
    assert kinds(ConversionRequest, {}) == {"arm": "missing", "to": "missing"}
    assert kinds(ConversionRequest, {"arm": "a", "to": "Modified"}) == {"to": "literal_error"}


def test_answers_may_grow() -> None:
    found = answer_models.Finding(
        code=0, name="x", say="", measure=0, threshold=0, unit="", later=1
    )
    assert found.model_dump()["later"] == 1
