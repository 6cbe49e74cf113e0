"""What a sender calls its request, so that the same once more makes nothing twice.

Left out: what was made with a key (the stores keep that).
"""

import hashlib

from starlette.requests import Request

from service.errors import UnusableValue

HEADER = "idempotency-key"
LONGEST_KEY = 200


def senders_key(request: Request) -> str | None:
    """Return the key; None where there is none.

    Raises
    ------
    UnusableValue : empty, too long, or not printable.
    """
    key = request.headers.get(HEADER)
    if key is None or (0 < len(key) <= LONGEST_KEY and key.isprintable()):
        return key
    raise UnusableValue(
        f"the key must be 1 to {LONGEST_KEY} printable characters",
        where=(HEADER,),
        location="header",
        value=key,
        way_out="send a random one, such as a UUID",
    )


def kept_key(key: str | None) -> str | None:
    """Return what is kept of a key: its SHA-256, of one length and safe to store."""
    return None if key is None else hashlib.sha256(key.encode()).hexdigest()


def other_request(key: str | None) -> UnusableValue:
    """Return the refusal of a key that came with another request before."""
    return UnusableValue(
        "this key came with another request before",
        where=(HEADER,),
        location="header",
        value=key,
        way_out="send a key of its own with each request",
    )
