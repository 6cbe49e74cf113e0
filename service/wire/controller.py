"""A controller's question by query string, and what it is told when it cannot be answered.

Left out: the answers' shapes (flat.py) and what they say (operations).
"""

from collections.abc import Mapping
from dataclasses import replace
from functools import lru_cache
from itertools import chain
from typing import Literal

from kinematics.orientation_forms import TRIPLES
from kinematics.tolerances import MOST_ROWS
from service.convert import UNITS
from service.errors import FormNotFlat, MissingField, UnusableValue
from service.wire import models
from service.wire.poses import checked_form
from service.wire.query import number, numbers, switch, whole_number
from service.wire.single import TOOL_PARAMETERS, JointsAsked, SingleQuestion

Format = Literal["json", "flat", "txt", "csv"]
FORMATS: tuple[Format, ...] = ("json", "flat", "txt", "csv")
FLAT_FORM = "xyz-fixed"
_NESTED_FORM = "quaternion-wxyz"
_JOINT_PARAMETERS = tuple(f"q{joint}" for joint in range(1, MOST_ROWS + 1))
_ONE_JOINT = frozenset(_JOINT_PARAMETERS)
MOST_SCALE = 1_000_000
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
        "scale",
    }
)
POSE_PARAMETERS = PARAMETERS | {"outline", "nearest"}
JACOBIAN_PARAMETERS = PARAMETERS | {"row"}
_VARYING = frozenset({"q", *_JOINT_PARAMETERS, "of", "in", "format", "tag", "errors", "row"})
"""What differs from one question to the next, or is read beside the question."""

QUESTIONS_KEPT = 1024
"""Questions in different words that are kept once read, some 500 bytes each."""

_LONGEST_KEPT = 512
"""Characters of a question that is kept; six numbers of a tool and all names take some 300."""


def wanted_format(parameters: Mapping[str, str]) -> Format:
    """Return the format asked for.

    Raises
    ------
    UnusableValue : it is not known.
    """
    text = parameters.get("format", "json")
    if text in FORMATS:
        return text
    raise UnusableValue(
        f"there is no format {text!r}",
        where=("format",),
        location="query",
        value=text,
        way_out=f"one of: {', '.join(FORMATS)}",
    )


def wanted_row(parameters: Mapping[str, str], answer_format: Format) -> int | None:
    """Return which row of a Jacobian a line of text is to hold, None in other formats.

    Raises
    ------
    MissingField : a line of text, and no row.
    UnusableValue : no row from 1 to 6, or a format that holds all of them.
    """
    text = parameters.get("row")
    if text is None:
        if answer_format == "txt":
            raise MissingField(
                "a line of text holds one row of a Jacobian",
                where=("row",),
                location="query",
                way_out="add row=1 to row=6, for vx vy vz wx wy wz",
            )
        return None
    row = whole_number(text, "row")
    if answer_format != "txt" or not 1 <= row <= 6:
        raise UnusableValue(
            f"there is no row {row}" if answer_format == "txt" else "row is for format=txt",
            where=("row",),
            location="query",
            value=text,
            way_out="row=1 to row=6, with format=txt",
        )
    return row


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


def wanted_scale(parameters: Mapping[str, str]) -> int | None:
    """Return what values are divided by and numbers of the answer multiplied by, if anything.

    Raises
    ------
    ServiceError : no whole number from 1 to ``MOST_SCALE``.
    """
    text = parameters.get("scale")
    if text is None:
        return None
    scale = whole_number(text, "scale")
    if not 1 <= scale <= MOST_SCALE:
        raise UnusableValue(
            f"a scale of {scale} cannot be used",
            where=("scale",),
            location="query",
            value=text,
            way_out=f"give a whole number from 1 to {MOST_SCALE}",
        )
    return scale


def scaled_number(text: str, name: str, scale: int | None) -> float:
    """Return the number a parameter says; beside a scale it is an integer, to be divided by it.

    Raises
    ------
    ServiceError : no number, or beside a scale no whole one.

    Examples
    --------
    >>> scaled_number("12.5", "q1", None), scaled_number("1250", "q1", 100)
    (12.5, 12.5)
    """
    return number(text, name) if scale is None else whole_number(text, name) / scale


