"""One posture of a stored arm: what a controller's question becomes, and where it is at fault."""

import math
from typing import Any

import pytest

from kinematics.errors import KinematicsError, UnknownFrame, UnknownTool
from service.errors import DigestDiffers, ServiceError, UnknownArm, UnknownRevision
from service.operations.arms import Arms
from service.operations.single import (
    _question_kept,
    joint_count,
    single_jacobian,
    single_pose,
)
from service.storage.ports import Head
from service.wire import models
from service.wire.arms import ReadArm
from service.wire.single import JointsAsked, SingleAnswer, SingleQuestion

EACH = pytest.mark.parametrize("ask", [single_pose, single_jacobian])


def question(
    joints: Any = (0, 90), arm: str = "two-turns", **more: Any
) -> tuple[SingleQuestion, JointsAsked]:
    names = more.pop("joint_names", ["q"] * len(joints))
    asked = SingleQuestion(arm, **{"form": "zyx-current", **more})
    return asked, JointsAsked(list(joints), names)


def pose(arms: Arms[ReadArm], *given: Any, **more: Any) -> SingleAnswer:
    return single_pose(arms, *question(*given, **more))


def test_a_pose(arms: Arms[ReadArm]) -> None:
    answer = pose(arms)
    assert list(answer.head) == ["arm", "units", "frame", "tool"]
    assert answer.item["position"] == pytest.approx([400, 300, 0])
    assert answer.margin == pytest.approx(80 / 340)
    assert (answer.tool_number, answer.frame_number, answer.codes) == (0, 0, frozenset())


def test_a_jacobian(arms: Arms[ReadArm]) -> None:
    answer = single_jacobian(arms, *question((0, math.pi / 2), units="m-rad"))
    matrix: Any = answer.item["matrix"]
    assert matrix[0] == pytest.approx([-0.3, -0.3])
    assert answer.head["units"] == "m-rad"


def test_tool_and_frame_by_name_or_number(arms: Arms[ReadArm]) -> None:
    for tool, frame in [("pen", "tray"), ("3", "5"), ("03", "005")]:
        answer = pose(arms, tool=tool, frame=frame)
        assert (answer.head["tool"], answer.head["frame"]) == ("pen", "tray")
        assert (answer.tool_number, answer.frame_number) == (3, 5)
        assert answer.item["position"] == pytest.approx([300, 300, 120])
    # 0 is what answers say for flange and base.
    answer = pose(arms, tool="0", frame="00")
    assert (answer.head["tool"], answer.head["frame"]) == ("flange", "base")
    # Zeros in front do not count, and no digit is cut off.
    assert pose(arms, tool="000000000003").tool_number == 3
    for name, refusal in (("tool", UnknownTool), ("frame", UnknownFrame)):
        with pytest.raises(refusal):
            pose(arms, **{name: "00000000030"})
        with pytest.raises(refusal):
            pose(arms, **{name: "3000000000"})
    # A tool may be called by digits; its name goes before any number.
    answer = pose(arms, tool="7")
    assert (answer.head["tool"], answer.tool_number) == ("7", 0)


def test_codes_of_all_findings(arms: Arms[ReadArm]) -> None:
    answer = pose(arms, (171, 0))
    assert answer.codes == {2, 4}
    assert answer.item["code"] == 4
    assert answer.margin == pytest.approx(-1 / 340)


def test_no_travel_no_margin(arms: Arms[ReadArm], document: dict[str, Any]) -> None:
    free = [{key: row[key] for key in row if key != "travel"} for row in document["rows"]]
    arms.replace("two-turns", {**document, "rows": free}, Head.ANY)
    assert pose(arms).margin == math.inf


@EACH
def test_what_is_expected(arms: Arms[ReadArm], ask: Any) -> None:
    digest = arms.get("two-turns").record.digest
    assert ask(arms, *question(expect=digest)).head["arm"]["digest"] == digest
    with pytest.raises(DigestDiffers) as caught:
        ask(arms, *question(expect="00000000"))
    assert (caught.value.where, caught.value.location) == (("expect",), "query")
    assert digest in caught.value.say


@EACH
def test_a_revision(arms: Arms[ReadArm], document: dict[str, Any], ask: Any) -> None:
    arms.replace("two-turns", {**document, "title": "Again"}, Head.ANY)
    assert ask(arms, *question()).head["arm"]["revision"] == 2
    assert ask(arms, *question(revision=1)).head["arm"]["revision"] == 1
    with pytest.raises(UnknownRevision) as caught:
        ask(arms, *question(revision=3))
    assert (caught.value.where, caught.value.location) == (("revision",), "query")
    with pytest.raises(UnknownArm) as unknown:
        ask(arms, *question(arm="three-turns", revision=1))
    assert unknown.value.location == "path"


@EACH
@pytest.mark.parametrize(
    ("joints", "names", "code", "where", "value"),
    [
        ([0], ["q"], "wrong-joint-count", "q", 1),
        ([0, 0, 0], ["q1", "q2", "q3"], "wrong-joint-count", "q", 3),
        ([0, 1e12], ["q", "q"], "out-of-range", "q", 1e12),
        ([0, 1e12], ["q1", "q2"], "out-of-range", "q2", 1e12),
    ],
)
def test_joint_values_lead_back_to_their_parameter(
    arms: Arms[ReadArm], ask: Any, joints: Any, names: Any, code: str, where: str, value: float
) -> None:
    with pytest.raises(ServiceError) as caught:
        ask(arms, *question(joints, joint_names=names))
    (detail,) = caught.value.details()
    assert (detail.code, detail.where, detail.location) == (code, (where,), "query")
    assert detail.value == value


@EACH
@pytest.mark.parametrize(
    ("axis", "name"), [(0, "tx"), (1, "ty"), (2, "tz"), (3, "tr1"), (4, "tr2"), (5, "tr3")]
)
def test_an_inline_tool_leads_back_to_its_parameter(
    arms: Arms[ReadArm], ask: Any, axis: int, name: str
) -> None:
    values = [0.0] * 6
    values[axis] = 1e15
    tool = models.Pose(
        position=values[:3],
        orientation=models.Orientation(form="xyz-fixed", values=values[3:]),
    )
    with pytest.raises(KinematicsError) as caught:
        ask(arms, *question(tool_pose=tool))
    assert (caught.value.code, caught.value.where) == ("out-of-range", (name,))
    assert caught.value.value == 1e15


@EACH
@pytest.mark.parametrize("task", ["drill", ["vx", "q"], ["vx", "vx"], []])
def test_a_task_leads_back_to_its_parameter(arms: Arms[ReadArm], ask: Any, task: Any) -> None:
    with pytest.raises(KinematicsError) as caught:
        ask(arms, *question(task=task))
    assert caught.value.where == ("task",)


def test_how_many_joints_an_arm_takes(arms: Arms[ReadArm]) -> None:
    assert joint_count(arms, "two-turns") == 2
    assert joint_count(arms, "no-such-arm") == 0
    assert joint_count(arms, "no such name") == 0


def test_nothing_is_kept_of_a_question_in_many_words(arms: Arms[ReadArm]) -> None:
    before = _question_kept.cache_info()
    for _ in range(2):
        assert pose(arms, tool="3".zfill(600), is_kept=False).tool_number == 3
    assert _question_kept.cache_info() == before
