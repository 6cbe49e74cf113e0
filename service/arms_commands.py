"""What ``armspan arms add FILE...`` and ``armspan arms list`` do.

Left out: the command line itself; they work beside a running server, on the same database.
"""

from collections.abc import Iterable, Sequence
from contextlib import closing
from pathlib import Path
from typing import TextIO

from pydantic import ValidationError

from kinematics.errors import KinematicsError
from service.details import pointer
from service.errors import NameTaken, ServiceError, Unparseable
from service.operations.arms import Arms, StoredArm, version_of
from service.problems import problem_of
from service.settings import Settings
from service.storage.opening import open_storage
from service.storage.ports import Revision
from service.wire.arms import ReadArm, read_arm
from service.wire.body import parse_json
from service.wire.stored_arms import driven_rows

REASON = "armspan arms add"
_REFUSALS = (ServiceError, KinematicsError, ValidationError)
_PAGE = 200


def add_arms(settings: Settings, files: Sequence[str | Path], out: TextIO) -> int:
    """Store the arm of each file (a JSON object), a line to ``out`` each; return the exit code.

    All files are read first; if one cannot be used, nothing is stored. An arm that is
    stored already with the same digest counts as added, so the command can be repeated.

    Returns
    -------
    0 : every arm is stored. 1 : some file was refused, or a name is taken by another arm.

    Raises
    ------
    StorageUnusable : the database cannot be opened at all.
    """
    documents: list[tuple[str, object]] = []
    refused = False
    for file in files:
        try:
            document = _document(Path(file))
            read_arm(document)
            documents.append((str(file), document))
        except _REFUSALS as error:
            refused = True
            _print_refusal(str(file), error, out)
    if refused:
        print("nothing was stored", file=out)
        return 1
    with closing(open_storage(settings, serving=False)) as opened:
        arms = Arms(opened.storage, read_arm)
        return max((_add(arms, file, document, out) for file, document in documents), default=0)


def list_arms(settings: Settings, out: TextIO) -> int:
    """Print a line for each stored arm to ``out``; return the exit code 0.

    Raises
    ------
    StorageUnusable : the database cannot be opened at all.
    """
    with closing(open_storage(settings, serving=False)) as opened:
        for notice in opened.notices:
            print(notice, file=out)
        arms = Arms(opened.storage, read_arm)
        lines = [_line(record) for record in _all(arms)]
        if not lines:
            print(f"no arms in {opened.description}", file=out)
            return 0
        heading = ("name", "version", "joints", "convention", "units", "status", "title")
        _print_columns([heading, *lines], out)
        return 0


def _document(path: Path) -> object:
    try:
        return parse_json(path.read_bytes())
    except OSError as error:
        raise Unparseable(f"the file cannot be read ({error.strerror})") from error


def _add(arms: Arms[ReadArm], file: str, document: object, out: TextIO) -> int:
    try:
        stored = arms.create(document, reason=REASON)
    except NameTaken as error:
        present = _present(arms, error)
        if present is not None and present.record.digest == read_arm(document).digests.digest:
            record = present.record
            print(f"{file}: {record.name} is stored already, {version_of(record)}", file=out)
            return 0
        _print_refusal(file, error, out)
        return 1
    except _REFUSALS as error:
        _print_refusal(file, error, out)
        return 1
    print(f"{file}: {stored.record.name} stored, {version_of(stored.record)}", file=out)
    return 0


def _present(arms: Arms[ReadArm], error: NameTaken) -> StoredArm[ReadArm] | None:
    try:
        return arms.get(str(error.value))
    except ServiceError:
        return None


def _all(arms: Arms[ReadArm]) -> Iterable[Revision]:
    after = ""
    while True:
        page = arms.page(after, _PAGE)
        yield from page.records
        if not page.more:
            return
        after = page.records[-1].name


def _line(record: Revision) -> tuple[str, ...]:
    document = record.document
    return (
        record.name,
        version_of(record),
        str(driven_rows(document)),
        document["convention"],
        document["units"],
        document.get("status") or "-",
        document.get("title") or "",
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
