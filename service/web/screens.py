"""The pages on screens: board, sheet and reach page of an arm, and the files they are made of.

Idea: nothing of what they show comes in by here; their modules ask the public interface, as any
client can. A name of no arm is a page too, with the names most like it, and so is an address of
no page.
Left out: the frames themselves (page_frames.py); the documentation (pages.py).
"""

from functools import lru_cache
from html import escape
from typing import Any
from urllib.parse import quote

from fastapi import APIRouter
from starlette.concurrency import run_in_threadpool
from starlette.requests import Request
from starlette.responses import RedirectResponse, Response

from service.errors import UnknownArm, UnknownPath
from service.web.page_answers import page_answer
from service.web.page_files import files, sent
from service.web.page_frames import framed, said
from service.wire.query import known_parameters

router = APIRouter(include_in_schema=False)
_READ = ["GET", "HEAD"]
_MEDIA_TYPES = {"js": "text/javascript", "css": "text/css", "svg": "image/svg+xml"}
# Pages keep what the viewer chose in their address: any parameter is theirs.
_BARE = "bare"
_PAGES_KEPT = 256


def page_policy(frame_ancestors: str) -> dict[str, str]:
    """Return the header that says what a page may do, and in whose frames it may be shown.

    Parameters
    ----------
    frame_ancestors : as the operator set them; empty: nobody's.

    Examples
    --------
    >>> page_policy("")["Content-Security-Policy"].rsplit("; ", 1)[1]
    "frame-ancestors 'none'"
    """
    rules = (
        "default-src 'none'; script-src 'self'; style-src 'self'; img-src 'self' data: blob:; "
        "connect-src 'self'; base-uri 'none'; form-action 'self'; "
        f"frame-ancestors {frame_ancestors or _NOBODY}"
    )
    return {"Content-Security-Policy": rules}


_NOBODY = "'none'"


@router.api_route("/", methods=_READ)
async def board(request: Request) -> Response:
    """Answer the board: a card for each arm."""
    return _answered(request, "board", "")


@router.api_route("/arms/{arm}", methods=_READ)
async def sheet(request: Request) -> Response:
    """Answer the sheet of an arm."""
    return await _of_arm(request, "sheet")


@router.api_route("/arms/{arm}/reach", methods=_READ)
async def reach_page(request: Request) -> Response:
    """Answer the reach page of an arm."""
    return await _of_arm(request, "reach")


@router.api_route("/arms/{arm}/", methods=_READ)
async def sheet_with_stroke(request: Request) -> Response:
    """Answer where the sheet is whose address was typed with a stroke at its end."""
    return _without_stroke(request, "")


@router.api_route("/arms/{arm}/reach/", methods=_READ)
async def reach_page_with_stroke(request: Request) -> Response:
    """Answer where the reach page is whose address was typed with a stroke at its end."""
    return _without_stroke(request, "/reach")


@router.api_route("/pages/{name}", methods=_READ)
async def page_part(request: Request) -> Response:
    """Answer a module or a style sheet of the pages."""
    known_parameters(request, ())
    name = request.path_params["name"]
    media_type = _MEDIA_TYPES.get(name.rpartition(".")[2])
    if media_type is None or name not in files():
        raise UnknownPath("no such file", location="path", value=name)
    return page_answer(request, sent(name), media_type)


def is_for_people(request: Request) -> bool:
    """Return whether a person's browser asks, at an address that is none of the interface."""
    is_page = request.method in _READ and not request.url.path.startswith("/v1")
    return is_page and "text/html" in request.headers.get("accept", "")


def no_such_page(request: Request) -> Response:
    """Answer that there is no such page."""
    why = said("shell.no_page", name=_shown(request.url.path))
    return _nothing(request, said("shell.unknown_page"), why, "")


def _without_stroke(request: Request, page: str) -> Response:
    name = quote(request.path_params["arm"], safe="")
    query = f"?{request.url.query}" if request.url.query else ""
    return RedirectResponse(f"/arms/{name}{page}{query}", status_code=308)


async def _of_arm(request: Request, page: str) -> Response:
    name, arms = request.path_params["arm"], request.app.state.arms
    try:
        await run_in_threadpool(arms.get, name)
    except UnknownArm:
        return await _unknown(request, name)
    return _answered(request, page, name)


def _answered(request: Request, page: str, arm: str) -> Response:
    content = _page(page, arm, _BARE in request.query_params)
    return page_answer(request, content, "text/html", _policy_of(request))


async def _unknown(request: Request, name: str) -> Response:
    """Answer that there is no arm of a name, and which names are most like it."""
    like: list[str] = await run_in_threadpool(request.app.state.arms.names_like, name)
    links = "".join(f'<li><a href="/arms/{quote(one)}">{escape(one)}</a></li>' for one in like)
    key = "shell.like_it" if like else "shell.nothing_like_it"
    told = f"<p>{escape(said(key))}</p>" + (f"<ul>{links}</ul>" if like else "")
    return _nothing(request, said("shell.unknown"), said("shell.no_arm", name=_shown(name)), told)


def _nothing(request: Request, what: str, why: str, like: str) -> Response:
    values = {"what": escape(what), "said": escape(why), "like": like}
    bare = _BARE in request.query_params
    content = framed(_text("unknown"), "", values, bare=bare)
    return page_answer(request, content, "text/html", _policy_of(request), status=404)


@lru_cache(maxsize=_PAGES_KEPT)
def _page(page: str, arm: str, bare: bool) -> bytes:
    return framed(_text(page), "/" if page == "board" else "", {"arm": escape(arm)}, bare=bare)


def _text(page: str) -> str:
    return files()[f"{page}.html"].decode("utf-8")


def _policy_of(request: Request) -> dict[str, str]:
    settings: Any = request.app.state.settings
    return page_policy(settings.frame_ancestors)


def _shown(name: str) -> str:
    return name if len(name) <= _LONGEST_SHOWN else f"{name[:_LONGEST_SHOWN]}..."


_LONGEST_SHOWN = 80
