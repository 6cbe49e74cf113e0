"""What is said where a stored arm or cell is not as a request supposes.

Left out: finding that out (stored.py).
"""

from collections.abc import Collection

from service.errors import (
    NameTaken,
    RevisionDiffers,
    StorageUnavailable,
    UnknownArm,
    UnknownRevision,
    UnusableValue,
)
from service.storage.ports import Head, Kind, Revision


def version_of(record: Revision) -> str:
    """Return what tells this state of a document from any other: ``<revision>-<digest>``."""
    return f"{record.revision}-{record.digest}"


def taken(kind: Kind, name: str) -> NameTaken:
    """Return the refusal to create what is there."""
    return NameTaken(
        f"there is {_a(kind)} {name!r} already",
        where=("name",),
        value=name,
        way_out=f"PUT /v1/{kind}s/{name} with If-Match changes it",
    )


def other_name(kind: Kind, name: str, given: str) -> UnusableValue:
    """Return the refusal of a document that bears another name than its address."""
    return UnusableValue(
        f"the {kind} is called {given!r}, but the address says {name!r}",
        where=("name",),
        value=given,
        way_out=f"names cannot be changed: create a new {kind} and remove the old one",
    )


def unknown(kind: Kind, name: str) -> UnknownArm:
    """Return the refusal of a name that is not there."""
    return UnknownArm(
        f"there is no {kind} {name!r}",
        where=(kind,),
        location="path",
        value=name,
        way_out=f"GET /v1/{kind}s lists the {kind}s",
    )


def no_revision(kind: Kind, name: str, number: int) -> UnknownRevision:
    """Return the refusal of a number that the name never had."""
    return UnknownRevision(
        f"{kind} {name!r} has no revision {number}",
        where=("n",),
        location="path",
        value=number,
        way_out=f"GET /v1/{kind}s/{name}/revisions lists them",
    )


def differs(
    kind: Kind, name: str, current: Revision | None, expected: Head | Collection[str]
) -> RevisionDiffers:
    """Return the refusal of a write that expects another head than ``current``."""
    header = "if-none-match" if expected is Head.ABSENT else "if-match"
    if current is None:
        say, way_out = f"there is no {kind} {name!r} now", "create it with If-None-Match: *"
    elif expected is Head.ABSENT:
        say = f"there is {_a(kind)} {name!r} already"
        way_out = f'change it with If-Match: "{version_of(current)}"'
    else:
        say = f"{kind} {name!r} is at {version_of(current)} now"
        way_out = "get it again, put the change into what it has become, and send its ETag"
    return RevisionDiffers(
        say,
        where=(header,),
        location="header",
        value=None if isinstance(expected, Head) else ", ".join(sorted(expected)),
        way_out=way_out,
    )


def too_lively(kind: Kind) -> StorageUnavailable:
    """Return the refusal of a write that others got ahead of again and again."""
    return StorageUnavailable(
        f"the {kind} cannot be stored now: others keep changing the cell and its arms",
        way_out="try again",
    )


def _a(kind: Kind) -> str:
    return f"{'an' if kind == 'arm' else 'a'} {kind}"
