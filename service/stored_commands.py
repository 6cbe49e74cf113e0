"""What ``armspan arms add FILE...``, ``armspan arms list`` and the same for cells do.

Left out: the command line itself; they work beside a running server, on the same database.
"""

from collections.abc import Callable, Iterable, Sequence
from contextlib import closing
from pathlib import Path
from typing import Any, TextIO, TypeVar

from pydantic import ValidationError

from kinematics.errors import KinematicsError
from service.details import pointer
from service.errors import NameTaken, ServiceError, Unparseable
from service.operations.arms import Arms
from service.operations.cells import Cells
from service.operations.stored import Stored, StoredDocument
from service.operations.stored_refusals import version_of
from service.problems import problem_of
from service.settings import Settings
from service.storage.opening import OpenStorage, open_storage
from service.storage.ports import Kind, Revision
from service.wire.arms import read_arm
from service.wire.body import parse_json
from service.wire.cells import read_cell
from service.wire.stored_arms import driven_rows

Given = TypeVar("Given")
Found = TypeVar("Found")

_REFUSALS = (ServiceError, KinematicsError, ValidationError)
_PAGE = 200
_HEADINGS: dict[Kind, tuple[str, ...]] = {
    "arm": ("name", "version", "joints", "convention", "units", "status", "title"),
    "cell": ("name", "version", "arms", "frames", "units", "title"),
}


def add_stored(settings: Settings, kind: Kind, files: Sequence[str | Path], out: TextIO) -> int:
    """Store the arm or cell of each file (a JSON object), a line to ``out`` each.

    All files are read first; if one cannot be used, nothing is stored. What is stored already
    with the same digest counts as added, so the command can be repeated.

    Returns
    -------
    0 : all are stored. 1 : some file was refused, or a name is taken by another one.

    Raises
    ------
    StorageUnusable : the database cannot be opened at all.
    """
    read = read_arm if kind == "arm" else read_cell

    def first_look(path: Path) -> object:
        document = _document(path)
        # No database is made for what cannot be used; only an arm in a cell has to wait for it.
        if not _names_cell(document):
            read(document)
        return document

    try:
        documents = _each({str(file): Path(file) for file in files}, first_look, out)
        with closing(open_storage(settings, serving=False)) as opened:
            stored = _stored(opened, kind)
            naming = {file: given for file, given in documents.items() if _names_cell(given)}
            _each(naming, stored.read, out)
            return max((_add(stored, *each, out) for each in documents.items()), default=0)
    except _NothingStoredError:
        print("nothing was stored", file=out)
        return 1


def list_stored(settings: Settings, kind: Kind, out: TextIO) -> int:
    """Print a line for each stored arm or cell to ``out``; return the exit code 0.

    Raises
    ------
    StorageUnusable : the database cannot be opened at all.
    """
    with closing(open_storage(settings, serving=False)) as opened:
        for notice in opened.notices:
            print(notice, file=out)
        lines = [_line(kind, record) for record in _all(_stored(opened, kind))]
        if not lines:
            print(f"no {kind}s in {opened.description}", file=out)
            return 0
        _print_columns([_HEADINGS[kind], *lines], out)
        return 0


class _NothingStoredError(Exception):
    """Some file was refused, and that has been told."""


def _each(given: dict[str, Given], step: Callable[[Given], Found], out: TextIO) -> dict[str, Found]:
    """Return what becomes of each file; all that are refused are told first."""
    found: dict[str, Found] = {}
    for file, content in given.items():
        try:
            found[file] = step(content)
        except _REFUSALS as error:
            _print_refusal(file, error, out)
    if len(found) < len(given):
        raise _NothingStoredError
    return found


def _document(path: Path) -> object:
    try:
        return parse_json(path.read_bytes())
    except OSError as error:
        raise Unparseable(f"the file cannot be read ({error.strerror})") from error


def _names_cell(document: object) -> bool:
    return isinstance(document, dict) and document.get("cell") is not None


def _stored(opened: OpenStorage, kind: Kind) -> Stored[Any]:
    cells = Cells(opened.cells, opened.arms, read_arm)
    return cells if kind == "cell" else Arms(opened.arms, read_arm, cells)


def _add(stored: Stored[Any], file: str, document: object, out: TextIO) -> int:
    try:
        added = stored.create(document, reason=f"armspan {stored.kind}s add")
    except NameTaken as error:
        present = _present(stored, error)
        if present is not None and present.record.digest == stored.read(document).digests.digest:
            record = present.record
            print(f"{file}: {record.name} is stored already, {version_of(record)}", file=out)
            return 0
        _print_refusal(file, error, out)
        return 1
    except _REFUSALS as error:
        _print_refusal(file, error, out)
        return 1
    print(f"{file}: {added.record.name} stored, {version_of(added.record)}", file=out)
    return 0


def _present(stored: Stored[Any], error: NameTaken) -> StoredDocument[Any] | None:
    try:
        return stored.get(str(error.value))
    except ServiceError:
        return None


def _all(stored: Stored[Any]) -> Iterable[Revision]:
    after = ""
    while True:
        page = stored.page(after, _PAGE)
        yield from page.records
        if not page.more:
            return
        after = page.records[-1].name


def _line(kind: Kind, record: Revision) -> tuple[str, ...]:
    document = record.document
    title = document.get("title") or ""
    if kind == "cell":
        counts = (str(len(document.get(what, ()))) for what in ("arms", "frames"))
        return (record.name, version_of(record), *counts, document["units"], title)
    return (
        record.name,
        version_of(record),
        str(driven_rows(document)),
        document["convention"],
        document["units"],
        document.get("status") or "-",
        title,
    )


def _print_columns(lines: Sequence[tuple[str, ...]], out: TextIO) -> None:
    widths = [max(map(len, column)) for column in zip(*lines, strict=True)]
    for line in lines:
        cells = (cell.ljust(width) for cell, width in zip(line, widths, strict=True))
        print("  ".join(cells).rstrip(), file=out)


def _print_refusal(file: str, error: Exception, out: TextIO) -> None:
    for detail in problem_of(error).errors:
        place = f" (at {pointer(detail.where)})" if detail.where else ""
        way_out = f": {detail.way_out}" if detail.way_out else ""
        print(f"{file}: {detail.say}{place}{way_out}", file=out)
