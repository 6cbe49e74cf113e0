"""Orientations asked about by query string: one by one, or as a table with the rest beside it.

Left out: flat answers (rotation_flat.py), bodies (rotations.py), the answering (operations).
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from math import prod
from typing import Any

from kinematics.errors import InvalidOrientation
from kinematics.orientation_forms import FORMS, shape_of
from service.convert import UNITS, Units
from service.errors import MissingField, UnusableValue
from service.web.document import parameter
from service.wire.controller import scaled_number, wanted_scale, wanted_units
from service.wire.poses import checked_form
from service.wire.question_parameters import (
    ERRORS,
    FORMAT,
    FORMAT_OF_TABLES,
    SCALE_SCHEMA,
    TAG,
    one_of,
)

FLAT_FORM = "xyz-fixed"
NESTED_FORM = "quaternion-wxyz"
VALUE_PARAMETERS = tuple(f"r{place}" for place in range(1, 10))
"""The numbers of an orientation; a matrix has nine, by rows."""

PARAMETERS = frozenset(
    {"from", "to", *VALUE_PARAMETERS, "units", "format", "tag", "errors", "scale"}
)
TABLE_PARAMETERS = frozenset({"from", "to", "units", "format", "tag"})
BODY_PARAMETERS = frozenset({"format", "tag"})


@dataclass(frozen=True)
class ConversionQuestion:
    """One orientation in a form, and the form it is wanted in; values divided by ``scale``."""

    form: str
    to: str
    units: Units
    values: list[float]
    scale: int | None


def width_of(form: str) -> int:
    """Return how many numbers an orientation of a form has.

    Examples
    --------
    >>> width_of("matrix"), width_of("zyx-current")
    (9, 3)
    """
    return prod(shape_of(form))


def value_parameter(where: Sequence[str | int]) -> str:
    """Return the parameter that holds a number of an orientation; the first where none is told.

    Examples
    --------
    >>> value_parameter((2,)), value_parameter((1, 0)), value_parameter(())
    ('r3', 'r4', 'r1')
    """
    places = [int(place) for place in where]
    row, column = places if len(places) == 2 else (0, places[0] if places else 0)
    return VALUE_PARAMETERS[3 * row + column]


def conversion_question(parameters: Mapping[str, str], *, flat: bool) -> ConversionQuestion:
    """Return what a query string asks about one orientation.

    Raises
    ------
    ServiceError : a parameter that is missing or cannot be used.
    """
    form = form_said(parameters, "from")
    to = form_said(parameters, "to", FLAT_FORM if flat else NESTED_FORM)
    scale = wanted_scale(parameters)
    wanted, given = VALUE_PARAMETERS[: width_of(form)], [*parameters.keys() & VALUE_PARAMETERS]
    beyond = sorted(set(given) - set(wanted))
    if beyond:
        raise UnusableValue(
            f"{form} has no {beyond[0]}",
            where=(beyond[0],),
            location="query",
            value=parameters[beyond[0]],
            way_out=f"give {wanted[0]} to {wanted[-1]}",
        )
    missing = [name for name in wanted if name not in parameters]
    if missing:
        raise MissingField(
            f"{missing[0]} is missing",
            where=(missing[0],),
            location="query",
            way_out=f"{form} takes {wanted[0]} to {wanted[-1]}",
        )
    values = [scaled_number(parameters[name], name, scale) for name in wanted]
    return ConversionQuestion(form, to, units_said(parameters), values, scale)


def form_said(parameters: Mapping[str, str], name: str, default: str | None = None) -> str:
    """Return the orientation form that a parameter says.

    Raises
    ------
    MissingField : nothing is said, and there is no default.
    UnusableValue : no form; the way out names the nearest.
    """
    text = parameters.get(name, default)
    if text is None:
        raise MissingField(
            f'"{name}" is missing',
            where=(name,),
            location="query",
            way_out=f"say which form the values have: {name}=xyz-fixed, {name}=quaternion-wxyz ...",
        )
    try:
        return checked_form(text, (name,))
    except InvalidOrientation as error:
        raise UnusableValue(
            error.say, where=(name,), location="query", value=text, way_out=error.way_out
        ) from None


def units_said(parameters: Mapping[str, str]) -> Units:
    """Return the units, which no arm is there to tell.

    Raises
    ------
    MissingField, UnusableValue
    """
    name = wanted_units(parameters)
    if name is None:
        raise MissingField(
            '"units" is missing, and units are not guessed',
            where=("units",),
            location="query",
            way_out=f"one of: {', '.join(UNITS)}",
        )
    return UNITS[name]


_FROM = parameter("from", "Orientation form of the values.", one_of(*FORMS), example="zyx-current")
_TO = parameter(
    "to",
    "Orientation form of the answer; quaternion-wxyz if left out, xyz-fixed in flat, txt and csv.",
    one_of(*FORMS),
)
_UNITS = parameter("units", "Units of question and answer; never guessed.", one_of(*UNITS))

CONVERSION_PARAMETERS: tuple[dict[str, Any], ...] = (
    {**_FROM, "required": True},
    _TO,
    *(
        parameter(name, f"Number {place} of the orientation.", {"type": "number"})
        for place, name in enumerate(VALUE_PARAMETERS, start=1)
    ),
    {**_UNITS, "required": True},
    FORMAT,
    TAG,
    ERRORS,
    parameter(
        "scale",
        "Values are integers and divided by it; numbers of the answer are multiplied by it and "
        "printed as integers.",
        {**SCALE_SCHEMA},
    ),
)

CONVERSION_TABLE_PARAMETERS: tuple[dict[str, Any], ...] = (
    _FROM,
    _TO,
    {**_UNITS, "description": "Units of a table and its answer; never guessed."},
    FORMAT_OF_TABLES,
    TAG,
)
"""Beside a table of orientations; a JSON body says all but ``format`` and ``tag`` itself."""
