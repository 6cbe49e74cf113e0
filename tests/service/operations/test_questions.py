"""Which arm, tool, frame, units and task a question means."""

import gc
import weakref
from typing import Any

import numpy as np
import pytest

from kinematics.arm import Arm
from kinematics.errors import KinematicsError, ToolNotSaid, UnknownFrame, UnknownTool
from service.convert import UNITS, joint_values_in
from service.errors import ServiceError, UnknownArm, UnknownRevision
from service.operations.arms import Arms
from service.operations.meant_arms import meant_arm
from service.operations.poses import pose_item
from service.operations.questions import (
    meant_frame,
    meant_tool,
    meant_units,
    question_of,
)
from service.wire import models
from service.wire.arms import ReadArm, read_arm

MM = UNITS["mm-deg"]


def asked(arm: Any, **more: Any) -> models.PosesRequest:
    return models.PosesRequest.model_validate({"arm": arm, "joints": [], **more})


def test_an_arm_by_name_by_revision_and_whole(
    arms: Arms[ReadArm], document: dict[str, Any]
) -> None:
    arms.replace(
        "two-turns", {**document, "title": "Again"}, {f"1-{read_arm(document).digests.digest}"}
    )
    by_name = meant_arm(arms, "two-turns")
    pinned = meant_arm(arms, models.ArmRevision(name="two-turns", revision=1))
    whole = meant_arm(arms, models.Arm.model_validate(document))
    assert [meant.revision for meant in (by_name, pinned, whole)] == [2, 1, None]
    assert whole.identity() == {**pinned.identity(), "revision": None}
    assert list(whole.identity()) == ["name", "revision", "digest", "table_digest", "setup_digest"]


def test_an_arm_that_is_not_there_is_the_bodys_fault(arms: Arms[ReadArm]) -> None:
    for given, kind, where in [
        ("three-turns", UnknownArm, ("arm",)),
        (models.ArmRevision(name="three-turns", revision=1), UnknownArm, ("arm", "name")),
        (models.ArmRevision(name="two-turns", revision=5), UnknownRevision, ("arm", "revision")),
    ]:
        with pytest.raises(kind) as caught:
            meant_arm(arms, given)
        error: Any = caught.value
        assert (error.status, error.location, error.where) == (422, "body", where)


def test_a_whole_arm_that_is_refused_is_told_from_the_root(
    arms: Arms[ReadArm], document: dict[str, Any]
) -> None:
    for changes, where in [
        ({"cell": "north"}, ("arm", "cell")),
        ({"default_tool": "saw"}, ("arm", "default_tool")),
    ]:
        given = models.Arm.model_validate({**document, **changes})
        with pytest.raises((ServiceError, KinematicsError)) as caught:
            meant_arm(arms, given)
        assert caught.value.where == where  # type: ignore[attr-defined]


def test_tools(arms: Arms[ReadArm], document: dict[str, Any]) -> None:
    arm = meant_arm(arms, "two-turns").arm
    for given, shown, number, height in [
        (None, "flange", None, 0.0),
        ("flange", "flange", None, 0.0),
        ("pen", "pen", 3, 0.12),
        (3, "pen", 3, 0.12),
        ("7", "7", None, 0.007),
    ]:
        tool = meant_tool(arm, MM, given)  # type: ignore[arg-type]
        assert (tool.shown, tool.number, tool.repaired) == (shown, number, ())
        assert tool.tool_in_flange[2, 3] == pytest.approx(height)
    for unknown in ("saw", 4):
        with pytest.raises(UnknownTool):
            meant_tool(arm, MM, unknown)
    silent = read_arm({key: value for key, value in document.items() if key != "default_tool"})
    with pytest.raises(ToolNotSaid):
        meant_tool(silent.arm, MM, None)
    bare = read_arm({**document, "tools": {}})
    assert meant_tool(bare.arm, MM, None).shown == "flange"


