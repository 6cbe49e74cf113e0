"""What is asked with about reach, as models: an arm, and the targets its tool is to be brought to.

A target that cannot be used does not fail the others, so targets are checked one by one
(reach_targets.py). Left out: query strings (reach_query.py) and tables (reach_csv.py).
"""

from typing import Annotated, Any, ClassVar, Literal

from pydantic import Discriminator, Field, SkipValidation, Tag

from service.wire.models import AnyArm, AnyTool, Number, Pose, Strict, Triple, UnitsName

MOST_TARGETS = 10_000
"""In one request; surveys of more are long work."""

LONGEST_NAME = 200
"""Characters of a target's name, which is the planner's own and goes back as it came."""

Positive = Annotated[Number, Field(gt=0)]


class Cone(Strict):
    """The direction of tool z is free within a cone of this half-angle, and the turn about it."""

    cone: Annotated[Positive, Field(description="at most 180 deg")]


class Tolerance(Strict):
    """How far off an arm with fewer than six joints may be; 0.01 mm and 0.01 deg if not said."""

    position: Positive | None = None
    angle: Positive | None = None


def _freedom_kind(value: object) -> str:
    return "Cone" if isinstance(value, dict | Cone) else "str"


Freedom = Annotated[
    Annotated[Literal["none", "spin", "orientation"], Tag("str")] | Annotated[Cone, Tag("Cone")],
    Discriminator(_freedom_kind),
]


def _along_kind(value: object) -> str:
    return "list" if isinstance(value, list) else "str"


Along = Annotated[
    Annotated[Literal["tool-z"], Tag("str")] | Annotated[Triple, Tag("list")],
    Discriminator(_along_kind),
    Field(description="z of the tool as it stands at the target, or a direction in the frame"),
]


class Approach(Strict):
    """The tool starts `distance` back along a direction and comes straight to the target.

    `speed` is the tool point's, a length a second: with it joint speeds are told.
    """

    distance: Positive
    along: Along = "tool-z"
    speed: Positive | None = None


class Retract(Strict):
    """The tool goes straight away from the target until it is `distance` back along a direction.

    That of the approach if not said, `tool-z` where there is none.
    """

    distance: Positive
    along: Along | None = None
    speed: Positive | None = None


class ReachTarget(Strict):
    """A place for the tool: a pose, or a position whose orientation is free.

    `freedom` says what a pose leaves open: `none`, `spin` (the turn about tool z), `orientation`,
    or a cone. With an `approach` a posture counts that the tool can also come straight to.
    """

    name: Annotated[str, Field(max_length=LONGEST_NAME)] | None = None
    pose: Pose | None = None
    position: Triple | None = None
    freedom: Freedom | None = None
    tolerance: Tolerance | None = None
    approach: Approach | None = None


class ReachRequest(Strict):
    """Targets for one arm, in `frame`; solutions in the order asked for, the best alone or all."""

    arm: AnyArm
    targets: Annotated[
        SkipValidation[list[ReachTarget]],
        Field(json_schema_extra={"minItems": 1, "maxItems": MOST_TARGETS}),
    ]
    tool: AnyTool | None = None
    frame: str | None = None
    solutions: Literal["best", "all"] = "best"
    near: list[Any] | None = Field(
        None, json_schema_extra={"items": {"type": "number"}}, description="joint values"
    )
    order: Literal["margin", "nearness", "singularity"] | None = Field(
        None,
        description="`margin` (travel left, if nothing else is said), `nearness` to `near` "
        "(if that is given), or `singularity` (farthest from it first)",
    )
    units: UnitsName | None = None
    task: ClassVar[None] = None
