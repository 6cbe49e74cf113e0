"""A controller's query as a question: what it means, and what it may leave out."""

from typing import Any

import pytest

from kinematics.orientation_forms import FORMS, TRIPLES
from service.errors import FormNotFlat, MissingField, ServiceError, Unparseable, UnusableValue
from service.wire.controller import (
    JACOBIAN_PARAMETERS,
    PARAMETERS,
    errors_inline,
    joints_asked,
    single_question,
    wanted_format,
    wanted_row,
    wanted_tag,
)
from service.wire.question_parameters import JACOBIAN_QUESTION_PARAMETERS, QUESTION_PARAMETERS
from service.wire.single import JointsAsked, SingleQuestion

ALL_NAMES = [f"q{n}" for n in range(1, 33)]


def whole(flat: bool, parameters: dict[str, str]) -> tuple[SingleQuestion, JointsAsked]:
    """Return all that the handler reads, in its order."""
    question = single_question("one-turn", parameters, "flat" if flat else "json")
    return question, joints_asked(parameters, question.scale)


def asked(flat: bool = False, **parameters: str) -> SingleQuestion:
    return whole(flat, parameters)[0]


def joints_of(**parameters: str) -> JointsAsked:
    return whole(False, parameters)[1]


def refusal(kind: type[ServiceError], flat: bool = False, **parameters: str) -> ServiceError:
    with pytest.raises(kind) as caught:
        asked(flat, **parameters)
    assert caught.value.location == "query"
    return caught.value


def test_the_least_question() -> None:
    question = asked(q="1,2")
    assert question.arm == "one-turn"
    assert joints_of(q="1,2") == ([1, 2], ["q", "q"])
    assert question.form == "quaternion-wxyz"
    assert asked(True, q="1").form == "xyz-fixed"
    rest = ("tool", "tool_pose", "frame", "units", "revision", "expect", "task")
    assert [getattr(question, name) for name in rest] == [None] * 7


def test_a_whole_question() -> None:
    question = asked(
        q="1", tool="3", frame="tray", form="matrix", units="in-deg", revision="4",
        expect="0af70af7", task="vx,wz", tag="5", format="json",
    )  # fmt: skip
    assert (question.tool, question.frame, question.form) == ("3", "tray", "matrix")
    assert (question.units, question.revision, question.expect) == ("in-deg", 4, "0af70af7")
    assert question.task == ["vx", "wz"]
    assert asked(q="1", task="position").task == "position"


@pytest.mark.parametrize(
    ("parameters", "joints", "names"),
    [
        ({"q": "0,-90,1.5E+01"}, [0, -90, 15], ["q"] * 3),
        ({"q": ""}, [], []),
        ({}, [], []),
        ({"q1": "1", "q2": "-2"}, [1, -2], ["q1", "q2"]),
        ({"q2": "-2", "q1": " 1"}, [1, -2], ["q1", "q2"]),
        ({f"q{n}": str(n) for n in range(32, 0, -1)}, list(range(1, 33)), ALL_NAMES),
    ],
)
def test_joint_values(parameters: dict[str, str], joints: list[float], names: list[str]) -> None:
    assert joints_of(**parameters) == (joints, names)


def test_what_is_asked_in_the_same_few_words_is_one_question() -> None:
    tool = dict.fromkeys(("tx", "ty", "tz", "tr1", "tr2", "tr3"), f"-{12345.678901234567}")
    words = {**tool, "frame": "tray", "units": "mm-deg", "revision": "4", "expect": "0af70af7"}
    assert asked(q="1", tag="1", **words) is asked(q="2", tag="2", **words)
    assert asked(q="1", **words).is_kept
    # As many zeros as a query holds may stand before a number, and what was read is the same.
    long = asked(q="1", revision="4".zfill(60_000))
    assert (long.revision, long.is_kept) == (4, False)
    assert long is not asked(q="1", revision="4".zfill(60_000))
    assert not single_question("a" * 600, {}, "json").is_kept


def test_joint_values_that_cannot_be_told() -> None:
    assert refusal(UnusableValue, q="1", q1="1").where == ("q1",)
    assert refusal(MissingField, q2="1").where == ("q1",)
    assert refusal(MissingField, q1="1", q2="1", q4="1").where == ("q3",)
    assert refusal(Unparseable, q1="1", q2="").where == ("q2",)
    assert refusal(Unparseable, q="1;2").where == ("q",)