def test_a_tool_by_its_pose_is_in_the_questions_units(arms: Arms[ReadArm]) -> None:
    arm = meant_arm(arms, "two-turns").arm
    body = {
        "position": [0, 0, 1],
        "orientation": {"form": "quaternion-wxyz", "values": [2, 0, 0, 0]},
    }
    pose = models.Pose.model_validate(body)
    tool = meant_tool(arm, UNITS["in-deg"], pose)
    assert tool.tool_in_flange[2, 3] == 0.0254
    assert (tool.shown, tool.number) == (body, None)
    assert [finding.code for finding in tool.repaired] == [6]


def test_units_are_the_arms_own_where_none_are_said(arms: Arms[ReadArm]) -> None:
    meant = meant_arm(arms, "two-turns")
    assert meant_units(meant, None) is MM
    assert meant_units(meant, "in-deg") is UNITS["in-deg"]


def test_frames(arms: Arms[ReadArm]) -> None:
    arm = meant_arm(arms, "two-turns").arm
    expected = {None: "base", "base": "base", "world": "world", "tray": "tray", 5: "tray"}
    assert {given: meant_frame(arm, given) for given in expected} == expected
    for moving in ("flange", "tool"):
        assert meant_frame(arm, moving, moving=True) == moving
        with pytest.raises(UnknownFrame) as caught:
            meant_frame(arm, moving)
        assert "base, world, tray" in caught.value.way_out
    for unknown in ("table", 6, "link-1", "pen"):
        with pytest.raises(UnknownFrame):
            meant_frame(arm, unknown, moving=True)


def test_a_task_is_looked_at_even_where_nobody_judges(arms: Arms[ReadArm]) -> None:
    twice = asked("two-turns", task=["vx", "vx"], singularity=False)
    with pytest.raises(KinematicsError) as caught:
        question_of(arms, twice, "matrix")
    assert caught.value.where == ("task",)


def test_what_was_repaired_in_arm_and_tool_is_carried(
    arms: Arms[ReadArm], document: dict[str, Any]
) -> None:
    off = [[1.001, 0, 0, 0], [0, 1, 0, 0], [0, 0, 1, 0], [0, 0, 0, 1]]
    question = question_of(
        arms, asked({**document, "base": {"matrix": off}}, tool={"matrix": off}), "matrix"
    )
    assert [finding.code for finding in question.repaired] == [6, 6]
    assert question_of(arms, asked("two-turns"), "matrix").repaired == ()


def test_what_is_judged_by_is_prepared_once_per_arm_tool_and_task(
    arms: Arms[ReadArm], document: dict[str, Any]
) -> None:
    def prepared(arm: Any, **more: Any) -> Any:
        return question_of(arms, asked(arm, **more), "matrix").prepared

    first = prepared("two-turns")
    assert prepared(document) is first
    assert prepared({**document, "title": "Renamed"}) is first
    for other in (
        prepared("two-turns", tool="pen"),
        prepared("two-turns", task="pose"),
        prepared({**document, "rows": document["rows"][:1]}),
        prepared({**document, "singularity_thresholds": {"near": 0.5}}),
    ):
        assert other is not first
    assert prepared({**document, "rows": []}) is None


@pytest.mark.parametrize(("frames", "kept"), [(4, True), (1200, False)])
def test_a_whole_arm_is_kept_only_if_its_words_are_few(
    arms: Arms[ReadArm], document: dict[str, Any], frames: int, kept: bool
) -> None:
    tray = document["frames"]["tray"]
    many = {f"tray-{place}": {**tray, "number": None} for place in range(frames)}

    def answered() -> weakref.ref[Arm]:
        question = question_of(arms, asked({**document, "frames": many}), "matrix")
        # All that is worked out once for an arm has been: scales, limits, what it is judged by.
        assert pose_item(question, [0.1, 9.0]).items[0]["code"] == 4
        assert list(joint_values_in(question.arm, MM, np.array([90.0, 0.0]))) == [np.pi / 2, 0]
        return weakref.ref(question.arm)

    first, again = answered(), answered()
    gc.collect()
    assert (again() is not None) is kept
    assert first() is again()
