"""Pages of other sites must not send joint values through the browser of whoever has them open.

Idea: browsers say where a page is from, and send forms and open sockets to anybody without asking
first (RFC 6454; RFC 6455, 10.2). Whoever is no browser says nothing. Left out: who may send at all.
"""

from urllib.parse import urlsplit

from starlette.datastructures import Headers

from service.errors import UnusableValue


def refuse_foreign(headers: Headers) -> None:
    """Refuse what a page from elsewhere sends.

    Raises
    ------
    UnusableValue

    Examples
    --------
    >>> refuse_foreign(Headers({"host": "plant:8017", "origin": "http://plant:8017"}))
    """
    origin = headers.get("origin")
    if origin is None or _host(origin) == headers.get("host", "").lower():
        return
    raise UnusableValue(
        "nothing is taken from a page of another site",
        where=("origin",),
        location="header",
        value=origin,
        way_out="send it from a program, or from a page of this service",
    )


def _host(origin: str) -> str:
    try:
        return urlsplit(origin).netloc.lower()
    except ValueError:
        return ""
