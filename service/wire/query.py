"""Parameters of a query string, read the way controllers print them.

Left out: which parameters an address has; its handler says so.
"""

import math
import re
from collections.abc import Collection, Iterable, Sequence
from urllib.parse import parse_qsl

from starlette.requests import HTTPConnection, Request

from kinematics.known_names import way_out_of_unknown
from service.details import Detail
from service.errors import ServiceError, UnknownField, Unparseable, UnusableValue

# As controllers print them: 1.5E+01, +3.0, 007, .5, 5. - and "nan", so that it is refused by name.
_NUMBER = re.compile(r"[+-]?(\d+(\.\d*)?|\.\d+)([eE][+-]?\d+)?", re.ASCII)
_NUMBERS = re.compile(rf"{_NUMBER.pattern}(,{_NUMBER.pattern})*", re.ASCII)
NOT_FINITE = re.compile(r"[+-]?(nan|inf|infinity|1\.#\w+)", re.ASCII | re.IGNORECASE)
"""As programs print what is no number."""
_DECIMAL_COMMA = re.compile(r"[+-]?\d+,\d+", re.ASCII)
_WHOLE = re.compile(r"[+-]?\d+", re.ASCII)
# Beyond 64 bits no field of an answer could give it back.
_MOST_DIGITS = 18


class NotFiniteParameter(UnusableValue):
    """A parameter that says NaN or infinity."""

    code = "not-finite"


def known_parameters(
    request: Request, allowed: Collection[str], *, offered: Collection[str] | None = None
) -> dict[str, str]:
    """Return the query's parameters; refuse unknown and repeated ones, all of them at once.

    Parameters
    ----------
    offered : the names a refusal may offer, where those are not all of ``allowed``.

    Raises
    ------
    UnknownField : with the nearest known name as the way out.
    UnusableValue : a parameter stands twice.
    """
    return known_ones(query_pairs(request), allowed, offered=offered)


def query_pairs(request: HTTPConnection) -> list[tuple[str, str]]:
    """Return names and texts of the query in its order, decoded as forms are (WHATWG URL, 5.1)."""
    raw: bytes = request.scope["query_string"]
    if b"%" in raw or b"+" in raw:
        return parse_qsl(raw.decode("latin-1"), keep_blank_values=True)
    # Nothing to decode, as in most of what controllers send.
    pairs = [part.partition("=") for part in raw.decode("latin-1").split("&") if part]
    return [(name, text) for name, _, text in pairs]


def known_ones(
    pairs: Iterable[tuple[str, str]],
    allowed: Collection[str],
    *,
    offered: Collection[str] | None = None,
) -> dict[str, str]:
    """Return a query's parameters; refuse as ``known_parameters`` does."""
    found: dict[str, str] = {}
    wrong: list[Detail] = []
    for name, text in pairs:
        if name not in allowed:
            say = f'unknown parameter "{name}"'
            way_out = way_out_of_unknown(name, allowed if offered is None else offered)
            wrong.append(Detail("unknown-field", say, (name,), "query", text, way_out))
        elif name in found:
            say = f'the parameter "{name}" stands twice'
            wrong.append(Detail("unusable-value", say, (name,), "query", text, "leave one of them"))
        found[name] = text
    if wrong:
        refusal = UnknownField if wrong[0].code == "unknown-field" else UnusableValue
        raise refusal(wrong[0].say, errors=wrong)
    return found


def number(text: str, name: str) -> float:
    """Return the number a parameter says.

    A raw ``+`` in a query arrives as a blank, so one blank before the digits, or after an
    exponent's ``e``, is read as the ``+`` it was.

    Raises
    ------
    Unparseable : no number; a decimal comma is named as such.
    NotFiniteParameter : NaN, infinity, or a number too large for a double.

    Examples
    --------
    >>> number("1.5E+01", "q1"), number(" 3.0", "q1"), number("1.5E 01", "q1"), number("007", "q1")
    (15.0, 3.0, 15.0, 7.0)
    """
    mended = _mended(text)
    if _NUMBER.fullmatch(mended):
        value = float(mended)
        if math.isfinite(value):
            return value
    elif not NOT_FINITE.fullmatch(mended):
        raise _no_number(text, name)
    raise NotFiniteParameter(
        f'"{name}" must be a finite number',
        where=(name,),
        location="query",
        value=text,
        way_out="give a finite number; a failed measurement cannot be computed with",
    )


