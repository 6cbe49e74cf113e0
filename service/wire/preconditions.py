"""The two headers that make a request depend on the state it finds: If-Match and If-None-Match.

Left out: comparing with what is stored; dates, which are too coarse for revisions.
"""

import re
from typing import Literal

from starlette.requests import Request

Tags = frozenset[str] | Literal["*"]

_TAG = re.compile(r'(W/)?"([\x21\x23-\x7e]*)"', re.ASCII)


def entity_tag(version: str) -> str:
    """Return the strong ETag of a version.

    Examples
    --------
    >>> entity_tag("3-1a2b3c4d")
    '"3-1a2b3c4d"'
    """
    return f'"{version}"'


def if_match(request: Request) -> Tags | None:
    """Return the versions one of which must be the present one; None when the header is absent.

    The comparison is the strong one: weak and malformed tags match nothing, so a header of
    nothing else gives the empty set, which no state satisfies.

    Source: RFC 9110, sections 8.8.3.2 and 13.1.1.
    """
    return _tags(request, "if-match", weak_too=False)


def if_none_match(request: Request) -> Tags | None:
    """Return the versions the caller has already; weak tags count (RFC 9110, section 13.1.2)."""
    return _tags(request, "if-none-match", weak_too=True)


def _tags(request: Request, header: str, *, weak_too: bool) -> Tags | None:
    lines = request.headers.getlist(header)
    if not lines:
        return None
    text = ",".join(lines)
    if text.strip() == "*":
        return "*"
    # No version contains a comma, so a tag cut in two by this matches nothing, as it should.
    found = (_TAG.fullmatch(part.strip()) for part in text.split(","))
    return frozenset(tag[2] for tag in found if tag and (weak_too or not tag[1]))
