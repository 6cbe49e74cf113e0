"""What the routes of a kind of stored document say of themselves in the OpenAPI document.

Left out: answering (stored.py).
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

from pydantic import BaseModel

from service.storage.ports import Kind, Revision
from service.web.document import documented, parameter
from service.wire import paging

LONGEST_SAID = 200

_SIZE = {
    "type": "integer",
    "minimum": 1,
    "maximum": paging.LARGEST_SIZE,
    "default": paging.DEFAULT_SIZE,
}
_PAGES = (
    parameter("page_size", "How many to list at most.", _SIZE),
    parameter("page_token", "The next_page_token of the page before."),
)
_SAID = tuple(
    parameter(name, meaning, {"type": "string", "maxLength": LONGEST_SAID})
    for name, meaning in (("author", "Who does this."), ("reason", "Why; kept with the revision."))
)
_IF_NONE_MATCH = parameter("If-None-Match", "ETags the caller has; 304.", where="header")
_IF_MATCH = parameter("If-Match", "The ETag of the revision this is for, or *.", where="header")
_IF_ABSENT = parameter("If-None-Match", "* stores only a name not in use.", where="header")
_NUMBER = parameter("n", "Number of the revision.", {"type": "integer", "minimum": 1}, where="path")
_TAGGED = {"ETag": "Strong; revision and digest."}
_LINKED = {"Link": "The next page, if there is one."}


@dataclass(frozen=True)
class StoredKind:
    """A kind of stored document, as its routes need to know it.

    Attributes
    ----------
    kind, a : one of them, without and with its article.
    document : model of what is stored.
    answer, list_answer, revisions_answer : models of what is answered.
    shown : a revision and what was read from it -> an ``answer``.
    listed : revisions and the next token -> a ``list_answer``.
    on_writing, on_removing : what else these do, a sentence for people, or "".
    """

    kind: Kind
    a: str
    document: type[BaseModel]
    answer: type[BaseModel]
    list_answer: type[BaseModel]
    revisions_answer: type[BaseModel]
    shown: Callable[[Revision, Any], dict[str, object]]
    listed: Callable[[Sequence[Revision], str | None], dict[str, object]]
    on_writing: str = ""
    on_removing: str = ""

    def listing(self) -> dict[str, Any]:
        """Say what a list is."""
        return documented(
            f"List stored {self.kind}s",
            f"Stored {self.kind}s by name, a page at a time.",
            examples=f"{self.kind}s",
            answer=self.list_answer,
            parameters=_PAGES,
            statuses=(503,),
            headers=_LINKED,
        )

    def creating(self) -> dict[str, Any]:
        """Say what a POST does."""
        return documented(
            f"Store a new {self.kind}",
            f"Stores the {self.kind} under its name as the first revision, or the next after a "
            "removal.",
            request=self.document,
            examples=f"{self.kind}s-create",
            answer=self.answer,
            parameters=_SAID,
            statuses=(409, 503),
            success=201,
            headers={"Location": f"Where the {self.kind} is now.", **_TAGGED},
        )

    def getting(self) -> dict[str, Any]:
        """Say what a GET answers."""
        return documented(
            f"Get {self.a}",
            "The newest revision. With If-None-Match an unchanged one is not sent again.",
            examples=self.kind,
            answer=self.answer,
            parameters=(_IF_NONE_MATCH,),
            statuses=(304, 404, 422, 503),
            headers=_TAGGED,
        )

    def replacing(self) -> dict[str, Any]:
        """Say what a PUT does."""
        return documented(
            f"Store the next revision of {self.a}",
            f"With If-Match the {self.kind} must be as the caller knows it; with If-None-Match: * "
            "it must not be there yet (then the answer is 201). One of the two is required."
            + self.on_writing,
            request=self.document,
            examples=f"{self.kind}-replace",
            answer=self.answer,
            parameters=(*_SAID, _IF_MATCH, _IF_ABSENT),
            statuses=(412, 428, 503),
            headers=_TAGGED,
            may_create=True,
        )

    def removing(self) -> dict[str, Any]:
        """Say what a DELETE does."""
        return documented(
            f"Remove {self.a}",
            "The name is free again and its revisions stay; their numbers are not used again."
            + self.on_removing,
            parameters=(*_SAID, _IF_MATCH),
            statuses=(404, 412, 503, *((409,) if self.on_removing else ())),
            success=204,
        )

    def listing_revisions(self) -> dict[str, Any]:
        """Say what the list of revisions is."""
        return documented(
            f"List the revisions of {self.a}",
            "Every revision of the name, oldest first, those before a removal too.",
            examples=f"{self.kind}-revisions",
            answer=self.revisions_answer,
            parameters=_PAGES,
            statuses=(404, 503),
            headers=_LINKED,
        )

    def getting_revision(self) -> dict[str, Any]:
        """Say what one revision is."""
        return documented(
            f"Get one revision of {self.a}",
            "A revision never changes, so this answer may be kept for ever.",
            examples=f"{self.kind}-revision",
            answer=self.answer,
            parameters=(_NUMBER, _IF_NONE_MATCH),
            statuses=(304, 404, 422, 503),
            headers=_TAGGED,
        )