def test_an_inline_tool() -> None:
    pose = asked(q="1", tx="1", tz="-3.5", tr2="90").tool_pose
    assert pose is not None
    assert pose.model_dump(exclude_unset=True) == {
        "position": [1, 0, -3.5],
        "orientation": {"form": "xyz-fixed", "values": [0, 90, 0]},
    }
    for form, read in [("zyx-current", "zyx-current"), ("matrix", "xyz-fixed")]:
        pose = asked(q="1", tx="0", form=form).tool_pose
        assert pose is not None
        assert pose.orientation is not None
        assert pose.orientation.form == read
    assert refusal(UnusableValue, q="1", tx="1", tool="pen").where == ("tool",)
    assert refusal(Unparseable, q="1", tr3="left").where == ("tr3",)


@pytest.mark.parametrize("form", FORMS)
def test_only_triples_are_flat(form: str) -> None:
    assert asked(q="1", form=form).form == form
    if form in TRIPLES:
        assert asked(True, q="1", form=form).form == form
    else:
        error = refusal(FormNotFlat, True, q="1", form=form)
        assert (error.where, error.value) == (("form",), form)


@pytest.mark.parametrize(
    ("parameters", "where"),
    [({"units": "cm"}, "units"), ({"revision": "1.5"}, "revision"), ({"scale": "-1"}, "scale")],
)
def test_other_values_that_cannot_be_used(parameters: dict[str, str], where: str) -> None:
    assert refusal(ServiceError, q="1", **parameters).where == (where,)


def test_a_format() -> None:
    assert wanted_format({}) == "json"
    for known in ("json", "flat", "txt", "csv"):
        assert wanted_format({"format": known}) == known
    for wrong in ("xml", "", "FLAT"):
        with pytest.raises(UnusableValue):
            wanted_format({"format": wrong})


def test_a_row() -> None:
    assert [wanted_row({"row": text}, "txt") for text in ("1", "+6", "02")] == [1, 6, 2]
    assert [wanted_row({}, form) for form in ("json", "flat", "csv")] == [None] * 3
    with pytest.raises(MissingField) as caught:
        wanted_row({}, "txt")
    assert caught.value.where == ("row",)
    for wrong in ("0", "7", "-1"):
        with pytest.raises(UnusableValue):
            wanted_row({"row": wrong}, "txt")
    for other in ("json", "flat", "csv"):
        with pytest.raises(UnusableValue):
            wanted_row({"row": "1"}, other)


def test_a_scale_divides_what_comes_in() -> None:
    scaled = asked(q="900,-1505", tx="25", tr3="-7", scale="100")
    assert scaled.scale == 100
    assert joints_of(q="900,-1505", scale="100").values == [9.0, -15.05]
    pose = scaled.tool_pose
    assert pose is not None
    assert pose.position == [0.25, 0, 0]
    assert pose.orientation is not None
    assert pose.orientation.values == [0, 0, -0.07]
    assert joints_of(q1="+12", q2=" 012", scale="10").values == [1.2, 1.2]
    assert asked(q="1").scale is None
    for wrong in ("1.0", "1e2", "", "x", "1,5"):
        assert refusal(Unparseable, q1=wrong, scale="10").where == ("q1",)


def test_a_tag() -> None:
    assert wanted_tag({}) == 0
    assert [wanted_tag({"tag": text}) for text in ("7", "-7", " 7", "007")] == [7, -7, 7, 7]
    for wrong in ("", "x", "1.0", "1e3"):
        with pytest.raises(Unparseable):
            wanted_tag({"tag": wrong})


def test_refusals_inline() -> None:
    assert [errors_inline(given) for given in ({}, {"errors": "inline"})] == [False, True]
    for wrong in ("", "yes", "INLINE"):
        with pytest.raises(UnusableValue):
            errors_inline({"errors": wrong})


def test_what_is_documented_is_what_is_known() -> None:
    said = {given["name"]: given for given in QUESTION_PARAMETERS}
    assert len(said) == len(QUESTION_PARAMETERS) == 50
    assert set(said) == PARAMETERS
    assert {given["name"] for given in JACOBIAN_QUESTION_PARAMETERS} == JACOBIAN_PARAMETERS
    assert {"row"} == JACOBIAN_PARAMETERS - PARAMETERS
    schemas: list[dict[str, Any]] = [given["schema"] for given in said.values()]
    assert all(schema["type"] for schema in schemas)
    assert said["form"]["schema"]["enum"] == list(FORMS)
