"""What is asked about frames: relations as arrays where nothing is odd about them, else one by one.

Left out: arms and cells and the names they bring along (operations), answers (frame_answers.py).
"""

from collections.abc import Sequence
from contextlib import suppress
from functools import cached_property

import numpy as np
import orjson

from kinematics.tolerances import LARGEST_SD, SMALLEST_SD, USUAL_ANGLE_SD, USUAL_POSITION_SD
from service.convert import Units
from service.errors import TooLarge, UnusableValue
from service.wire.body import parse_json
from service.wire.frames_request import FRAME_NAME, FramesRequest, Relation, are_frame_names
from service.wire.plain_relations import Plain, Relations, are_usable, plain_of, plain_relations
from service.wire.poses import Where, read_pose
from service.wire.worded_alike import SHORT_BYTES, worded_alike

_MOST = {"relations": 20_000, "find": 10_000, "arms": 100}
"""How many a body may hold; ten times what a plant has between all its frames."""


class FramesBody:
    """A body about frames, with the relations in whichever shape they could be taken.

    Raises
    ------
    Unparseable, DuplicateKey : see parse_json.
    TooLarge : more relations, pairs or arms than one answer holds.
    """

    def __init__(self, raw: bytes) -> None:
        self._raw = raw
        self._alike = worded_alike(raw) if len(raw) <= SHORT_BYTES else None
        if self._alike is None:
            assert self._parsed

    @cached_property
    def _parsed(self) -> tuple[object, Plain | None]:
        return _parsed(self._raw)

    @property
    def document(self) -> object:
        """The body as parsed."""
        return self._parsed[0]

    @cached_property
    def asked(self) -> FramesRequest:
        """All of the body, but no relations where these are read otherwise.

        Raises
        ------
        pydantic.ValidationError : shapes and types.
        """
        if self._alike is not None:
            return self._alike.wording.asked
        rest, plain = self._parsed
        if plain is not None:
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
        read = None if self._alike is None else self._alike.relations(units)
        if read is not None:
            return read
        document, plain = self._parsed
        read = None if plain is None else plain_relations(plain, units)
        if read is None:
            read = _one_by_one(FramesRequest.model_validate(document).relations, units)
        _refuse_bad_names(read)
        return read


def _parsed(raw: bytes) -> tuple[object, Plain | None]:
    """Return the body, and its relations where nothing is odd about them.

    orjson reads four times faster than parse_json, but lets a key stand twice. Where every colon
    follows a quotation mark and nothing is escaped, keys can be counted in the text instead.
    """
    keys = raw.count(b":")
    if b"\\" not in raw and raw.count(b'":') == keys:
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
    if are_frame_names(different):
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
