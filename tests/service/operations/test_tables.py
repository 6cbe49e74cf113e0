"""A table in the other convention, as a document that can be stored again."""

from typing import Any

import numpy as np
import pytest

from kinematics.chain import tool_in_base
from service.operations.arms import Arms
from service.operations.tables import converted_table
from service.storage.ports import Head
from service.wire import models
from service.wire.arms import ReadArm, read_arm


def converted(arms: Arms[ReadArm], arm: Any, to: str) -> dict[str, Any]:
    asked = models.ConversionRequest.model_validate({"arm": arm, "to": to})
    found: dict[str, Any] = converted_table(arms, asked)
    return found


def tool_in_world(document: dict[str, Any], tool: str, joint_values: list[float]) -> np.ndarray:
    arm = read_arm(document).arm
    placed = tool_in_base(arm, np.array(joint_values), arm.tool_in_flange(tool))
    return arm.base_in_world @ placed


def test_the_answer(arms: Arms[ReadArm], document: dict[str, Any]) -> None:
    told = converted(arms, "two-turns", "modified")
    assert list(told) == ["arm", "units", "findings"]
    assert (told["units"], told["arm"]["convention"]) == ("mm-deg", "modified")
    assert [row["a"] for row in told["arm"]["rows"]] == [0, 400]
    assert [row["travel"] for row in told["arm"]["rows"]] == [[-170, 170]] * 2
    assert (told["arm"]["title"], told["arm"]["status"]) == ("Made up", "measured")
    (finding,) = told["findings"]
    assert (finding["code"], finding["name"]) == (0, "flange-moved")
    assert converted(arms, document, "modified") == told


def test_every_tool_takes_the_same_places(arms: Arms[ReadArm], document: dict[str, Any]) -> None:
    modified = converted(arms, "two-turns", "modified")["arm"]
    back = converted(arms, modified, "standard")["arm"]
    joint_values = [0.3, -1.1]
    for tool in ("pen", "7"):
        expected = tool_in_world(document, tool, joint_values)
        for other in (modified, back):
            np.testing.assert_allclose(
                tool_in_world(other, tool, joint_values), expected, atol=1e-15
            )
    former = tool_in_world(modified, "former-flange", joint_values)
    np.testing.assert_allclose(former, tool_in_world(document, "flange", joint_values), atol=1e-15)
    # An arm that took the flange where nothing was said takes the same place now.
    assert modified["default_tool"] == "former-flange"


def test_the_same_convention_changes_nothing(arms: Arms[ReadArm], document: dict[str, Any]) -> None:
    told = converted(arms, "two-turns", "standard")
    assert told["findings"] == []
    assert read_arm(told["arm"]).digests == read_arm(document).digests


def test_it_can_be_stored(arms: Arms[ReadArm]) -> None:
    told = converted(arms, "two-turns", "modified")
    assert arms.replace("two-turns", told["arm"], Head.ANY).record.revision == 2
    pinned = converted(arms, {"name": "two-turns", "revision": 1}, "modified")
    assert pinned == told


def test_to_standard_the_base_moves(arms: Arms[ReadArm], document: dict[str, Any]) -> None:
    modified = {**document, "convention": "modified"}
    told = converted(arms, modified, "standard")
    (finding,) = told["findings"]
    assert finding["name"] == "base-moved"
    joint_values = [0.3, -1.1]
    for tool in ("flange", "pen"):
        np.testing.assert_allclose(
            tool_in_world(told["arm"], tool, joint_values),
            tool_in_world(modified, tool, joint_values),
            atol=1e-15,
        )
    # A frame that stands in the base stays where it is in the world.
    for name in document["frames"]:
        np.testing.assert_allclose(
            read_arm(told["arm"]).arm.frame_in_world(name),
            read_arm(modified).arm.frame_in_world(name),
            atol=1e-15,
        )


@pytest.mark.parametrize(
    ("convention", "to", "decides"), [("standard", "modified", -1), ("modified", "standard", 0)]
)
def test_what_did_not_move_is_not_told(
    arms: Arms[ReadArm], document: dict[str, Any], convention: str, to: str, decides: int
) -> None:
    """Only a and alpha of one row move flange or base: the last or the first."""
    given = {**document, "convention": convention}
    for a, alpha, told in ((0, 0, 0), (0, 90, 1), (1, 0, 1)):
        rows = [dict(row) for row in document["rows"]]
        rows[decides] |= {"a": a, "alpha": alpha}
        assert len(converted(arms, {**given, "rows": rows}, to)["findings"]) == told
    assert converted(arms, {**given, "rows": []}, to)["findings"] == []


@pytest.mark.parametrize("units", ["mm-deg", "m-rad", "in-deg"])
def test_in_the_units_of_the_arm(arms: Arms[ReadArm], document: dict[str, Any], units: str) -> None:
    told = converted(arms, {**document, "units": units}, "modified")
    assert told["units"] == told["arm"]["units"] == units
    assert told["arm"]["rows"][1]["a"] == 400


def test_what_was_repaired_is_told(arms: Arms[ReadArm], document: dict[str, Any]) -> None:
    off = [[1.001, 0, 0, 0], [0, 1, 0, 0], [0, 0, 1, 0], [0, 0, 0, 1]]
    told = converted(arms, {**document, "base": {"matrix": off}}, "standard")
    assert [finding["code"] for finding in told["findings"]] == [6]
