"""Joint values that come in: as JSON, one or several together, or as a controller's parameters.

Left out: what becomes of them (service/live), and sockets.
"""

from collections.abc import Mapping
from typing import Annotated, Any

from pydantic import Field, StringConstraints

from kinematics.arm import Arm
from kinematics.chain import joints_in_words
from kinematics.errors import OutOfRange, WrongJointCount
from kinematics.tolerances import LARGEST_MAGNITUDE, MOST_ROWS
from service.convert import UNITS, Units, joint_row_in
from service.errors import MissingField, TooLarge, UnusableValue
from service.live.clocks import Clock
from service.live.samples import Sample
from service.web.document import parameter
from service.wire.controller import joints_asked, wanted_scale, wanted_tag, wanted_units
from service.wire.live_query import moment_in, unix_ms
from service.wire.models import Strict, UnitsName
from service.wire.query import NOT_FINITE, number, unusable, whole_number
from service.wire.question_parameters import QUESTION_PARAMETERS, one_of
from service.wire.times import time_in

MOST_TOGETHER = 1000
"""Samples in one message: a second of a fast controller's."""

_LARGEST_WHOLE = 10**15
"""Counts and tags are kept as doubles beside joint values: this is whole in one."""

_FIRST_MS, _LAST_MS = -62_135_596_800_000.0, 253_402_300_799_000.0
"""The years 1 to 9999: times of clocks that were never set are in them, RFC 3339 has no others."""

_LONGEST_PERIOD_MS = 3_600_000.0
"""An hour: who sends less often is asked for no pose that is live."""

Text = Annotated[str, StringConstraints(min_length=1, max_length=48, pattern=r"^[!-~]+$")]
Whole = Annotated[int, Field(ge=-_LARGEST_WHOLE, le=_LARGEST_WHOLE)]
Count = Annotated[int, Field(ge=0, le=_LARGEST_WHOLE)]
Values = Annotated[
    list[float | None],
    Field(max_length=MOST_ROWS, description="One for each driven row; null: not measured."),
]


class JointSample(Strict):
    """Joint values at one moment."""

    joints: Values
    sampled_at: str | None = Field(None, description="When, by the source's clock, RFC 3339.")
    sampled_ms: Annotated[float, Field(allow_inf_nan=False)] | None = Field(
        None, description="The same in Unix milliseconds."
    )
    sequence: Count | None = Field(None, description="Rises from sample to sample.")
    tag: Whole = Field(0, description="Comes back in answers.")


class JointsRequest(JointSample):
    """Joint values, one sample or several that belong together."""

    joints: Values | None = None  # type: ignore[assignment]
    samples: list[JointSample] | None = Field(None, description="Several, the oldest first.")
    units: UnitsName | None = None
    source: Text | None = Field(None, description="Who sends; the sender's address if left out.")
    simulated: bool = False
    period_ms: Annotated[float, Field(gt=0.0, le=_LONGEST_PERIOD_MS)] | None = Field(
        None,
        description="How often values will come: after three times as long without one the input "
        "is stale. Found from what comes if left out, and 50 ms at least then.",
    )


_PARAMETERS = ("sampled_at", "sampled_ms", "sequence", "source", "simulated", "period_ms")
JOINTS_PARAMETERS = frozenset(
    {
        "q",
        *(f"q{joint}" for joint in range(1, MOST_ROWS + 1)),
        *_PARAMETERS,
        *("units", "scale", "expect", "format", "tag", "errors"),
    }
)
BESIDE_JSON = frozenset({"format", "errors", "expect", "tag"})


def joints_request(body: object) -> JointsRequest:
    """Return what a JSON body says.

    Raises
    ------
    TooLarge : more samples than one message may have; before any of them is looked at.
    ValidationError : it is no such request.
    """
    samples = body.get("samples") if isinstance(body, dict) else None
    if isinstance(samples, list) and len(samples) > MOST_TOGETHER:
        raise TooLarge(
            f"{len(samples)} samples in one message",
            where=("samples",),
            value=len(samples),
            way_out=f"send at most {MOST_TOGETHER}",
            status=422,
        )
    return JointsRequest.model_validate(body)


def samples_of(
    asked: JointsRequest, arm: Arm, arms_units: Units, sender: str, clock: Clock
) -> list[Sample]:
    """Return the samples of a request, in SI and in their order, as received now.

    Raises
    ------
    ServiceError, KinematicsError : a sample that cannot be one of this arm.
    """
    units = arms_units if asked.units is None else UNITS[asked.units]
    given: list[tuple[tuple[str | int, ...], JointSample]] = []
    if asked.samples is None:
        if asked.joints is None:
            raise MissingField(
                '"joints" is missing', where=("joints",), way_out="give one value for each joint"
            )
        given = [((), asked)]
    else:
        if asked.joints is not None:
            raise UnusableValue(
                "joint values stand in joints and in samples",
                where=("samples",),
                way_out="leave one of them out",
            )
        given = [(("samples", index), one) for index, one in enumerate(asked.samples)]
    received_s, received_ms = clock.steady_s(), clock.wall_ms()
    return [
        Sample(
            joints=_joints(one.joints, arm, units, where),
            received_s=received_s,
            received_ms=received_ms,
            sampled_ms=_sampled_ms(one, where),
            tag=one.tag,
            sequence=one.sequence,
            source=asked.source or sender,
            simulated=asked.simulated,
            period_s=None if asked.period_ms is None else asked.period_ms / 1000.0,
        )
        for where, one in given
    ]


