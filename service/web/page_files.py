"""The files of the pages: as they stand in the tree, and as they are sent.

Idea: what modules and style sheets say to their authors is a fifth of them, and nothing to a
browser: comments that stand on lines of their own are left out as they are sent. The lines stay,
empty, so that a message of a browser's console names the line of the file.
Left out: addresses and headers (screens.py), the frames of pages (page_frames.py).
"""

import re
from functools import cache
from importlib import resources

_FOLDER = "service.web.static.pages"
_COMMENT = re.compile(r"^[ \t]*(?://.*|/\*(?:(?!\*/)[\s\S])*\*/[ \t]*)$", re.MULTILINE)
_WITH_COMMENTS = (".js", ".css")


@cache
def files() -> dict[str, bytes]:
    """Return the files of the pages by name, as they were when first asked for."""
    found = resources.files(_FOLDER).iterdir()
    return {one.name: one.read_bytes() for one in found if one.is_file()}


@cache
def sent(name: str) -> bytes:
    """Return a file as it is sent.

    Raises
    ------
    KeyError : there is none of this name.
    """
    content = files()[name]
    if not name.endswith(_WITH_COMMENTS):
        return content
    return without_comments(content.decode("utf-8")).encode("utf-8")


def without_comments(text: str) -> str:
    r"""Return a module or a style sheet without the comments that have lines to themselves.

    Examples
    --------
    >>> without_comments("/** Twice.\n * @param {number} a\n */\nf = (a) => 2 * a; // so\n")
    '\n\n\nf = (a) => 2 * a; // so\n'
    >>> without_comments("/* One. */ .a { top: 0 }\n  /* Two. */\n")
    '/* One. */ .a { top: 0 }\n\n'
    """
    return _COMMENT.sub(lambda comment: "\n" * comment[0].count("\n"), text)
