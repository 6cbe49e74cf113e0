"""Examples kept as files: read into the OpenAPI document, run by the tests.

Left out: whether an answer is right; the tests hold that.
"""

import json
from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import cache
from pathlib import Path
from typing import Any


@dataclass(frozen=True, slots=True)
class Example:
    """One case: a request and its answer, of which text stands for txt and csv.

    Attributes
    ----------
    title : one line for people.
    request : the body; of a question by query string ``{"path": {...}, "query": {...}}``.
    answer : the body of the answer.
    path : what stands in the address for its parameters, where the request is a body; the arm that
        was sent values, where the address names none.
    sent : joint values that the arm was sent before; None: none.
    survey : what was asked of the survey that is meant, which has succeeded; None: none.
    """

    title: str
    request: Any
    answer: Any
    path: Mapping[str, str] = field(default_factory=dict)
    sent: Mapping[str, Any] | None = None
    survey: Mapping[str, Any] | None = None

    @property
    def query(self) -> Mapping[str, Any]:
        """The query parameters, none where the request is a body."""
        asked = self.request.get("query") if isinstance(self.request, dict) else None
        return asked if isinstance(asked, dict) else {}

    @property
    def media(self) -> str:
        """The media type of the answer."""
        if not isinstance(self.answer, str):
            return "application/json"
        return "text/csv" if self.query.get("format") == "csv" else "text/plain"


def folder() -> Path:
    """Return where the examples are: within an installed package, else beside the source.

    Raises
    ------
    LookupError : neither place is there.
    """
    here = Path(__file__).resolve().parent
    for place in (here / "openapi_examples", here.parents[1] / "openapi_examples"):
        if place.is_dir():
            return place
    raise LookupError("openapi_examples is neither in the package nor beside it")


@cache
def examples_of(route: str) -> Mapping[str, Example]:
    """Return the cases of a folder by their names.

    Raises
    ------
    LookupError : the folder is missing or holds no case.
    """
    cases = {
        path.stem: Example(**json.loads(path.read_text(encoding="utf-8")))
        for path in sorted((folder() / route).glob("*.json"))
    }
    if not cases:
        raise LookupError(f"no examples in {folder() / route}")
    return cases