def numbers(text: str, name: str) -> list[float]:
    """Return the numbers a parameter says, with commas between them; none for an empty text.

    Raises
    ------
    Unparseable, NotFiniteParameter : as ``number`` does.

    Examples
    --------
    >>> numbers("1.5E+01, 3.0,007", "q"), numbers("", "q")
    ([15.0, 3.0, 7.0], [])
    """
    if not text:
        return []
    parts = text.split(",")
    if _NUMBERS.fullmatch(text):
        values = list(map(float, parts))
        if all(map(math.isfinite, values)):
            return values
    return [number(part, name) for part in parts]


def plain_numbers(texts: Sequence[str]) -> list[float] | None:
    """Return the numbers that several parameters say; None if one of them is to be looked at.

    Examples
    --------
    >>> plain_numbers(["1.5E+01", "007"]), plain_numbers([" 3.0", "1"]), plain_numbers(["1,2", "3"])
    ([15.0, 7.0], None, None)
    """
    joined = ",".join(texts)
    if joined.count(",") != len(texts) - 1 or not _NUMBERS.fullmatch(joined):
        return None
    values = list(map(float, texts))
    return values if all(map(math.isfinite, values)) else None


def whole_number(text: str, name: str) -> int:
    """Return the whole number a parameter says.

    Examples
    --------
    >>> whole_number("+12", "tag"), whole_number(" 12", "tag"), whole_number("-012", "tag")
    (12, 12, -12)
    """
    mended = _mended(text)
    if not _WHOLE.fullmatch(mended):
        raise Unparseable(
            f'"{name}" must be a whole number',
            where=(name,),
            location="query",
            value=text,
            way_out="write it like 12",
        )
    digits = mended.lstrip("+-0")
    if len(digits) > _MOST_DIGITS:
        raise UnusableValue(
            f'"{name}" has more than {_MOST_DIGITS} digits',
            where=(name,),
            location="query",
            value=text,
            way_out=f"give at most {_MOST_DIGITS} digits",
        )
    # Of the digits that count alone: with thousands of zeros before them it would not be read.
    value = int(digits or "0")
    return -value if mended.startswith("-") else value


def unusable(name: str, text: str, way_out: str) -> UnusableValue:
    """Return the refusal of a parameter whose text can be read and not be used.

    Examples
    --------
    >>> unusable("rate", "-1", "give a number above 0").say
    'rate=-1 cannot be used'
    """
    return UnusableValue(
        f"{name}={text} cannot be used",
        where=(name,),
        location="query",
        value=text,
        way_out=way_out,
    )


_SWITCH = {"1": True, "true": True, "0": False, "false": False}


def switch(text: str | None, name: str) -> bool:
    """Return whether a parameter says yes; one that is left out says no.

    Raises
    ------
    UnusableValue : neither yes nor no.

    Examples
    --------
    >>> switch("1", "outline"), switch("false", "outline"), switch(None, "outline")
    (True, False, False)
    """
    if text is None:
        return False
    if text not in _SWITCH:
        raise UnusableValue(
            f"{name}={text} is neither 1 nor 0",
            where=(name,),
            location="query",
            value=text,
            way_out=f"{name}=1, or leave it out",
        )
    return _SWITCH[text]


def _mended(text: str) -> str:
    if text.startswith(" "):
        text = "+" + text[1:]
    return re.sub(r"(?<=[eE]) (?=\d)", "+", text)


def _no_number(text: str, name: str) -> ServiceError:
    if _DECIMAL_COMMA.fullmatch(_mended(text)):
        say, way_out = f'"{name}" has a decimal comma', "write a decimal point"
    elif not text.strip():
        say, way_out = f'"{name}" is empty', "give it a number or leave it out"
    else:
        say, way_out = f'"{name}" must be a number', "write it like -12.5 or 1.25e+01"
    return Unparseable(say, where=(name,), location="query", value=text, way_out=way_out)