def _joints(
    values: list[float | None], arm: Arm, units: Units, where: tuple[str | int, ...]
) -> tuple[float, ...]:
    if len(values) != arm.joint_count:
        told = joints_in_words(arm, length=units.length, angle=units.angle)
        raise WrongJointCount(
            f"{len(values)} joint values for an arm of {arm.joint_count} joints",
            where=(*where, "joints"),
            value=len(values),
            way_out=f"give {told}",
        )
    # Not measured is not a number; it makes the quality uncertain and is no fault of the request.
    numbers = [float("nan") if value is None else value for value in values]
    found = joint_row_in(arm, units, numbers)
    for place, value in enumerate(found):
        if LARGEST_MAGNITUDE < abs(value) < float("inf"):
            raise OutOfRange(
                "a joint value is beyond 1e9 in SI units",
                where=(*where, "joints", place),
                value=values[place],
                way_out="check the units",
            )
    return tuple(found)


def _sampled_ms(one: JointSample, where: tuple[str | int, ...]) -> float | None:
    if one.sampled_at is not None:
        if one.sampled_ms is not None:
            raise UnusableValue(
                "the time stands in sampled_at and in sampled_ms",
                where=(*where, "sampled_ms"),
                value=one.sampled_ms,
                way_out="leave one of them out",
            )
        return unix_ms(time_in(one.sampled_at, (*where, "sampled_at")))
    if one.sampled_ms is None or _FIRST_MS <= one.sampled_ms <= _LAST_MS:
        return one.sampled_ms
    raise UnusableValue(
        "that is no time in Unix milliseconds",
        where=(*where, "sampled_ms"),
        value=one.sampled_ms,
        way_out="give milliseconds since 1970, or leave it out",
    )


def request_of_parameters(said: Mapping[str, str]) -> JointsRequest:
    """Return what a controller's parameters say, in the query or as a form.

    A value that is no finite number is taken in as such: it tells of a failed measurement.

    Raises
    ------
    ServiceError : a parameter that cannot be read.
    """
    mended, failed = _without_failed(said)
    scale = wanted_scale(said)
    values: list[float | None] = [*joints_asked(mended, scale).values]
    for place in failed:
        values[place] = None
    given: dict[str, Any] = {"joints": values, "tag": wanted_tag(said)}
    if "sampled_at" in said:
        given["sampled_ms"] = moment_in(said["sampled_at"], "sampled_at")
    if "sampled_ms" in said:
        if "sampled_at" in said:
            raise unusable(
                "sampled_ms", said["sampled_ms"], "say the time once: sampled_at or sampled_ms"
            )
        given["sampled_ms"] = number(said["sampled_ms"], "sampled_ms")
    if "sequence" in said:
        given["sequence"] = whole_number(said["sequence"], "sequence")
    if "period_ms" in said:
        given["period_ms"] = number(said["period_ms"], "period_ms")
    if "simulated" in said:
        if said["simulated"] not in ("0", "1"):
            raise unusable("simulated", said["simulated"], "simulated=1 or simulated=0")
        given["simulated"] = said["simulated"] == "1"
    if "source" in said:
        given["source"] = said["source"]
    units = wanted_units(said)
    return JointsRequest.model_validate(given | ({} if units is None else {"units": units}))


def _without_failed(said: Mapping[str, str]) -> tuple[dict[str, str], list[int]]:
    """Return the parameters with 0 for each joint value that is not finite, and their places."""
    found, failed = dict(said), []
    if "q" in said:
        parts = said["q"].split(",")
        failed = [place for place, part in enumerate(parts) if NOT_FINITE.fullmatch(part)]
        for place in failed:
            parts[place] = "0"
        found["q"] = ",".join(parts)
    for place in range(MOST_ROWS):
        name = f"q{place + 1}"
        if name in said and NOT_FINITE.fullmatch(said[name]):
            found[name] = "0"
            failed.append(place)
    return found, failed


JOINTS_SHOWN: tuple[dict[str, Any], ...] = (
    *(
        known
        for known in QUESTION_PARAMETERS
        if known["name"] in JOINTS_PARAMETERS and known["name"] != "revision"
    ),
    parameter("sampled_at", "When it was measured, by the source's clock: RFC 3339."),
    parameter("sampled_ms", "The same in Unix milliseconds.", {"type": "number"}),
    parameter("sequence", "Rises from sample to sample.", {"type": "integer", "minimum": 0}),
    parameter("source", "Who sends; the sender's address if left out."),
    parameter("simulated", "1: no arm stands there.", one_of("0", "1")),
    parameter(
        "period_ms",
        "How often values will come; found from what comes if left out.",
        {"type": "number", "exclusiveMinimum": 0, "maximum": _LONGEST_PERIOD_MS},
    ),
)
