"""The body that asks about frames, as a model; and what a frame may be called.

Left out: how the relations in it are read (frames.py).
"""

import re
from collections.abc import Collection
from typing import Annotated, Any

from pydantic import Field
from pydantic.json_schema import WithJsonSchema

from kinematics.orientation_forms import FORMS
from service.wire.models import AnyArm, Number, Pose, Strict, UnitsName

_NAME = r"[a-z0-9][a-z0-9-]{0,47}(?:\.[a-z0-9][a-z0-9-]{0,47})?"
FRAME_NAME = re.compile(_NAME, re.ASCII)
_FRAME_NAMES = re.compile(rf"(?:{_NAME}\n)*", re.ASCII)
_FRAME = Annotated[
    str,
    Field(description="a name, or <arm>.base, .flange, .link-3, .<tool or frame>, or world"),
]


class Between(Strict):
    """A pair of frames whose relation is asked for: the pose of the one in the other."""

    of: _FRAME
    in_: Annotated[_FRAME, Field(alias="in")]


class Relation(Between):
    """A known pose of one frame in another, and how well it is known."""

    pose: Pose
    position_sd: Annotated[
        Number | None,
        Field(description="standard deviation of each coordinate; 1 mm where it is left out"),
    ] = None
    angle_sd: Annotated[
        Number | None,
        Field(description="standard deviation about each axis; 1 mrad where it is left out"),
    ] = None


class ArmAt(Strict):
    """An arm and its joint values, which are needed where a way leads through it."""

    arm: AnyArm
    joints: Annotated[
        list[Any] | None,
        WithJsonSchema({"type": "array", "items": {"type": "number"}}),
    ] = None


class FramesRequest(Strict):
    """Known relations between frames, arms at joint values, a cell, and pairs asked for.

    ``units`` may be left out where the cell, or all arms, have the same.
    """

    relations: list[Relation] = Field(default_factory=list)
    find: list[Between] = Field(default_factory=list)
    arms: list[ArmAt] = Field(default_factory=list)
    cell: str | None = None
    estimate: bool = False
    form: Annotated[str, Field(json_schema_extra={"enum": list(FORMS)})] | None = None
    units: UnitsName | None = None


def are_frame_names(names: Collection[str]) -> bool:
    """Return whether all of some names could be a frame's.

    Examples
    --------
    >>> are_frame_names({"lamp", "welder.flange"}), are_frame_names({"lamp", "the table"})
    (True, False)
    """
    # All at once: a line for each name, and no line more.
    lines = "".join([f"{name}\n" for name in names])
    return _FRAME_NAMES.fullmatch(lines) is not None and lines.count("\n") == len(names)
