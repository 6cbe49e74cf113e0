"""The query parameters of a controller's question, as the OpenAPI document tells them."""

from collections.abc import Mapping
from typing import Any

from kinematics.orientation_forms import FORMS
from kinematics.tolerances import MOST_ROWS
from service.convert import UNITS
from service.web.document import parameter
from service.wire import formats
from service.wire.controller import FORMATS, MOST_SCALE

_NUMBER = {"type": "number"}
_TEXT = {"type": "string"}


def one_of(*names: str) -> dict[str, Any]:
    """Return the schema of a parameter that says one of some names."""
    return {"type": "string", "enum": list(names)}


FORMAT = parameter("format", "Shape of the answer.", one_of(*FORMATS))
TAG = parameter("tag", "A whole number that comes back in the answer.", {"type": "integer"})
ERRORS = parameter("errors", "inline: refusals come with status 200.", one_of("inline"))
SCALE_SCHEMA: Mapping[str, object] = {"type": "integer", "minimum": 1, "maximum": MOST_SCALE}
FORMAT_OF_TABLES = parameter(
    "format", "Format of the answer; that of the body if left out.", one_of(*formats.FORMATS)
)
FORMAT_OF_ANSWERS = parameter(
    "format",
    "Format of the answer; that of Accept, or JSON, if left out.",
    one_of(*formats.FORMATS),
)

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
    parameter("form", "Orientation form of the answer.", one_of(*FORMS)),
    parameter("units", "Units of question and answer.", one_of(*UNITS)),
    FORMAT,
    parameter("revision", "Revision of the arm; the newest if left out.", {"type": "integer"}),
    parameter("expect", "Digest the arm must have; refused with 107 if it differs.", _TEXT),
    TAG,
    parameter(
        "task",
        "What singularity is judged by: pose, position, orientation, or rows such as vx,vy.",
        _TEXT,
    ),
    parameter(
        "scale",
        "Joint and tool values are integers and divided by it; numbers of the answer are "
        "multiplied by it and printed as integers.",
        {**SCALE_SCHEMA},
    ),
    ERRORS,
)

OUTLINE = parameter(
    "outline",
    "1: what a drawing needs comes as `outline`: axes, the line from base to tool, both ends as "
    "matrices, and the travel used; for format=json alone.",
    one_of("1", "0"),
)

NEAREST = parameter(
    "nearest",
    "1: the named frame nearest to the tool point comes as `nearest`, with the distance, the tool "
    "point in it and a sentence; null where the arm names none; for format=json alone.",
    one_of("1", "0"),
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

TABLE_PARAMETERS: tuple[dict[str, Any], ...] = (
    *_OF_TABLES,
    *(
        known
        for known in QUESTION_PARAMETERS
        if known["name"] in formats.TABLE_PARAMETERS - {"format"}
    ),
    FORMAT_OF_TABLES,
)
"""Beside a table of joint vectors; a JSON body says all but ``format`` and ``tag`` itself."""
