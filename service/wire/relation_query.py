"""A controller's question about two frames, by query string.

Left out: joint values, formats and all else it shares with the question for a pose
(controller.py), and the answering (operations).
"""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from kinematics.arm import FLANGE
from service.errors import MissingField
from service.web.document import parameter
from service.wire import controller
from service.wire.answers import json_bytes
from service.wire.controller import Format, joints_asked, single_question
from service.wire.formats import JSON
from service.wire.one_answer import Content, Stamp
from service.wire.question_parameters import QUESTION_PARAMETERS
from service.wire.single import TOOL_PARAMETERS, JointsAsked, SingleQuestion
from service.wire.whole_numbers import scaled

_OF_POSES = frozenset({"tool", "frame", "task", *TOOL_PARAMETERS})
_SIDES = ("of", "in")
PARAMETERS = (controller.PARAMETERS - _OF_POSES) | set(_SIDES)
RELATION_PARAMETERS: tuple[dict[str, Any], ...] = (
    *(
        parameter(
            side,
            f"The frame {meaning}: a name, the number of a tool or frame, or <arm>.base of "
            "another arm in the cell.",
            {"type": "string"},
            required=True,
        )
        for side, meaning in zip(_SIDES, ("whose pose is asked", "it is told in"), strict=True)
    ),
    *(known for known in QUESTION_PARAMETERS if known["name"] not in _OF_POSES),
)


@dataclass(frozen=True)
class RelationQuestion:
    """What a controller asks: one frame in another, by names or numbers.

    ``single`` holds all else but the joint values; ``joints`` is None where the query has none.
    """

    single: SingleQuestion
    of: str
    within: str
    joints: JointsAsked | None


def relation_question(
    arm: str, parameters: Mapping[str, str], answer_format: Format
) -> RelationQuestion:
    """Return the question that a query string asks about two frames.

    Raises
    ------
    ServiceError, KinematicsError : a parameter that is missing or cannot be used.
    """
    # About the arm itself, which may have several tools and none that is said by default.
    single = single_question(arm, {**parameters, "tool": FLANGE}, answer_format)
    for side in _SIDES:
        if not parameters.get(side):
            raise MissingField(
                f'"{side}" is missing',
                where=(side,),
                location="query",
                way_out="say both frames: of=gripper&in=fixture-a",
            )
    joints = joints_asked(parameters, single.scale)
    said = joints if "q" in parameters or joints.values else None
    return RelationQuestion(single, parameters["of"], parameters["in"], said)


def nested_relation(told: Mapping[str, object], stamp: Stamp, scale: int | None) -> Content:
    """Return the answer as a body's, with the one relation under ``answers``."""
    whole = dict(told) if scale is None else scaled(dict(told), scale)
    return Content(json_bytes({"ok": True, "code": whole.pop("code"), **stamp, **whole}), JSON)
