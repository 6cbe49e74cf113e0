"""Pages of a list: how many, after which, and the token and link that lead to the next.

Left out: what is listed, and in which order.
"""

import base64
import binascii
import re
from collections.abc import Mapping
from urllib.parse import urlencode

from starlette.requests import Request

from service.errors import UnusableValue
from service.wire.query import whole_number

PAGE_PARAMETERS = frozenset({"page_size", "page_token"})
DEFAULT_SIZE = 50
LARGEST_SIZE = 200


def page_size(parameters: Mapping[str, str]) -> int:
    """Return the number of entries asked for.

    Examples
    --------
    >>> page_size({}), page_size({"page_size": "7"})
    (50, 7)
    """
    if "page_size" not in parameters:
        return DEFAULT_SIZE
    size = whole_number(parameters["page_size"], "page_size")
    if 1 <= size <= LARGEST_SIZE:
        return size
    raise UnusableValue(
        f"page_size must be 1 to {LARGEST_SIZE}",
        where=("page_size",),
        location="query",
        value=size,
        way_out=f"give 1 to {LARGEST_SIZE}, or leave it out",
    )


def token_of(last: str) -> str:
    """Return the token of the page that follows ``last``.

    Examples
    --------
    >>> after_token({"page_token": token_of("press-arm")}, re.compile("[a-z-]+"))
    'press-arm'
    """
    return base64.urlsafe_b64encode(last.encode("ascii")).decode("ascii").rstrip("=")


def after_token(parameters: Mapping[str, str], keys: re.Pattern[str]) -> str:
    """Return what the page asked for follows; "" for the first page.

    Raises
    ------
    UnusableValue : a token that ``token_of`` did not make of one of the list's ``keys``.
    """
    if "page_token" not in parameters:
        return ""
    token = parameters["page_token"]
    try:
        padded = token.encode("ascii") + b"=" * (-len(token) % 4)
        last = base64.b64decode(padded, altchars=b"-_", validate=True).decode("ascii")
    except (binascii.Error, UnicodeError):
        last = ""
    if keys.fullmatch(last) and token_of(last) == token:
        return last
    raise UnusableValue(
        "page_token is none of this list",
        where=("page_token",),
        location="query",
        value=token,
        way_out="take next_page_token from the page before, or leave it out",
    )


def next_link(request: Request, parameters: Mapping[str, str], token: str | None) -> dict[str, str]:
    """Return the ``Link`` header to the next page (RFC 8288), nothing on the last one."""
    if token is None:
        return {}
    query = urlencode({**parameters, "page_token": token})
    return {"link": f'<{request.url.path}?{query}>; rel="next"'}
