"""One complaint about one place of a request: where, what, which value, the way out.

Left out: codes' numbers and statuses (``problems.py``) and how a complaint is found.
"""

import json
import math
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Literal

Location = Literal["body", "query", "path", "header"]

# An error document must stay readable on a controller's display and under its 16 kB budget.
SHOWN_CHARACTERS = 200
TOLD_CHARACTERS = 1000
_SHOWN_ITEMS = 12
_SHOWN_DEPTH = 4
_ABSENT = object()
# orjson prints no integer beyond 64 bits.
_LARGEST_INTEGER = 2**63 - 1


@dataclass(frozen=True, slots=True)
class Detail:
    """One entry of a problem document's ``errors``.

    Attributes
    ----------
    code : kebab-case code of the table in ``problems.py``; decides the document's code.
    say : what is wrong, one sentence.
    where : keys and indices from the outside in.
    location : part of the request ``where`` leads into.
    value : the offending value as it was given; ``shown`` makes it printable.
    way_out : what the caller can do.
    """

    code: str
    say: str
    where: tuple[str | int, ...] = ()
    location: Location = "body"
    value: object = None
    way_out: str = ""

    def document(self) -> dict[str, object]:
        """Return the entry as it stands on the wire.

        Examples
        --------
        >>> Detail("not-finite", "a must be finite", ("rows", 0, "a"), value=math.nan).document()
        ... # doctest: +NORMALIZE_WHITESPACE
        {'pointer': '/rows/0/a', 'in': 'body', 'say': 'a must be finite', 'value': 'NaN',
         'way_out': ''}
        """
        return {"pointer": pointer(self.where), "in": self.location, **self._told()}

    def problem_of_item(self) -> dict[str, object]:
        """Return the complaint as the item it is about has it, among others that are answered."""
        return {"code": self.code, "pointer": pointer(self.where), **self._told()}

    def _told(self) -> dict[str, object]:
        return {
            "say": encodable(self.say),
            "value": shown(self.value),
            "way_out": encodable(self.way_out),
        }


def as_given(detail: Detail, body: object) -> Detail:
    """Return the complaint with its value as ``body`` has it: the core sees SI units only.

    A value of another kind stays: how many rows there are, where the place holds the rows.

    Examples
    --------
    >>> reversed_travel = Detail("unusable-value", "reversed", ("travel",), value=[0.1, -0.1])
    >>> as_given(reversed_travel, {"travel": [5.73, -5.73]}).value
    [5.73, -5.73]
    """
    if detail.location != "body" or not detail.where:
        return detail
    given = body
    for step in detail.where:
        given = _below(given, step)
    if given is _ABSENT or not (detail.value is None or _alike(detail.value, given)):
        return detail
    return replace(detail, value=given)


def pointer(where: Iterable[str | int]) -> str:
    """Return the JSON Pointer (RFC 6901, no ``#``) of a path of keys and indices.

    Examples
    --------
    >>> pointer(("rows", 0, "a/b~c")), pointer(())
    ('/rows/0/a~1b~0c', '')
    """
    return "".join(
        "/" + encodable(str(step)).replace("~", "~0").replace("/", "~1") for step in where
    )


def shown(value: object) -> object:
    """Return ``value`` fit for a JSON answer: finite, encodable, at most 200 characters of JSON.

    Examples
    --------
    >>> shown(math.inf), shown([1, math.nan]), len(shown("x" * 1000))
    ('Infinity', [1, 'NaN'], 200)
    """
    plain = _plain(value, 0)
    text = plain if isinstance(plain, str) else json.dumps(plain, ensure_ascii=False)
    if len(text) <= SHOWN_CHARACTERS:
        return plain
    return text[: SHOWN_CHARACTERS - 3] + "..."


def encodable(text: str) -> str:
    """Return ``text`` without lone surrogates, which JSON can carry and UTF-8 cannot.

    And no longer than is read: a name that was sent may have a hundred thousand letters.

    Examples
    --------
    >>> encodable(chr(0xD800) + "a")
    '?a'
    """
    told = text if len(text) <= TOLD_CHARACTERS else text[: TOLD_CHARACTERS - 3] + "..."
    return told.encode("utf-8", "replace").decode("utf-8")


def _below(node: object, step: str | int) -> object:
    if isinstance(node, Mapping):
        return node.get(step, _ABSENT)
    if isinstance(node, list) and isinstance(step, int) and 0 <= step < len(node):
        return node[step]
    return _ABSENT


def _alike(value: object, given: object) -> bool:
    """Whether both are numbers, or lists of as many numbers."""
    if value is given:  # also where it is nested deeper than Python can follow
        return True
    if isinstance(value, Sequence) and isinstance(given, list) and not isinstance(value, str):
        return len(value) == len(given) and all(map(_alike, value, given))
    return _is_number(value) and _is_number(given)


def _is_number(value: object) -> bool:
    return isinstance(value, int | float) and not isinstance(value, bool)


def _plain(value: object, depth: int) -> object:
    if value is None or isinstance(value, bool):
        return value
    if isinstance(value, str):
        return encodable(value[: SHOWN_CHARACTERS + 1])
    if isinstance(value, int):
        return value if abs(value) <= _LARGEST_INTEGER else _large_integer(value)
    if isinstance(value, float):
        return value if math.isfinite(value) else _name_of_not_finite(value)
    if depth == _SHOWN_DEPTH:
        return "..."
    if isinstance(value, Mapping):
        pairs = list(value.items())[:_SHOWN_ITEMS]
        return {encodable(str(key)[:100]): _plain(item, depth + 1) for key, item in pairs}
    if isinstance(value, Sequence) and not isinstance(value, bytes | bytearray):
        kept = [_plain(item, depth + 1) for item in value[:_SHOWN_ITEMS]]
        return [*kept, "..."] if len(value) > _SHOWN_ITEMS else kept
    return encodable(repr(value)[: SHOWN_CHARACTERS + 1])


def _name_of_not_finite(value: float) -> str:
    if math.isnan(value):
        return "NaN"
    return "Infinity" if value > 0 else "-Infinity"


def _large_integer(value: int) -> str:
    # Printing an integer of thousands of digits is refused by Python itself; its size is not.
    return str(value) if value.bit_length() < 256 else f"integer of {value.bit_length()} bits"
