"""One posture of a stored arm: what a controller asks, and what it is told.

Left out: query strings (controller.py), flat answers (flat.py), and the answering (operations).
"""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import NamedTuple

from service.wire import models

TOOL_PARAMETERS = ("tx", "ty", "tz", "tr1", "tr2", "tr3")
"""Position and orientation of a tool that is given by the question itself."""


@dataclass(frozen=True, eq=False)
class SingleQuestion:
    """What a controller asks about one posture, in its own words; all but the joint values.

    Controllers ask the same again and again. The same words give the same object, so that what
    follows from it can be kept, unless the words are so many that they are no such question.
    Numbers of the answer are still to be multiplied by ``scale``.
    """

    arm: str
    form: str
    tool: str | None = None
    tool_pose: models.Pose | None = None
    frame: str | None = None
    units: str | None = None
    revision: int | None = None
    expect: str | None = None
    task: str | list[str] | None = None
    scale: int | None = None
    outline: bool = False
    nearest: bool = False
    is_kept: bool = True


class JointsAsked(NamedTuple):
    """Joint values, divided by the scale, and the parameters they came in, for errors to name."""

    values: list[float]
    names: list[str]


class SingleAnswer(NamedTuple):
    """The answer, with what a flat line shows beside it.

    Attributes
    ----------
    head : as at the head of every answer about postures.
    item : the one item, as in the answer to a body.
    margin : smallest share of travel left; infinite without travel limits.
    """

    head: Mapping[str, object]
    item: dict[str, object]
    margin: float
    tool_number: int
    frame_number: int
    codes: frozenset[int] = frozenset()
