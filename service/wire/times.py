"""Times as they are written in requests (RFC 3339), read into UTC.

Left out: how they are answered (stored.py, ``time_of``).
"""

import re
from datetime import UTC, datetime

from service.details import Location
from service.errors import UnusableValue

_TIME = re.compile(r"\d{4}-\d\d-\d\d[Tt]\d\d:\d\d:\d\d(\.\d{1,9})?([Zz]|[+-]\d\d:\d\d)", re.ASCII)
# Digits of a second that a time here can hold; further ones are left out.
_DECIMALS = re.compile(r"(\.\d{6})\d+", re.ASCII)


def time_in(text: str, where: tuple[str | int, ...], location: Location = "body") -> datetime:
    """Return the UTC time that a text says.

    A raw ``+`` in a query arrives as a blank, and is read as the ``+`` it was.

    Raises
    ------
    UnusableValue : no time, or one without its distance from UTC.

    Examples
    --------
    >>> time_in("2026-12-01T07:00:00.25+01:00", ("from",)).isoformat()
    '2026-12-01T06:00:00.250000+00:00'
    """
    mended = text.replace(" ", "+")
    try:
        if _TIME.fullmatch(mended):
            return datetime.fromisoformat(_DECIMALS.sub(r"\1", mended).upper()).astimezone(UTC)
    except (ValueError, OverflowError):
        pass  # the 30th of February, the year 0
    raise UnusableValue(
        f'"{where[-1]}" is no time',
        where=where,
        location=location,
        value=text,
        way_out="write it like 2026-12-01T06:00:00.000Z",
    )


def utc_at(unix_ms: float) -> datetime:
    """Return the UTC time of Unix milliseconds.

    Examples
    --------
    >>> utc_at(1796104800250.0).isoformat()
    '2026-12-01T06:00:00.250000+00:00'
    """
    return datetime.fromtimestamp(unix_ms / 1000.0, UTC)
