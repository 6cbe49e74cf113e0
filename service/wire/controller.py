"""A controller's question by query string, and what it is told when it cannot be answered.

Left out: the answers' shapes (flat.py) and what they say (operations).
"""

from collections.abc import Mapping
from typing import Literal

from kinematics.orientation_forms import TRIPLES
from kinematics.tolerances import MOST_ROWS
from service.convert import UNITS
from service.problems import FormNotFlat, MissingField, NotAvailable, UnusableValue
from service.wire import models
from service.wire.poses import checked_form
from service.wire.query import number, numbers, whole_number
from service.wire.single import TOOL_PARAMETERS, SingleQuestion

Format = Literal["json", "flat"]
FORMATS: tuple[Format, ...] = ("json", "flat")
FLAT_FORM = "xyz-fixed"
_DEFAULT_FORMS = {"json": "quaternion-wxyz", "flat": FLAT_FORM}
_JOINT_PARAMETERS = tuple(f"q{joint}" for joint in range(1, MOST_ROWS + 1))
_LATER = {
    "scale": "leave it out: numbers are printed with their decimals",
}
PARAMETERS = frozenset(
    {
        "q",
        *_JOINT_PARAMETERS,
        *TOOL_PARAMETERS,
        "tool",
        "frame",
        "form",
        "units",
        "format",
        "revision",
        "expect",
        "tag",
        "task",
        "errors",
        *_LATER,
    }
)


def wanted_format(parameters: Mapping[str, str]) -> Format:
    """Return the format asked for.

    Raises
    ------
    NotAvailable : txt and csv.
    UnusableValue : anything else that is not known.
    """
    text = parameters.get("format", "json")
    if text in FORMATS:
        return text
    if text in ("txt", "csv"):
        raise NotAvailable(
            f"format={text} is not available in this version",
            where=("format",),
            location="query",
            value=text,
            way_out="use format=flat or format=json",
            status=422,
        )
    raise UnusableValue(
        f"there is no format {text!r}",
        where=("format",),
        location="query",
        value=text,
        way_out="one of: json, flat",
    )


def wanted_tag(parameters: Mapping[str, str]) -> int:
    """Return the caller's tag, 0 where none was sent."""
    return whole_number(parameters["tag"], "tag") if "tag" in parameters else 0


def errors_inline(parameters: Mapping[str, str]) -> bool:
    """Return whether refusals are to be sent with status 200.

    Raises
    ------
    UnusableValue : ``errors`` says something else than ``inline``.
    """
    text = parameters.get("errors")
    if text not in (None, "inline"):
        raise UnusableValue(
            f"errors={text} is not known",
            where=("errors",),
            location="query",
            value=text,
            way_out="errors=inline, or leave it out",
        )
    return text is not None


def single_question(
    arm: str, parameters: Mapping[str, str], answer_format: Format
) -> SingleQuestion:
    """Return the question that a query string asks about one posture of an arm.

    Raises
    ------
    ServiceError, KinematicsError : a parameter that cannot be used.
    """
    for name, way_out in _LATER.items():
        if name in parameters:
            raise NotAvailable(
                f"{name} is not available in this version",
                where=(name,),
                location="query",
                value=parameters[name],
                way_out=way_out,
                status=422,
            )
    form = checked_form(parameters.get("form", _DEFAULT_FORMS[answer_format]))
    if answer_format == "flat" and form not in TRIPLES:
        raise FormNotFlat(
            f"the form {form} does not fit a flat answer",
            where=("form",),
            location="query",
            value=form,
            way_out="use one of the 24 angle triples, e.g. xyz-fixed",
        )
    names, joints = _joints(parameters)
    revision = parameters.get("revision")
    return SingleQuestion(
        arm=arm,
        joints=joints,
        joint_names=names,
        form=form,
        tool=parameters.get("tool"),
        tool_pose=_inline_tool(parameters, form),
        frame=parameters.get("frame"),
        units=_units(parameters.get("units")),
        revision=None if revision is None else whole_number(revision, "revision"),
        expect=parameters.get("expect"),
        task=_task(parameters.get("task")),
    )


def _joints(parameters: Mapping[str, str]) -> tuple[list[str], list[float]]:
    """Return the joint values and the parameters that hold them."""
    single = [name for name in _JOINT_PARAMETERS if name in parameters]
    if "q" in parameters and single:
        raise UnusableValue(
            f"joint values stand in q and in {single[0]}",
            where=(single[0],),
            location="query",
            value=parameters[single[0]],
            way_out="use q=0,-90,... or q1=0&q2=-90..., not both",
        )
    if "q" in parameters:
        text = parameters["q"]
        joints = numbers(text, "q") if text else []
        return ["q"] * len(joints), joints
    for place, name in enumerate(single, start=1):
        if name != f"q{place}":
            raise MissingField(
                f"q{place} is missing before {name}",
                where=(f"q{place}",),
                location="query",
                way_out=f"give q1 to {single[-1]} without a gap",
            )
    return single, [number(parameters[name], name) for name in single]


def _inline_tool(parameters: Mapping[str, str], form: str) -> models.Pose | None:
    """Return the tool whose pose in the flange stands in the query itself."""
    given = [name for name in TOOL_PARAMETERS if name in parameters]
    if not given:
        return None
    if "tool" in parameters:
        raise UnusableValue(
            f"the tool stands in tool and in {given[0]}",
            where=("tool",),
            location="query",
            value=parameters["tool"],
            way_out="name a tool or give its pose, not both",
        )
    values = [number(parameters.get(name, "0"), name) for name in TOOL_PARAMETERS]
    return models.Pose(
        position=values[:3],
        orientation=models.Orientation(
            form=form if form in TRIPLES else FLAT_FORM, values=values[3:]
        ),
    )


def _units(text: str | None) -> str | None:
    if text is not None and text not in UNITS:
        raise UnusableValue(
            f"there are no units {text!r}",
            where=("units",),
            location="query",
            value=text,
            way_out=f"one of: {', '.join(UNITS)}",
        )
    return text


def _task(text: str | None) -> str | list[str] | None:
    return text.split(",") if text is not None and text.startswith(("v", "w")) else text
