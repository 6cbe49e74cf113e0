"""Readouts of a screen and what they mean, as bodies, and the words a direction may be given in.

Left out: what is made of them (the core's) and how it is told (operations/guesses.py).
"""

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Annotated, Any, Literal

import numpy as np
from pydantic import Field
from pydantic.json_schema import WithJsonSchema

from kinematics.errors import KinematicsError
from kinematics.findings import Finding
from kinematics.known_names import way_out_of_unknown
from kinematics.number_checks import checked_numbers
from kinematics.readouts import COUNTS, KnownDirection, KnownOrientation, Meaning, checked_direction
from kinematics.table import FloatArray
from kinematics.tolerances import GUESS_FITS, GUESS_FITS_MOST, MOST_READOUTS
from service.convert import UNITS, Units
from service.errors import MissingField, TooLarge, UnusableValue
from service.wire.models import FormName, Number, Orientation, Strict, UnitsName
from service.wire.poses import Where, checked_form, read_orientation

TOOL_DIRECTIONS = {
    "x": (1.0, 0.0, 0.0),
    "y": (0.0, 1.0, 0.0),
    "z": (0.0, 0.0, 1.0),
    "-x": (-1.0, 0.0, 0.0),
    "-y": (0.0, -1.0, 0.0),
    "-z": (0.0, 0.0, -1.0),
}
BASE_DIRECTIONS = {**TOOL_DIRECTIONS, "up": (0.0, 0.0, 1.0), "down": (0.0, 0.0, -1.0)}
"""Words for directions; up and down are along z of the frame the screen counts in."""


def _direction(words: Mapping[str, tuple[float, ...]], description: str) -> WithJsonSchema:
    vector = {"type": "array", "items": {"type": "number"}, "minItems": 3, "maxItems": 3}
    named = {"type": "string", "enum": list(words)}
    return WithJsonSchema({"description": description, "anyOf": [named, vector]})


class AskedDirection(Strict):
    """Where one direction of the tool points."""

    of: Annotated[Any, _direction(TOOL_DIRECTIONS, "direction in the tool")]
    is_: Annotated[
        Any, Field(alias="is"), _direction(BASE_DIRECTIONS, "the same direction in the base")
    ]


class Readout(Strict):
    """The numbers a screen shows, and the orientation or the direction they are known to mean."""

    shown: Annotated[
        list[Any],
        WithJsonSchema(
            {
                "type": "array",
                "description": "3, 4 or 9 numbers in the order of the screen, or 3 rows of 3",
                "items": {"anyOf": [{"type": "number"}, {"type": "array"}]},
                "minItems": min(COUNTS),
                "maxItems": max(COUNTS),
            }
        ),
    ]
    orientation: Orientation | None = None
    direction: AskedDirection | None = None


class GuessesRequest(Strict):
    """Readouts of one screen; ``units`` are those of orientations, tolerance and answer."""

    readouts: Annotated[list[Readout], Field(min_length=1, max_length=MOST_READOUTS)]
    units: UnitsName
    tolerance: Annotated[
        Annotated[Number, Field(gt=0)] | None,
        Field(description="angle up to which a readout is explained; left out: 0.5 deg"),
    ] = None
    shown_unit: Annotated[
        Literal["deg", "rad", "half-turns"] | None,
        Field(description="unit of the screen's angles; left out: all are tried"),
    ] = None
    form: Annotated[FormName, Field(description="form of predictions")] = "quaternion-wxyz"
    most: Annotated[int, Field(ge=1, le=100, description="groups answered at most")] = 12


@dataclass(frozen=True)
class ReadGuesses:
    """The question in SI, as the core takes it; repairs with the place of their readout."""

    units: Units
    shown: FloatArray
    meanings: tuple[Meaning, ...]
    tolerance: float
    shown_unit: str | None
    form: str
    most: int
    repaired: tuple[tuple[int, Finding], ...]


