"""The query parameters of a controller's question, as the OpenAPI document tells them."""

from typing import Any

from kinematics.orientation_forms import FORMS
from kinematics.tolerances import MOST_ROWS
from service.convert import UNITS
from service.web.document import parameter
from service.wire import formats
from service.wire.controller import FORMATS, MOST_SCALE

_NUMBER = {"type": "number"}
_TEXT = {"type": "string"}


def _one_of(*names: str) -> dict[str, Any]:
    return {"type": "string", "enum": list(names)}


QUESTION_PARAMETERS: tuple[dict[str, Any], ...] = (
    parameter("q", "Joint values in row order, with commas.", _TEXT, example="0,-90,90,0,45,0"),
    *(
        parameter(f"q{joint}", f"Joint value {joint}, in place of q.", _NUMBER)
        for joint in range(1, MOST_ROWS + 1)
    ),
    parameter("tool", "Name of a tool, or the number the controller knows it by.", _TEXT),
    *(
        parameter(name, "Tool by its pose in the flange: tx ty tz, tr1 tr2 tr3.", _NUMBER)
        for name in ("tx", "ty", "tz", "tr1", "tr2", "tr3")
    ),
    parameter("frame", "base, world, or a frame by name or number.", _TEXT),
    parameter("form", "Orientation form of the answer.", _one_of(*FORMS)),
    parameter("units", "Units of question and answer.", _one_of(*UNITS)),
    parameter("format", "Shape of the answer.", _one_of(*FORMATS)),
    parameter("revision", "Revision of the arm; the newest if left out.", {"type": "integer"}),
    parameter("expect", "Digest the arm must have; refused with 107 if it differs.", _TEXT),
    parameter("tag", "A whole number that comes back in the answer.", {"type": "integer"}),
    parameter(
        "task",
        "What singularity is judged by: pose, position, orientation, or rows such as vx,vy.",
        _TEXT,
    ),
    parameter(
        "scale",
        "Joint and tool values are integers and divided by it; numbers of the answer are "
        "multiplied by it and printed as integers.",
        {"type": "integer", "minimum": 1, "maximum": MOST_SCALE},
    ),
    parameter("errors", "inline: refusals come with status 200.", _one_of("inline")),
)

JACOBIAN_QUESTION_PARAMETERS: tuple[dict[str, Any], ...] = (
    *QUESTION_PARAMETERS,
    parameter(
        "row",
        "Row of the matrix that a line of text holds, for vx vy vz wx wy wz; for format=txt alone.",
        {"type": "integer", "minimum": 1, "maximum": 6},
    ),
)

_OF_TABLES = (
    parameter("arm", "Stored arm the joint vectors are for; required beside a table.", _TEXT),
    parameter("singularity", "Whether singularity is judged.", {"type": "boolean"}),
)
_OF_BODIES = (
    parameter(
        "format", "Format of the answer; that of the body if left out.", _one_of(*formats.FORMATS)
    ),
)

TABLE_PARAMETERS: tuple[dict[str, Any], ...] = (
    *_OF_TABLES,
    *(
        known
        for known in QUESTION_PARAMETERS
        if known["name"] in formats.TABLE_PARAMETERS - {"format"}
    ),
    *_OF_BODIES,
)
"""Beside a table of joint vectors; a JSON body says all but ``format`` and ``tag`` itself."""
