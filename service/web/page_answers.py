"""How a page or a file of one is answered: whole, with an ETag, asked for anew each time.

Left out: what stands in it.
"""

import gzip
import hashlib
import re
from collections.abc import Mapping
from functools import lru_cache
from importlib.metadata import PackageNotFoundError, version

from starlette.requests import Request
from starlette.responses import Response

from service.wire.preconditions import entity_tag, if_none_match

_DIGESTS_KEPT = 256


def page_answer(
    request: Request,
    content: bytes,
    media_type: str,
    headers: Mapping[str, str] | None = None,
    *,
    status: int = 200,
) -> Response:
    """Return the answer, 304 where the caller has it already; compressed for whom that suits."""
    found = _digest(content)
    kept = {"Cache-Control": "no-cache", "Vary": "Accept-Encoding", **(headers or {})}
    if _takes_gzip(request):
        content, found = _compressed(content), f"{found}-gzip"
        kept["Content-Encoding"] = "gzip"
    kept["ETag"] = entity_tag(found)
    known = if_none_match(request)
    if status == 200 and (known == "*" or found in (known or ())):
        return Response(status_code=304, headers=kept)
    return Response(content, status_code=status, media_type=media_type, headers=kept)


def version_here() -> str:
    """Return the version of the installed distribution, or ``0+source`` in a checkout."""
    try:
        return version("armspan")
    except PackageNotFoundError:
        return "0+source"


def _takes_gzip(request: Request) -> bool:
    """Return whether the caller takes gzip (RFC 9110, section 12.5.3); ``*`` is not taken up."""
    for said in request.headers.get("accept-encoding", "").lower().split(","):
        coding, _, weight = said.partition(";")
        if coding.strip() == "gzip":
            return not _NOT_AT_ALL.fullmatch(weight.strip())
    return False


_NOT_AT_ALL = re.compile(r"q\s*=\s*0(?:\.0*)?")


@lru_cache(maxsize=_DIGESTS_KEPT)
def _compressed(content: bytes) -> bytes:
    # Without a time in it the same content gives the same bytes.
    return gzip.compress(content, compresslevel=9, mtime=0)


@lru_cache(maxsize=_DIGESTS_KEPT)
def _digest(content: bytes) -> str:
    return hashlib.sha256(content).hexdigest()[:16]
