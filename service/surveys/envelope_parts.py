"""Parts of an envelope as a survey keeps them: as JSON, whose doubles come back to the last bit.

Idea: a piece is named by what it is of, such as ``travel section 3``; what is kept of it says by
itself what it is: chords of a stripe, which places of a slab are reached, or extremes. Left out:
finding them (the core), and the whole (envelope_kept.py).
"""

from collections.abc import Iterator, Sequence
from dataclasses import asdict
from typing import Any, NamedTuple, cast

import numpy as np

from kinematics.envelope.draws import Marks
from kinematics.envelope.grid_chords import Chords
from kinematics.envelope.in_parts import EnvelopeInParts
from kinematics.envelope.measures import Measure
from kinematics.envelope.sampled_views import Stripe
from kinematics.envelope.shapes import Extreme
from service.storage.ports import Document
from service.surveys.envelope_kept import extreme_from
from service.wire.envelopes import Within

Part = Stripe | Marks | tuple[Extreme, ...]


class Named(NamedTuple):
    """Which piece of an envelope is meant."""

    within: Within
    name: str
    number: int

    @property
    def given(self) -> bytes:
        """As it stands in the store.

        Examples
        --------
        >>> Named("travel", "section", 3).given
        b'travel section 3'
        """
        return f"{self.within} {self.name} {self.number}".encode("ascii")


def named(given: bytes) -> Named:
    """Return which piece is meant.

    Examples
    --------
    >>> named(b"working-travel volume 12").number
    12
    """
    within, name, number = given.decode("ascii").split(" ")
    return Named(cast(Within, within), name, int(number))


def names_of(within: Within, parts: EnvelopeInParts) -> Iterator[Named]:
    """Yield the pieces of an envelope, in the order that they have in a survey."""
    for name, count in parts.pieces.items():
        for number in range(count):
            yield Named(within, name, number)


def part_document(part: Part) -> Document:
    """Return a part as it is kept, arrays in it as they are."""
    if isinstance(part, Stripe):
        chords = asdict(part.chords)
        chords |= {name: list(chords[name]) for name in _SUMS}
        return {"grid": list(part.shape), "chords": chords}
    if isinstance(part, np.ndarray):
        return {"places": list(part.shape), "reached": np.packbits(part).tobytes().hex()}
    return {"extremes": [asdict(one) for one in part]}


_SUMS = ("area", "moment")


def part_from(kept: Document) -> Part:
    """Return the part that was kept, and came back as JSON.

    Examples
    --------
    >>> import orjson
    >>> marks = np.arange(24).reshape(2, 3, 4) % 5 == 0
    >>> told = orjson.dumps(part_document(marks), option=orjson.OPT_SERIALIZE_NUMPY)
    >>> bool((part_from(orjson.loads(told)) == marks).all())
    True
    """
    if "chords" in kept:
        return Stripe(_chords(kept["chords"]), tuple(kept["grid"]))
    if "reached" in kept:
        shape: Sequence[int] = kept["places"]
        bits = np.frombuffer(bytes.fromhex(kept["reached"]), np.uint8)
        return np.unpackbits(bits, count=int(np.prod(shape))).astype(bool).reshape(shape)
    return tuple(map(extreme_from, kept["extremes"]))


def _chords(kept: Document) -> Chords:
    ends: dict[str, Any] = {key: np.array(kept[key], np.int64) for key in ("begin", "end")}
    places: dict[str, Any] = {
        key: np.array(kept[key], np.float64).reshape(-1, 2) for key in ("places", "bends")
    }
    sums: dict[str, Any] = {key: Measure(*kept[key]) for key in _SUMS}
    return Chords(**ends, **places, **sums, unseen=kept["unseen"])
