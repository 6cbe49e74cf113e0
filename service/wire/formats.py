"""Formats of questions and answers about many postures, and the query beside a table of numbers.

Left out: the formats themselves (npy.py, csv_rows.py, csv_text.py, JSON in body.py and answers.py).
"""

from collections.abc import Collection, Mapping, Sequence
from functools import lru_cache
from typing import Literal

from starlette.requests import Request

from kinematics.orientation_forms import TRIPLES
from service.details import Detail, Location
from service.errors import FormNotFlat, MissingField, UnknownField, UnusableValue
from service.wire import csv_rows, npy
from service.wire.controller import FLAT_FORM, single_question
from service.wire.query import known_parameters
from service.wire.single import TOOL_PARAMETERS, SingleQuestion

Format = Literal["json", "npy", "csv", "svg"]
FORMATS: tuple[Format, ...] = ("json", "npy", "csv")
"""Of tables of numbers."""
JSON = "application/json"
SVG = "image/svg+xml"
BODY_TYPES: Mapping[str, Format] = {
    JSON: "json",
    npy.MEDIA_TYPE: "npy",
    "application/octet-stream": "npy",
    csv_rows.MEDIA_TYPE: "csv",
}
_ANSWER_TYPES: Mapping[str, Format] = {**BODY_TYPES, SVG: "svg"}
QUATERNION = "quaternion-wxyz"
TABLE_PARAMETERS = frozenset(
    {
        *("arm", "revision", "expect", "tool", *TOOL_PARAMETERS, "frame", "units", "form"),
        *("singularity", "task", "format", "tag"),
    }
)
"""Beside a table of joint vectors."""

_BODY_PARAMETERS = frozenset({"format", "tag"})
"""Beside a JSON body, which says all else itself."""

_LONGEST_KEPT = 512
"""Characters of an ``Accept`` header whose meaning is kept; browsers send some 150."""

_SWITCH = {"true": True, "1": True, "false": False, "0": False}


def question_parameters(request: Request, body: Format | None) -> dict[str, str]:
    """Return the query's parameters as the body's format, if it is known, allows them.

    Raises
    ------
    UnknownField, UnusableValue : unknown, twice, or to be said in the body.
    """
    if body == "json":
        return beside_body(request, TABLE_PARAMETERS, _BODY_PARAMETERS)
    return known_parameters(request, TABLE_PARAMETERS)


def beside_body(
    request: Request, of_tables: Collection[str], of_bodies: Collection[str]
) -> dict[str, str]:
    """Return the query's parameters beside a JSON body, which says all else itself.

    Parameters
    ----------
    of_tables : what may stand beside a table, and is to be said in a body.
    of_bodies : those of them that a body does not say.

    Raises
    ------
    UnknownField, UnusableValue : unknown, twice, or to be said in the body.
    """
    found = known_parameters(request, of_tables, offered=of_bodies)
    wrong = [
        Detail(
            "unknown-field",
            f'the parameter "{name}" is for tables',
            (name,),
            "query",
            found[name],
            f'say "{name}" in the body',
        )
        for name in found
        if name not in of_bodies
    ]
    if wrong:
        raise UnknownField(wrong[0].say, errors=wrong)
    return found


def answer_format(
    parameters: Mapping[str, str],
    accept: str,
    default: Format,
    offered: tuple[Format, ...] = FORMATS,
) -> Format:
    """Return the format of the answer: the query's, else the best accepted, else ``default``.

    Parameters
    ----------
    offered : what the address answers in.

    Raises
    ------
    UnusableValue : ``format`` says another.

    Examples
    --------
    >>> answer_format({}, "text/csv;q=0.5, application/json", "npy")
    'json'
    >>> answer_format({}, "*/*", "npy"), answer_format({"format": "csv"}, JSON, "npy")
    ('npy', 'csv')
    """
    text = parameters.get("format")
    if text is None:
        best = _best_kept if len(accept) <= _LONGEST_KEPT else _best_accepted
        return best(accept, default, offered)
    for name in offered:
        if text == name:
            return name
    raise UnusableValue(
        f"there is no format {text!r} here",
        where=("format",),
        location="query",
        value=text,
        way_out=f"one of: {', '.join(offered)}",
    )


