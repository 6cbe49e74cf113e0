"""Items of answers: codes, order, refused ones between the others, singularity in users' units.

Left out: whether the numbers are right; the core's tests and the published cases hold that.
"""

import math
from typing import Any

import numpy as np
import pytest

from kinematics.findings import Finding
from kinematics.jacobian import motion_of
from service.convert import UNITS
from service.operations.arms import Arms
from service.operations.jacobians import Wanted, jacobian_items
from service.operations.joint_rows import JointRows, read_joint_rows
from service.operations.poses import answered, pose_item, pose_items, with_refused
from service.operations.questions import Question, question_of
from service.operations.singularities import judged
from service.wire import models
from service.wire.arms import ReadArm

MM = UNITS["mm-deg"]


def asked(arms: Arms[ReadArm], **more: Any) -> Question:
    body = {"arm": "two-turns", "joints": [], **more}
    request = models.PosesRequest.model_validate(body)
    return question_of(arms, request, "zyx-current", moving=True)


def rows_of(question: Question, *rows: Any) -> JointRows:
    return read_joint_rows(question.arm, question.units, list(rows), singularity=True)


def finding(code: int) -> Finding:
    return Finding(code, "x", "{measure}", 1.0, 2.0)


def test_the_highest_code_stands_at_the_head() -> None:
    item = answered(MM, [finding(2), finding(5), finding(0)], {"part": 1})
    assert list(item) == ["ok", "code", "part", "findings"]
    assert (item["ok"], item["code"]) == (True, 5)
    assert [found["code"] for found in item["findings"]] == [2, 5, 0]  # type: ignore[union-attr, attr-defined]
    assert answered(MM, [], {})["code"] == 0


def test_the_head(arms: Arms[ReadArm]) -> None:
    head = asked(arms, units="in-deg", tool="pen", frame="tray").head
    assert (head["units"], head["tool"], head["frame"]) == ("in-deg", "pen", "tray")


def test_refused_items_stand_in_their_places(arms: Arms[ReadArm]) -> None:
    question = asked(arms)
    rows = rows_of(question, ["x", 0], [0, 90], [1], [0, 45], [0, math.inf])
    items: list[dict[str, object]] = [{"ok": True, "mark": 1}, {"ok": True, "mark": 3}]
    found = with_refused(items, rows, ("position", "orientation"))
    assert [item.get("mark") for item in found] == [None, 1, None, 3, None]
    assert [item.get("code") for item in found] == [105, None, 101, None, 102]
    refused: Any = found[4]
    assert list(refused) == ["ok", "code", "position", "orientation", "findings", "problem"]
    assert (refused["ok"], refused["position"], refused["findings"]) == (False, None, [])
    assert list(refused["problem"]) == ["code", "pointer", "say", "value", "way_out"]
    assert refused["problem"]["pointer"] == "/joints/4/1"
    assert refused["problem"]["value"] == "Infinity"
    assert with_refused(items, rows_of(question, [0, 0], [0, 0]), ()) is items


@pytest.mark.parametrize("singularity", [True, False])
@pytest.mark.parametrize("links", [True, False])
def test_what_a_pose_holds(arms: Arms[ReadArm], singularity: bool, links: bool) -> None:
    question = asked(arms)
    rows = rows_of(question, [0, 90], [10, 80])
    items, margins = pose_items(question, rows, singularity=singularity, links=links)
    wanted = ["ok", "code", "position", "orientation"]
    wanted += ["singularity"] * singularity + ["links"] * links + ["findings"]
    assert [list(item) for item in items] == [wanted, wanted]
    assert items[0]["position"] == pytest.approx([400, 300, 0])
    assert margins == pytest.approx([80 / 340, 90 / 340])


@pytest.mark.parametrize("frame", ["base", "world", "tray", "flange", "tool"])
def test_one_by_one_as_together(arms: Arms[ReadArm], frame: str) -> None:
    question = asked(arms, frame=frame, tool="pen")
    joints = [[0, 90], [0, 0], [171, 20], ["x", 1], [-30, 1e-3]]
    wanted = Wanted(np.ones((4, 2)), np.ones((4, 6)), np.ones((4, 6)))
    rows = rows_of(question, *joints)
    together, margins = jacobian_items(question, rows, wanted, singularity=True)
    place = 0
    for index, joint_values in enumerate(joints):
        if index == 3:
            assert together[index]["ok"] is False
            continue
        one = wanted.piece(place, place + 1)
        row = rows_of(question, joint_values)
        alone = jacobian_items(question, row, one, singularity=True)
        assert alone == ([together[index]], [margins[place]])
        place += 1
    if frame in ("base", "world", "tray"):
        for links in (True, False):
            poses, margins = pose_items(question, rows, singularity=True, links=links)
            for place, index in enumerate((0, 1, 2, 4)):
                row = rows_of(question, joints[index])
                expected = [poses[index]], [margins[place]]
                assert pose_items(question, row, singularity=True, links=links) == expected
                if not links:
                    assert pose_item(question, row.values[0].tolist()) == expected


def test_what_is_wanted_in_pieces() -> None:
    whole = Wanted(speeds=np.arange(6.0).reshape(3, 2), loads=np.zeros((3, 6)))
    piece = whole.piece(1, 3)
    assert piece.twists is None
    np.testing.assert_array_equal(piece.speeds, [[2, 3], [4, 5]])
    assert Wanted().piece(0, 5) == Wanted()


def told(question: Question, joint_values: list[float]) -> dict[str, Any]:
    values = np.array([joint_values])
    motion = motion_of(question.arm, values, question.tool.tool_in_flange)
    found = judged(question, values, motion)
    assert found is not None
    answer, _ = found.told(0, np.eye(3))
    return answer


def test_singularity_has_lengths_and_angles_in_the_users_units(
    arms: Arms[ReadArm], document: dict[str, Any]
) -> None:
    rows = [{**row, "top_speed": 180} for row in document["rows"]]
    by_units = {
        units: told(asked(arms, arm={**document, "rows": rows}, units=units), [0.0, 0.004])
        for units in UNITS
    }
    for units, answer in by_units.items():
        length = {"mm": 1000.0, "m": 1.0, "in": 1 / 0.0254}[UNITS[units].length]
        angle = 180 / math.pi if UNITS[units].angle == "deg" else 1.0
        si = by_units["m-rad"]
        for pure in (
            "smallest_singular_value",
            "condition_number",
            "manipulability",
            "lost_motion",
        ):
            assert answer[pure] == si[pure]
        assert answer["characteristic_length"] == pytest.approx(0.7 * length)
        assert answer["travel_to"]["value"] == pytest.approx(si["travel_to"]["value"] * angle)
        assert answer["travel_to"]["unit"] == UNITS[units].angle
        assert answer["tool_speed"]["linear"] == pytest.approx(si["tool_speed"]["linear"] * length)


def test_a_singular_posture_has_no_condition_number(arms: Arms[ReadArm]) -> None:
    answer = told(asked(arms), [0.3, 0.0])
    assert (answer["state"], answer["condition_number"], answer["travel_to"]) == (
        "singular",
        None,
        None,
    )


def test_an_arm_without_joints_is_not_judged(arms: Arms[ReadArm], document: dict[str, Any]) -> None:
    question = asked(arms, arm={**document, "rows": []})
    for found in (
        pose_items(question, rows_of(question, []), singularity=True, links=False),
        pose_item(question, []),
    ):
        assert found.items[0]["singularity"] is None
        assert found.margins == [math.inf]
    motion = motion_of(question.arm, np.empty((1, 0)), np.eye(4))
    assert judged(question, np.empty((1, 0)), motion) is None
