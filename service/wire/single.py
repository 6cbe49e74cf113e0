"""One posture of a stored arm: what a controller asks, and what it is told.

Left out: query strings (controller.py), flat answers (flat.py), and the answering (operations).
"""

from collections.abc import Sequence
from dataclasses import dataclass, field

from service.wire import models

TOOL_PARAMETERS = ("tx", "ty", "tz", "tr1", "tr2", "tr3")
"""Position and orientation of a tool that is given by the question itself."""


@dataclass(frozen=True)
class SingleQuestion:
    """What a controller asks: one posture, in its own words.

    ``joint_names`` are the parameters the joint values came in, for errors to point at. All
    values are divided by ``scale`` already; the answer's numbers are still to be multiplied.
    """

    arm: str
    joints: Sequence[float]
    joint_names: Sequence[str]
    form: str
    tool: str | None = None
    tool_pose: models.Pose | None = None
    frame: str | None = None
    units: str | None = None
    revision: int | None = None
    expect: str | None = None
    task: str | list[str] | None = None
    scale: int | None = None


@dataclass(frozen=True)
class SingleAnswer:
    """The answer, with what a flat line shows beside it.

    Attributes
    ----------
    head : as at the head of every answer about postures.
    item : the one item, as in the answer to a body.
    margin : smallest share of travel left; infinite without travel limits.
    """

    head: dict[str, object]
    item: dict[str, object]
    margin: float
    tool_number: int
    frame_number: int
    codes: frozenset[int] = field(default=frozenset())
