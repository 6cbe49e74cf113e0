"""A controller's question about one target, by query string, and the query beside a table of them.

Left out: tools, formats and all else it shares with the question for a pose (controller.py), flat
answers (reach_flat.py), and the answering (operations).
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from kinematics.reach.targets import CONE, FREEDOMS, NONE, ORIENTATION
from kinematics.tolerances import MOST_ROWS
from service.errors import MissingField, UnusableValue
from service.web.document import parameter
from service.wire import controller
from service.wire.approaches import TOOL_Z
from service.wire.controller import FLAT_FORM, scaled_number, single_question
from service.wire.query import plain_numbers
from service.wire.question_parameters import (
    FORMAT_OF_TABLES,
    QUESTION_PARAMETERS,
    one_of,
)
from service.wire.reach_request import Approach
from service.wire.single import TOOL_PARAMETERS, JointsAsked, SingleQuestion

POSITION = ("x", "y", "z")
ANGLES = ("r1", "r2", "r3")
_NUMBERS = (*POSITION, *ANGLES)
_OF_POSES = frozenset({"q", *(f"q{joint}" for joint in range(1, MOST_ROWS + 1))})
_OF_TARGETS = frozenset({*_NUMBERS, "freedom", "cone", "near", "approach", "along"})
PARAMETERS = (controller.PARAMETERS - _OF_POSES) | _OF_TARGETS
TABLE_PARAMETERS = frozenset(
    {
        *("arm", "revision", "expect", "tool", *TOOL_PARAMETERS, "frame", "units", "form"),
        *("solutions", "near", "order", "format", "tag"),
    }
)
BODY_PARAMETERS = frozenset({"format", "tag"})

_WAYS_OUT = (
    "say where the tool is to be: x=...&y=...&z=...",
    "give r1, r2 and r3, or none of them",
)

_NUMBER = {"type": "number"}
_TEXT = {"type": "string"}
_NEAR = parameter(
    "near", "Joint values, with commas: solutions are ranked by nearness to them.", _TEXT
)
_SHARED = {known["name"]: known for known in QUESTION_PARAMETERS}
REACH_PARAMETERS: tuple[dict[str, Any], ...] = (
    *(
        parameter(name, "Position of the tool point, in the frame.", _NUMBER, required=True)
        for name in POSITION
    ),
    *(
        parameter(name, "Orientation: the three angles of the form; all or none of them.", _NUMBER)
        for name in ANGLES
    ),
    parameter(
        "freedom",
        "What is left open: the turn about tool z, the orientation, or a cone. Without r1 to r3 it "
        "is the orientation.",
        one_of(*FREEDOMS),
    ),
    parameter(
        "cone", "Half-angle of a cone that tool z may leave its direction by, spin free.", _NUMBER
    ),
    parameter(
        "approach",
        "How far back along `along` the tool is to come straight to the target from; a target "
        "that it cannot come to so is a no.",
        _NUMBER,
    ),
    parameter(
        "along",
        "Direction of the approach: `tool-z`, or three numbers with commas, in the frame.",
        _TEXT,
    ),
    _NEAR,
    *(known for name, known in _SHARED.items() if name in PARAMETERS),
)
TABLE_QUERY_PARAMETERS: tuple[dict[str, Any], ...] = (
    parameter("arm", "Stored arm the part locations are for; required beside a table.", _TEXT),
    *(known for name, known in _SHARED.items() if name in TABLE_PARAMETERS - {"format"}),
    parameter("solutions", "The best of each target, or all.", one_of("best", "all")),
    _NEAR,
    parameter(
        "order", "What is the best: see `order` in a body.",
        one_of("margin", "nearness", "singularity"),
    ),
    FORMAT_OF_TABLES
    | {"schema": one_of("json", "csv")},
)  # fmt: skip
"""Beside a table of part locations; a JSON body says all but ``format`` and ``tag`` itself."""


TRAVEL_PARAMETERS = tuple(
    known for known in TABLE_QUERY_PARAMETERS if known["name"] in BODY_PARAMETERS
)
"""Beside a body about travels, which says all else itself."""


@dataclass(frozen=True)
class ReachAsked:
    """What a controller asks: whether, and with which joint values, the tool gets to a target.

    Attributes
    ----------
    single : all but the target.
    position, angles : three numbers each, divided by the scale; no angles for a mere position.
    freedom : one of the numbers of ``FREEDOMS``; cone : half-angle as it was given.
    near : joint values, or None. approach : what is to be come along, or None.
    """

    single: SingleQuestion
    position: list[float]
    angles: list[float] | None
    freedom: int
    cone: float
    near: JointsAsked | None
    approach: Approach | None = None


def reach_asked(arm: str, parameters: Mapping[str, str]) -> ReachAsked:
    """Return the question that a query string asks about one target.

    Raises
    ------
    ServiceError, KinematicsError : a parameter that is missing or cannot be used.
    """
    rest = {name: text for name, text in parameters.items() if name not in _OF_TARGETS}
    rest.setdefault("form", FLAT_FORM)
    # Its angles must be those of a triple, as in a flat answer.
    single = single_question(arm, rest, "flat")
    scale = single.scale
    given = ANGLES if any(name in parameters for name in ANGLES) else ()
    for name in (*POSITION, *given):
        if name not in parameters:
            raise _missing(name, _WAYS_OUT[name in ANGLES])
    numbers = _numbers_of(parameters, (*POSITION, *given), scale)
    position, angles = numbers[:3], numbers[3:] or None
    near = None
    if "near" in parameters:
        texts = parameters["near"].split(",")
        values = [scaled_number(text, "near", scale) for text in texts]
        near = JointsAsked(values, ["near"] * len(values))
    freedom, cone = _freedom(parameters, ORIENTATION if angles is None else NONE, scale)
    approach = _approach(parameters, scale)
    return ReachAsked(single, position, angles, freedom, cone, near, approach)


def _numbers_of(
    parameters: Mapping[str, str], names: Sequence[str], scale: int | None
) -> list[float]:
    texts = [parameters[name] for name in names]
    plain = plain_numbers(texts) if scale is None else None
    if plain is not None:
        return plain
    return [scaled_number(text, name, scale) for text, name in zip(texts, names, strict=True)]


def _freedom(parameters: Mapping[str, str], usual: int, scale: int | None) -> tuple[int, float]:
    said, cone = parameters.get("freedom"), parameters.get("cone")
    if said is None and cone is None:
        return usual, 0.0
    if said is not None and said not in FREEDOMS:
        raise _unusable(
            "freedom", said, f"there is no freedom {said[:60]!r}", f"one of: {', '.join(FREEDOMS)}"
        )
    freedom = CONE if said is None else FREEDOMS.index(said)
    if usual == ORIENTATION and freedom != ORIENTATION:
        raise _unusable(
            "freedom" if cone is None else "cone",
            said if cone is None else cone,
            "without r1, r2 and r3 the orientation is free",
            "give r1, r2 and r3, or say freedom=orientation",
        )
    if freedom == CONE:
        if cone is None:
            raise _missing("cone", "give its half-angle: cone=30")
        return CONE, scaled_number(cone, "cone", scale)
    if cone is not None:
        raise _unusable(
            "cone", cone, f"freedom={said} leaves no cone", "leave cone out, or say freedom=cone"
        )
    return freedom, 0.0


def _approach(parameters: Mapping[str, str], scale: int | None) -> Approach | None:
    if "approach" not in parameters:
        if "along" in parameters:
            raise _missing("approach", "say how far back along it: approach=100")
        return None
    distance = scaled_number(parameters["approach"], "approach", scale)
    if not distance > 0:
        raise _unusable(
            "approach",
            parameters["approach"],
            "an approach needs a length",
            "give a length above 0, or leave approach out",
        )
    said = parameters.get("along", TOOL_Z)
    if said == TOOL_Z:
        return Approach(distance=distance)
    texts = said.split(",")
    along = [scaled_number(text, "along", scale) for text in texts] if len(texts) == 3 else []
    if not any(along):
        raise _unusable(
            "along", said, "this is no direction", "give three numbers: along=0,0,-1, or tool-z"
        )
    return Approach(distance=distance, along=along)


def _missing(name: str, way_out: str) -> MissingField:
    return MissingField(f'"{name}" is missing', where=(name,), location="query", way_out=way_out)


def _unusable(name: str, value: object, say: str, way_out: str) -> UnusableValue:
    return UnusableValue(say, where=(name,), location="query", value=value, way_out=way_out)
