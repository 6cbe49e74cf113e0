"""What is asked and told about how far an arm reaches, as models.

Left out: how the envelope is found (the core) and drawn (drawings).
"""

from typing import Literal

from service.wire.answer_models import ArmIdentity, Open
from service.wire.models import AnyArm, AnyTool, Number, Strict, UnitsName

PointName = Literal["tool", "wrist"]
Within = Literal["travel", "working-travel"]


class EnvelopeRequest(Strict):
    """Which point of the arm, and how fine where it has to be sampled.

    `point` is the tool point, or the wrist: where the axes of the last joints meet, as data sheets
    draw it. `resolution` is a length, the distance of the places asked for one by one; where the
    curves are exact it is not needed. Travel and working travel are told beside each other unless
    `within` names one.
    """

    arm: AnyArm
    tool: AnyTool | None = None
    point: PointName = "tool"
    within: Within | None = None
    resolution: Number | None = None
    units: UnitsName | None = None


class Measured(Open):
    """An area or a volume, how far off it may be at most, and its unit, such as `mm^2`."""

    value: float
    error_bound: float
    unit: str


class BoundaryCurve(Open):
    """A closed curve; the last point is joined to the first.

    `outer` curves run counter-clockwise with the reach inside, inner ones clockwise with it
    outside.
    """

    outer: bool
    points: list[list[float]]


class EnvelopeView(Open):
    """What is reached, seen in a plane.

    A `section` has radius and height about axis 1, a `plan` the x and y of the base, or what
    `directions` (in the base) says; an arm whose first joint slides has a `side` view instead of
    the section. `resolution` is null where the curves are exact; else what is narrower may be
    missed. `chord` is how far a curve may be from the straight line between two of its points; of
    one that is sampled only where it is smooth: a corner may be cut off by the resolution.
    """

    kind: Literal["section", "side", "plan"]
    coordinates: list[str]
    directions: list[list[float]]
    exact: bool
    resolution: float | None
    chord: float
    area: Measured
    curves: list[BoundaryCurve]


class FirstTurn(Open):
    """Travel of joint 1, the bearings it can face, and between which in the plan it cannot.

    What reaches backwards over axis 1 may still get there.
    """

    lower: float
    upper: float
    bearings: float
    dead_sector: list[float] | None


class Farthest(Open):
    """The least or the greatest of one measure, and a posture that brings the point there."""

    measure: str
    greatest: bool
    value: float
    joints: list[float]
    position: list[float]


class Reach(Open):
    """How far the point gets within travel, or within working travel.

    Where `same_at_every_bearing` is true, the section is reached whole at every bearing that the
    arm can face; otherwise it shows what is reached at any.
    """

    exact: bool
    section: EnvelopeView
    plan: EnvelopeView
    volume: Measured
    same_at_every_bearing: bool
    turn: FirstTurn | None
    extremes: list[Farthest]
    notes: list[str]


class AxisLine(Open):
    """Axis 1 in the base: a point on it and its direction."""

    point: list[float]
    direction: list[float]


class EnvelopeAnswer(Open):
    """How far an arm reaches, in its base.

    `working_travel` is null for an arm without working travel; of the two, what `within` leaves
    out is missing.
    """

    arm: ArmIdentity
    units: UnitsName
    frame: Literal["base"]
    tool: str | dict[str, object]
    point: PointName
    point_in_flange: list[float]
    axis: AxisLine | None
    travel: Reach | None = None
    working_travel: Reach | None = None
    caution: str
