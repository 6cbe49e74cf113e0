"""What is asked about frames: relations as arrays where nothing is odd about them, else one by one.

Left out: arms and cells and the names they bring along (operations), answers (frame_answers.py).
"""

import re
from collections.abc import Sequence
from contextlib import suppress
from functools import cached_property
from typing import Annotated, Any

import numpy as np
import orjson
from pydantic import Field
from pydantic.json_schema import WithJsonSchema

from kinematics.orientation_forms import FORMS
from kinematics.tolerances import LARGEST_SD, SMALLEST_SD, USUAL_ANGLE_SD, USUAL_POSITION_SD
from service.convert import Units
from service.errors import TooLarge, UnusableValue
from service.wire.body import parse_json
from service.wire.models import AnyArm, Number, Pose, Strict, UnitsName
from service.wire.plain_relations import Plain, Relations, are_usable, plain_of, plain_relations
from service.wire.poses import Where, read_pose

_MOST = {"relations": 20_000, "find": 10_000, "arms": 100}
"""How many a body may hold; ten times what a plant has between all its frames."""

_QUOTE, _COLON = b'":'
_NAME = r"[a-z0-9][a-z0-9-]{0,47}(?:\.[a-z0-9][a-z0-9-]{0,47})?"
FRAME_NAME = re.compile(_NAME, re.ASCII)
_FRAME_NAMES = re.compile(rf"(?:{_NAME}\n)*", re.ASCII)
_FRAME = Annotated[
    str,
    Field(description="a name, or <arm>.base, .flange, .link-3, .<tool or frame>, or world"),
]


class Between(Strict):
    """A pair of frames whose relation is asked for: the pose of the one in the other."""

    of: _FRAME
    in_: Annotated[_FRAME, Field(alias="in")]


class Relation(Between):
    """A known pose of one frame in another, and how well it is known."""

    pose: Pose
    position_sd: Annotated[
        Number | None,
        Field(description="standard deviation of each coordinate; 1 mm where it is left out"),
    ] = None
    angle_sd: Annotated[
        Number | None,
        Field(description="standard deviation about each axis; 1 mrad where it is left out"),
    ] = None


class ArmAt(Strict):
    """An arm and its joint values, which are needed where a way leads through it."""

    arm: AnyArm
    joints: Annotated[
        list[Any] | None,
        WithJsonSchema({"type": "array", "items": {"type": "number"}}),
    ] = None


class FramesRequest(Strict):
    """Known relations between frames, arms at joint values, a cell, and pairs asked for.

    ``units`` may be left out where the cell, or all arms, have the same.
    """

    relations: list[Relation] = Field(default_factory=list)
    find: list[Between] = Field(default_factory=list)
    arms: list[ArmAt] = Field(default_factory=list)
    cell: str | None = None
    estimate: bool = False
    form: Annotated[str, Field(json_schema_extra={"enum": list(FORMS)})] | None = None
    units: UnitsName | None = None


class FramesBody:
    """A body about frames, with the relations in whichever shape they could be taken.

    Attributes
    ----------
    document : the body as parsed.

    Raises
    ------
    Unparseable, DuplicateKey : see parse_json.
    TooLarge : more relations, pairs or arms than one answer holds.
    """

    def __init__(self, raw: bytes) -> None:
        self.document, self._plain = _parsed(raw)

    @cached_property
    def asked(self) -> FramesRequest:
        """All of the body, but no relations where these are plain.

        Raises
        ------
        pydantic.ValidationError : shapes and types.
        """
        rest = self.document
        if self._plain is not None:
            assert isinstance(rest, dict)
            rest = {**rest, "relations": []}
        return FramesRequest.model_validate(rest)

    def relations(self, units: Units) -> Relations:
        """Return the relations in SI.

        Raises
        ------
        ServiceError, KinematicsError, pydantic.ValidationError : with ``where`` from the body's
            root.
        """
        read = None if self._plain is None else plain_relations(self._plain, units)
        if read is None:
            given = self.asked.relations
            if self._plain is not None:
                given = FramesRequest.model_validate(self.document).relations
            read = _one_by_one(given, units)
        _refuse_bad_names(read)
        return read


def _parsed(raw: bytes) -> tuple[object, Plain | None]:
    """Return the body, and its relations where nothing is odd about them.

    orjson reads four times faster than parse_json, but lets a key stand twice. Where every colon
    follows a quotation mark and nothing is escaped, keys can be counted in the text instead.
    """
    letters = np.frombuffer(raw, np.uint8)
    keys = int(np.count_nonzero(letters == _COLON))
    in_place = np.count_nonzero((letters[1:] == _COLON) & (letters[:-1] == _QUOTE))
    if b"\\" not in raw and in_place == keys:
        with suppress(orjson.JSONDecodeError):
            document = orjson.loads(raw)
            _refuse_too_many(document)
            plain = plain_of(document)
            if plain is not None and plain.keys == keys:
                return document, plain
    document = parse_json(raw)
    _refuse_too_many(document)
    return document, plain_of(document)


def _one_by_one(given: Sequence[Relation], units: Units) -> Relations:
    of_in, repaired = np.empty((len(given), 4, 4)), []
    position_sd, angle_sd = np.empty(len(given)), np.empty(len(given))
    for number, relation in enumerate(given):
        where = ("relations", number)
        of_in[number], findings = read_pose(relation.pose, units, (*where, "pose"))
        repaired += [(number, finding) for finding in findings]
        position_sd[number] = _sd(
            relation.position_sd, units, "m", USUAL_POSITION_SD, (*where, "position_sd")
        )
        angle_sd[number] = _sd(
            relation.angle_sd, units, "rad", USUAL_ANGLE_SD, (*where, "angle_sd")
        )
    return Relations(
        [relation.of for relation in given],
        [relation.in_ for relation in given],
        of_in,
        position_sd,
        angle_sd,
        repaired,
    )


def _sd(given: float | None, units: Units, unit: str, usual: float, where: Where) -> float:
    if given is None:
        return usual
    sd = units.value_in(given, unit)
    if are_usable(np.array(sd)):
        return sd
    least, most = (units.shortest_out(bound, unit) for bound in (SMALLEST_SD, LARGEST_SD))
    raise UnusableValue(
        f"a standard deviation of {given:.6g} {units.unit_out(unit)} cannot be used",
        where=where,
        value=given,
        way_out=f"give {least:.6g} to {most:.6g} {units.unit_out(unit)}, or leave it out",
    )


def _refuse_bad_names(read: Relations) -> None:
    different = {*read.of, *read.within}
    # All at once first: a line for each name, and no line more.
    lines = "".join(f"{name}\n" for name in different)
    if _FRAME_NAMES.fullmatch(lines) and lines.count("\n") == len(different):
        return
    bad = {name for name in different if not FRAME_NAME.fullmatch(name)}
    for number, pair in enumerate(zip(read.of, read.within, strict=True)):
        for side, name in zip(("of", "in"), pair, strict=True):
            if name in bad:
                raise UnusableValue(
                    f"{name[:60]!r} is no name of a frame",
                    where=("relations", number, side),
                    value=name,
                    way_out="a-z, 0-9 and -, at most 48, not starting with -; or <arm>.<frame>",
                )


def _refuse_too_many(document: object) -> None:
    """Refuse a body that holds more than one answer, before anything is made of it."""
    if not isinstance(document, dict):
        return
    for name, most in _MOST.items():
        given = document.get(name)
        if isinstance(given, list) and len(given) > most:
            raise TooLarge(
                f"{len(given)} {name} in one request",
                where=(name,),
                value=len(given),
                way_out=f"send at most {most} at a time",
                status=422,
            )
