"""The frames of all pages: HTML that is painted at once, with its words, header and footer in it.

Idea: a frame names what belongs in it, ``{{board.title}}``; words come from ``words.js``, where
strict JSON stands between the first brace and the last, so that one file is to be translated.
Modules a page imports, straight or by others, are named in it, so that all are asked for at once.
Left out: addresses and headers (screens.py, pages.py), and all content that changes.
"""

import re
from collections.abc import Mapping
from functools import cache
from html import escape
from typing import Any

import orjson

from service.cautions import CAUTIONS, NOT_A_SAFETY_FUNCTION
from service.web.page_answers import version_here
from service.web.page_files import files

_IMPORT = re.compile(r"^(?:im|ex)port\b[^;]*?\bfrom \"\./([a-z_]+\.js)\";", re.MULTILINE)
_MODULE = re.compile(r'<script type="module" src="/pages/([a-z_]+\.js)">')
_PLACE = re.compile(r"\{\{([a-z_.]+)\}\}")
_WORDS = re.compile(r"^export const WORDS = (\{$.*?^\});$", re.DOTALL | re.MULTILINE)


@cache
def words() -> dict[str, dict[str, Any]]:
    """Return all words of the pages, by page and key.

    Examples
    --------
    >>> words()["shell"]["name"]
    'Armspan'
    """
    found = _WORDS.search(files()["words.js"].decode("utf-8"))
    assert found is not None, "words.js: no WORDS"
    parsed: dict[str, dict[str, Any]] = orjson.loads(found[1])
    return parsed


def framed(template: str, path: str, values: Mapping[str, str], *, bare: bool = False) -> bytes:
    """Return a page: its places filled, the link to itself in the header marked.

    Parameters
    ----------
    template : with places ``{{...}}``: ``section.key`` of the words, ``head`` (what all pages
        begin with), ``header``, ``footer``, ``preload``, or one of ``values``.
    path : of the page itself.
    values : HTML, escaped where it is text.
    bare : whether only the content is shown.
    """
    text = template
    for part in ("head", "header", "footer"):
        text = text.replace("{{" + part + "}}", files()[f"{part}.html"].decode("utf-8").strip())
    known = {
        "cautions": "".join(f"<li>{escape(line)}</li>" for line in CAUTIONS),
        "caution": escape(NOT_A_SAFETY_FUNCTION),
        "version": escape(said("shell.version", version=version_here())),
        "preload": _preload(template),
        **values,
    }
    text = _PLACE.sub(lambda place: _filled(place[1], known), text)
    here = f'<a href="{path}">'
    text = text.replace(here, f'<a href="{path}" aria-current="page">')
    return (text.replace("<html ", "<html data-bare ", 1) if bare else text).encode("utf-8")


def _filled(name: str, known: Mapping[str, str]) -> str:
    return known[name] if name in known else escape(said(name))


def said(key: str, **values: str) -> str:
    """Return the words of a key, with their own places filled.

    Examples
    --------
    >>> said("shell.version", version="1.2.0")
    'Armspan 1.2.0'
    """
    section, _, name = key.partition(".")
    text = str(words()[section][name])
    for place, value in values.items():
        text = text.replace("{" + place + "}", value)
    return text


def _preload(template: str) -> str:
    """Return links to all modules that a page's own module imports, straight or by others."""
    waiting = _MODULE.findall(template)
    found: list[str] = []
    while waiting:
        name = waiting.pop(0)
        if name in found or name not in files():
            continue
        found.append(name)
        waiting += _IMPORT.findall(files()[name].decode("utf-8"))
    return "".join(f'<link rel="modulepreload" href="/pages/{name}">\n' for name in found).strip()