def table_question(parameters: Mapping[str, str], wanted: Format, *, key: str) -> SingleQuestion:
    """Return what the query beside a table of joint vectors asks, all but the vectors.

    Raises
    ------
    MissingField : no arm.
    ServiceError, KinematicsError : a parameter that cannot be used.
    """
    if "arm" not in parameters:
        raise MissingField(
            '"arm" is missing',
            where=("arm",),
            location="query",
            way_out="name a stored arm in the query: ?arm=...",
        )
    asked = {name: parameters[name] for name in parameters if name not in ("arm", "singularity")}
    form = form_for(wanted, parameters.get("form"), key=key, location="query")
    return single_question(parameters["arm"], asked | {"form": form}, "json")


def table_singularity(parameters: Mapping[str, str]) -> bool | None:
    """Return whether singularity is asked for; None where nothing is said.

    Raises
    ------
    UnusableValue : neither true nor false.
    """
    text = parameters.get("singularity")
    if text is None:
        return None
    if text not in _SWITCH:
        raise UnusableValue(
            f"singularity={text} is neither true nor false",
            where=("singularity",),
            location="query",
            value=text,
            way_out="singularity=true or singularity=false",
        )
    return _SWITCH[text]


def singularity_for(wanted: Format, said: bool | None, *, location: Location) -> bool:
    """Return whether singularity is judged: by default where the answer has a place for it.

    Raises
    ------
    UnusableValue : it is asked for and has no place in the answer.
    """
    if wanted == "npy" and said:
        raise UnusableValue(
            "an NPY answer has no place for singularity",
            where=("singularity",),
            location=location,
            value=said,
            way_out="ask for format=csv or format=json",
        )
    return wanted != "npy" if said is None else said


def form_for(wanted: Format, said: str | None, *, key: str, location: Location) -> str:
    """Return the orientation form of the answer.

    Raises
    ------
    FormNotFlat : a form beyond the 24 triples for CSV.
    UnusableValue : for NPY another form than the quaternion.
    """
    if wanted == "csv" and key == "poses":
        if said is not None and said not in TRIPLES:
            raise FormNotFlat(
                f"the form {said[:60]} does not fit a CSV answer",
                where=("form",),
                location=location,
                value=said,
                way_out="use one of the 24 angle triples, e.g. xyz-fixed",
            )
        return said or FLAT_FORM
    if wanted == "npy" and said not in (None, QUATERNION):
        raise UnusableValue(
            f"an NPY answer holds quaternions, not {str(said)[:60]}",
            where=("form",),
            location=location,
            value=said,
            way_out=f"leave form out or say {QUATERNION}; format=csv has other forms",
        )
    return said or QUATERNION


def _best_accepted(accept: str, default: Format, offered: tuple[Format, ...]) -> Format:
    weights = {name: _weight(accept, name) for name in (default, *offered)}
    return max(weights, key=lambda name: weights[name])


_best_kept = lru_cache(maxsize=64)(_best_accepted)


def _weight(accept: str, name: Format) -> float:
    """Return the weight an ``Accept`` header gives a format; the most specific entry counts."""
    types = [media for media, kind in _ANSWER_TYPES.items() if kind == name]
    best: tuple[int, float] = (-1, 0.0)
    for entry in accept.split(","):
        media, *parameters = (part.strip().lower() for part in entry.split(";"))
        specific = _specific(media, types)
        if specific > best[0]:
            best = (specific, _quality(parameters))
    return best[1]


def _specific(media: str, types: Sequence[str]) -> int:
    if media in types:
        return 2
    if media.endswith("/*") and any(kind.startswith(media[:-1]) for kind in types):
        return 1
    return 0 if media == "*/*" else -1


def _quality(parameters: Sequence[str]) -> float:
    for parameter in parameters:
        if parameter.startswith("q="):
            try:
                return min(max(float(parameter[2:]), 0.0), 1.0)
            except ValueError:
                return 0.0
    return 1.0