def wanted_units(parameters: Mapping[str, str]) -> str | None:
    """Return the name of the units asked for, if any are.

    Raises
    ------
    UnusableValue : there are no such units.
    """
    text = parameters.get("units")
    if text is not None and text not in UNITS:
        raise UnusableValue(
            f"there are no units {text!r}",
            where=("units",),
            location="query",
            value=text,
            way_out=f"one of: {', '.join(UNITS)}",
        )
    return text


def single_question(
    arm: str, parameters: Mapping[str, str], answer_format: Format
) -> SingleQuestion:
    """Return the question that a query string asks about one posture of an arm.

    Raises
    ------
    ServiceError, KinematicsError : a parameter that cannot be used.
    """
    said = tuple([item for item in parameters.items() if item[0] not in _VARYING])
    if len(arm) + sum(map(len, chain.from_iterable(said))) > _LONGEST_KEPT:
        return replace(_question(arm, said, answer_format), is_kept=False)
    return _question_in_words(arm, said, answer_format)


def joints_asked(parameters: Mapping[str, str], scale: int | None) -> JointsAsked:
    """Return the joint values of a query string.

    Raises
    ------
    ServiceError : no numbers, in two places, or with a gap between them.
    """
    single: list[str] = []
    if not _ONE_JOINT.isdisjoint(parameters):
        single = [name for name in _JOINT_PARAMETERS if name in parameters]
    if "q" in parameters:
        if single:
            raise UnusableValue(
                f"joint values stand in q and in {single[0]}",
                where=(single[0],),
                location="query",
                value=parameters[single[0]],
                way_out="use q=0,-90,... or q1=0&q2=-90..., not both",
            )
        text = parameters["q"]
        if scale is None:
            values = numbers(text, "q")
        else:
            values = [scaled_number(part, "q", scale) for part in text.split(",")] if text else []
        return JointsAsked(values, ["q"] * len(values))
    for place, name in enumerate(single, start=1):
        if name != f"q{place}":
            raise MissingField(
                f"q{place} is missing before {name}",
                where=(f"q{place}",),
                location="query",
                way_out=f"give q1 to {single[-1]} without a gap",
            )
    return JointsAsked([scaled_number(parameters[name], name, scale) for name in single], single)


def _question(arm: str, said: tuple[tuple[str, str], ...], answer_format: Format) -> SingleQuestion:
    parameters = dict(said)
    form = checked_form(
        parameters.get("form", _NESTED_FORM if answer_format == "json" else FLAT_FORM)
    )
    if answer_format != "json" and form not in TRIPLES:
        raise FormNotFlat(
            f"the form {form} does not fit a flat answer",
            where=("form",),
            location="query",
            value=form,
            way_out="use one of the 24 angle triples, e.g. xyz-fixed",
        )
    scale = wanted_scale(parameters)
    revision = parameters.get("revision")
    return SingleQuestion(
        arm=arm,
        form=form,
        tool=parameters.get("tool"),
        tool_pose=_inline_tool(parameters, form, scale),
        frame=parameters.get("frame"),
        units=wanted_units(parameters),
        revision=None if revision is None else whole_number(revision, "revision"),
        expect=parameters.get("expect"),
        task=_task(parameters.get("task")),
        scale=scale,
        outline=_beside(parameters, "outline", answer_format),
        nearest=_beside(parameters, "nearest", answer_format),
    )


_question_in_words = lru_cache(maxsize=QUESTIONS_KEPT)(_question)


def _inline_tool(parameters: Mapping[str, str], form: str, scale: int | None) -> models.Pose | None:
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
    values = [scaled_number(parameters.get(name, "0"), name, scale) for name in TOOL_PARAMETERS]
    return models.Pose(
        position=values[:3],
        orientation=models.Orientation(
            form=form if form in TRIPLES else FLAT_FORM, values=values[3:]
        ),
    )


def _beside(parameters: Mapping[str, str], name: str, answer_format: Format) -> bool:
    """Return whether something is wanted beside the pose, for which only JSON has a place."""
    text = parameters.get(name)
    wanted = switch(text, name)
    if wanted and answer_format != "json":
        raise UnusableValue(
            f"an answer with format={answer_format} has no place for {name}",
            where=(name,),
            location="query",
            value=text,
            way_out="ask for format=json",
        )
    return wanted


def _task(text: str | None) -> str | list[str] | None:
    return text.split(",") if text is not None and text.startswith(("v", "w")) else text