def read_guesses(body: object) -> ReadGuesses:
    """Return what a body asks.

    Raises
    ------
    ValidationError, ServiceError, KinematicsError : with ``where`` from the body's root.
    """
    _check_count(body)
    asked = GuessesRequest.model_validate(body)
    units = UNITS[asked.units]
    shown = [_shown(readout, place) for place, readout in enumerate(asked.readouts)]
    for place, numbers in enumerate(shown):
        if len(numbers) != len(shown[0]):
            raise UnusableValue(
                f"{len(numbers)} numbers, and {len(shown[0])} in the first readout",
                where=("readouts", place, "shown"),
                value=asked.readouts[place].shown,
                way_out="give the readouts of one screen, as many numbers in each",
            )
    known = [_meaning(readout, units, place) for place, readout in enumerate(asked.readouts)]
    return ReadGuesses(
        units,
        np.array(shown),
        tuple(meaning for meaning, _ in known),
        _tolerance(asked.tolerance, units),
        asked.shown_unit,
        checked_form(asked.form),
        asked.most,
        tuple((place, finding) for place, (_, told) in enumerate(known) for finding in told),
    )


def _check_count(body: object) -> None:
    readouts = body.get("readouts") if isinstance(body, dict) else None
    if not isinstance(readouts, list):
        return  # the model says what is wrong
    if not readouts:
        raise UnusableValue(
            "there is no readout",
            where=("readouts",),
            value=readouts,
            way_out="give at least one; three in different postures settle most screens",
        )
    if len(readouts) > MOST_READOUTS:
        raise TooLarge(
            f"{len(readouts)} readouts, and at most {MOST_READOUTS} are taken",
            where=("readouts",),
            value=len(readouts),
            way_out="give the most different ones; three settle most screens",
            status=422,
        )


def _tolerance(given: float | None, units: Units) -> float:
    if given is None:
        return GUESS_FITS
    tolerance = units.value_in(given, "rad")
    if tolerance > GUESS_FITS_MOST:
        most = units.shortest_out(GUESS_FITS_MOST, "rad")
        raise UnusableValue(
            f"the tolerance is above {most:g} {units.angle}, where anything fits",
            where=("tolerance",),
            value=given,
            way_out=f"give what the known orientations may be off by, at most {most:g}",
        )
    return tolerance


def _shown(readout: Readout, place: int) -> FloatArray:
    at = ("readouts", place, "shown")
    rows = [row for row in readout.shown if isinstance(row, list)]
    shape = (3, 3) if len(rows) == len(readout.shown) == 3 else (len(readout.shown),)
    if math.prod(shape) not in COUNTS:
        raise UnusableValue(
            f"a screen that shows {len(readout.shown)} numbers is not known",
            where=at,
            value=readout.shown,
            way_out="give 3 numbers (angles, a rotation vector), 4 (a quaternion, an axis and an "
            "angle) or 9 (a matrix, also as 3 rows of 3), in the order of the screen",
        )
    try:
        return checked_numbers(readout.shown, shape, "a readout").ravel()
    except KinematicsError as error:
        raise error.below(*at) from None


def _meaning(readout: Readout, units: Units, place: int) -> tuple[Meaning, tuple[Finding, ...]]:
    at: Where = ("readouts", place)
    if readout.orientation is not None and readout.direction is not None:
        raise UnusableValue(
            "a readout means either an orientation or a direction",
            where=(*at, "direction"),
            way_out="leave one out; for a second direction give the numbers shown once more",
        )
    if readout.orientation is not None:
        rotation, findings = read_orientation(readout.orientation, units, (*at, "orientation"))
        return KnownOrientation(rotation), findings
    if readout.direction is not None:
        at = (*at, "direction")
        in_tool = _vector(readout.direction.of, TOOL_DIRECTIONS, (*at, "of"))
        in_base = _vector(readout.direction.is_, BASE_DIRECTIONS, (*at, "is"))
        return KnownDirection(in_tool, in_base), ()
    raise MissingField(
        '"orientation" is missing, and "direction" too',
        where=(*at, "orientation"),
        way_out='add what the numbers mean: an orientation, or a direction such as {"of": "z", '
        '"is": "down"}',
    )


def _vector(given: object, words: Mapping[str, tuple[float, ...]], where: Where) -> FloatArray:
    if isinstance(given, str):
        if given not in words:
            raise UnusableValue(
                f'there is no direction "{given[:60]}"',
                where=where,
                value=given,
                way_out=f"{way_out_of_unknown(given, words)}; or give three numbers",
            )
        return np.array(words[given])
    try:
        return checked_direction(given)
    except KinematicsError as error:
        raise error.below(*where) from None
