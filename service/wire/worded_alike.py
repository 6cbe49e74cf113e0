"""Short bodies about frames in the same words as one before, with other numbers.

Whoever measures a hall again asks with the same names in the same order. What follows from the
words is found once and kept; of each further body only the numbers are read. Left out: whatever
else a body may hold, which is read as a whole (frames.py), and numbers that cannot be used.
"""

import re
from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from itertools import count

import numpy as np
import orjson
from numpy.typing import NDArray
from pydantic import ValidationError

from kinematics.pose_batches import poses_as_given
from kinematics.table import FloatArray
from service.convert import UNITS, Units
from service.errors import ServiceError
from service.wire.body import parse_json
from service.wire.frames_request import FramesRequest, are_frame_names
from service.wire.plain_relations import (
    Relations,
    numbers_of,
    orientations_in,
    plain_of,
    sds_of,
)

SHORT_BYTES = 16 * 1024
"""Bodies up to this are parsed and answered in a few milliseconds."""

WORDINGS_KEPT = 64
"""Those asked for last: 20 kB each for 50 relations, 30 kB for as many as a short body holds."""

_NUMBERS = re.compile(rb"\[([-+.eE0-9, \n\r\t]+)\]")
"""The inside of a list of numbers. In a text it could stand as well, but no name holds one."""

_LIST = b"\0"
"""Stands among the words in place of each list; JSON holds it nowhere."""

_OF_NUMBERS = b"-+.eE0123456789 \n\r\t"
_FIELDS = frozenset({"relations", "find", "form", "units", "estimate"})
"""A body that holds others rests on what is stored, or is wrong."""


@dataclass(frozen=True, eq=False)
class _Poses:
    """Poses of one form: the relations, and which of all numbers they are made of.

    ``positions`` is None where each is one matrix.
    """

    form: str
    relations: list[int]
    values: NDArray[np.int64]
    positions: NDArray[np.int64] | None


@dataclass(frozen=True, eq=False)
class Wording:
    """What follows from a body's words alone.

    Attributes
    ----------
    asked : all of the body but the relations.
    """

    asked: FramesRequest
    of: Sequence[str]
    within: Sequence[str]
    poses: Sequence[_Poses]
    position_sd: FloatArray
    angle_sd: FloatArray


@dataclass(frozen=True, eq=False)
class WordedAlike:
    """A body as its words, and all numbers that stand in lists, in their order."""

    wording: Wording
    numbers: FloatArray

    def relations(self, units: Units) -> Relations | None:
        """Return the relations in SI, or None if a pose is to be mended or cannot be used."""
        known, numbers = self.wording, self.numbers
        of_in = np.empty((len(known.of), 4, 4))
        for group in known.poses:
            places = None if group.positions is None else numbers[group.positions]
            given = orientations_in(group.form, numbers[group.values], places, units)
            poses = None if given is None else poses_as_given(*given)
            if poses is None:
                return None
            if len(known.poses) == 1:
                of_in = poses
            else:
                of_in[group.relations] = poses
        return Relations(known.of, known.within, of_in, known.position_sd, known.angle_sd)


def worded_alike(raw: bytes) -> WordedAlike | None:
    """Return a body as words and numbers; None if anything about it is odd, or its words are new.

    Words are looked into when they come a second time: those of a body that comes once only would
    be looked into for nothing.

    Examples
    --------
    >>> pose = b'"pose": {"position": [0, 0, %b], "orientation": {"form": "xyz-fixed", "values": '
    >>> start = b'{"units": "m-rad", "relations": [{"of": "lamp", "in": "table", ' + pose
    >>> bodies = [(start + b"[0, 0, 0]}}}]}") % height for height in (b"0.5", b"1.5", b"2.5")]
    >>> first, low, high = map(worded_alike, bodies)
    >>> first, low.wording is high.wording, high.numbers.tolist()
    (None, True, [0.0, 0.0, 2.5, 0.0, 0.0, 0.0])
    """
    parts = _NUMBERS.split(raw)
    lists = parts[1::2]
    words, commas = _LIST.join(parts[::2]), b"]".join(lists).translate(None, _OF_NUMBERS)
    wording = _wording(words, commas) if next(_sightings(hash((words, commas)))) else None
    if wording is None:
        return None
    try:
        # What follows from the words holds for any lists that are as long, of numbers alone.
        listed = orjson.loads(b"[" + b",".join(lists) + b"]")
    except orjson.JSONDecodeError:
        return None
    numbers = np.fromiter(listed, np.float64, len(listed))
    return WordedAlike(wording, numbers) if np.isfinite(numbers).all() else None


@lru_cache(maxsize=WORDINGS_KEPT)
def _sightings(words: int) -> "count[int]":
    """Return what counts how often words have been seen before, by their hash."""
    return count()


@lru_cache(maxsize=WORDINGS_KEPT)
def _wording(words: bytes, commas: bytes) -> Wording | None:
    """Return what follows from words, and from the commas in each list; None if they are odd."""
    place = count()
    lists = [str([next(place) for _ in range(len(part) + 1)]) for part in commas.split(b"]")]
    between = words.split(_LIST)
    if len(between) != len(lists) + 1:
        return None
    text = between[0] + b"".join(
        numbers.encode() + after for numbers, after in zip(lists, between[1:], strict=True)
    )
    try:
        return _read(text, next(place))
    except (ServiceError, ValidationError):
        return None


def _read(text: bytes, count_of_numbers: int) -> Wording | None:
    """Return what follows from a body in which each number in a list is its own place."""
    document = parse_json(text)
    plain = plain_of(document)
    if plain is None or not isinstance(document, dict) or not document.keys() <= _FIELDS:
        return None
    asked = FramesRequest.model_validate({**document, "relations": []})
    sds = None if asked.units is None else sds_of(plain, UNITS[asked.units])
    if sds is None or not are_frame_names({*plain.of, *plain.within}):
        return None
    poses, used = [], 0
    for form, group in plain.by_form.items():
        given = numbers_of(form, group)
        if given is None:
            return None
        values, positions = (None if part is None else part.astype(np.int64) for part in given)
        assert values is not None
        poses.append(_Poses(form, group.places, values, positions))
        used += values.size + (0 if positions is None else positions.size)
    # Otherwise a list stands where it has no business, or within a text.
    if used != count_of_numbers:
        return None
    for sd in sds:
        sd.flags.writeable = False
    return Wording(asked, tuple(plain.of), tuple(plain.within), poses, *sds)
