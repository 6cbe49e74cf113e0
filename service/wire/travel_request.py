"""What is asked with about travels, as models: from place to place, or to a target and back.

A travel that cannot be used does not fail the others, so they are checked one by one
(travel_reading.py). Left out: an approach by query string (reach_query.py).
"""

from typing import Annotated, Any, ClassVar, Literal

from pydantic import Field, SkipValidation

from service.wire.models import AnyArm, AnyTool, FormName, Pose, Strict, Triple, UnitsName
from service.wire.reach_request import (
    LONGEST_NAME,
    Approach,
    Freedom,
    Positive,
    Retract,
    Tolerance,
)

MOST_TRAVELS = 1000
"""In one request: each takes milliseconds."""

MOST_LEGS = 100
"""Of one travel."""

MOST_POINTS = 1000
"""Of one leg that are told: a millimetre apart on a metre."""

MOST_POINTS_TOLD = 20_000
"""Of all legs together: some 2 MB of joint values."""

JointRow = Annotated[list[Any], Field(json_schema_extra={"items": {"type": "number"}})]


class TravelPlace(Strict):
    """Where the arm is to be: at joint values, at a pose of the tool, or at a position of it.

    `freedom` says what a pose leaves open, as in a check.
    """

    joints: JointRow | None = None
    pose: Pose | None = None
    position: Triple | None = None
    freedom: Freedom | None = None


class Leg(Strict):
    """One move, from where the one before ended.

    `straight` leads the tool point along a line while the tool turns evenly about one fixed axis;
    `joints` moves all joints evenly. `speed` is the tool point's, a length a second; `turn_speed`
    an angle a second, for straight legs that turn more than they move.
    """

    end: TravelPlace
    move: Literal["straight", "joints"] = "straight"
    speed: Positive | None = None
    turn_speed: Positive | None = None


class Travel(Strict):
    """A way of the arm: from `start` along `legs`; or by `approach` to `target`, by `retract` away.

    `tolerance` is for arms with fewer than six joints, as in a check, and holds all along the way.
    """

    name: Annotated[str, Field(max_length=LONGEST_NAME)] | None = None
    start: TravelPlace | None = None
    legs: list[Leg] | None = Field(None, min_length=1, max_length=MOST_LEGS)
    target: TravelPlace | None = None
    approach: Approach | None = None
    retract: Retract | None = None
    tolerance: Tolerance | None = None


class TravelsRequest(Strict):
    """Travels of one arm, poses and directions in `frame`."""

    arm: AnyArm
    travels: Annotated[
        SkipValidation[list[Travel]],
        Field(json_schema_extra={"minItems": 1, "maxItems": MOST_TRAVELS}),
    ]
    tool: AnyTool | None = None
    frame: str | None = None
    form: FormName | None = None
    solutions: Annotated[
        Literal["best", "all"],
        Field(description="the best way of each travel, or one for every posture at its start"),
    ] = "best"
    near: JointRow | None = Field(
        None, description="joint values: of several postures the nearer to them are the better"
    )
    points: Annotated[
        int,
        Field(ge=0, le=MOST_POINTS, description="of each leg whose joint values are told, evenly"),
    ] = 0
    units: UnitsName | None = None
    task: ClassVar[None] = None
