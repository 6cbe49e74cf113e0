"""Part locations as CSV (RFC 4180): a header, then one line for each target.

Columns are told by the header, in any order: ``x y z``, and if wanted ``name``, ``r1 r2 r3``
(angles of the form asked for), ``freedom`` (``none``, ``spin``, ``orientation``, ``cone:30``) and
``approach`` (how far back along tool z the tool is to come straight from). Lines whose
``r1 r2 r3`` are empty are positions. A line of another width refuses all; a cell that cannot be
used spoils its own line only. Left out: JSON (reach_targets.py), lines of answers
(reach_lines.py).
"""

import csv
import io
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from kinematics.errors import KinematicsError
from kinematics.known_names import way_out_of_unknown
from kinematics.pose_batches import poses_as_given
from kinematics.reach.targets import NONE, ORIENTATION
from kinematics.table import FloatArray
from service.convert import Units, orientation_in
from service.details import Detail
from service.errors import MissingField, ServiceError, UnknownField, Unparseable, UnusableValue
from service.wire.csv_rows import NAME, WrongColumnCount, all_at_once, blocks
from service.wire.models import Orientation, Pose
from service.wire.query import number
from service.wire.reach_gathered import (
    FREEDOM_WORDS,
    Gathered,
    Left,
    OneTarget,
    ReadTargets,
    refuse_same_names,
    refuse_too_many,
)
from service.wire.reach_request import (
    LONGEST_NAME,
    MOST_TARGETS,
    Approach,
    Cone,
    ReachTarget,
)
from service.wire.reach_targets import one_target

POSITION = ("x", "y", "z")
ANGLES = ("r1", "r2", "r3")
FREEDOM, APPROACH = "freedom", "approach"
COLUMNS = (NAME, *POSITION, *ANGLES, FREEDOM, APPROACH)
CONE_WORD = "cone:"
_COLUMN_OF = {"position": POSITION[0], "cone": FREEDOM, "distance": APPROACH}
"""Where what a body says in a field of its own stands in a table."""


@dataclass(frozen=True)
class Lines:
    """The lines of a table, by column, and the number of the line each begins in."""

    columns: Mapping[str, Sequence[str]]
    numbers: Sequence[int]

    def cell(self, name: str, place: int) -> str:
        return self.columns[name][place].strip() if name in self.columns else ""


def read_part_locations(
    raw: bytes, form: str, units: Units, between: Callable[[], None] = lambda: None
) -> ReadTargets:
    """Return the targets of a table.

    Parameters
    ----------
    raw : UTF-8, with or without a byte order mark; lines end with CRLF or LF.
    form : what r1 r2 r3 mean, one of the 24 angle triples.
    between : called now and then; may raise to give up.

    Raises
    ------
    Unparseable : empty, not UTF-8, quotes that do not match.
    UnknownField, MissingField, UnusableValue : the header, a line of another width, a name twice.
    TooLarge : too many lines.
    ServiceError : none of them can be used.

    Examples
    --------
    >>> from service.convert import UNITS
    >>> table = b"name,x,y,z\\r\\nlug-1,0,250,1000\\r\\nlug-2,0,x,1000\\r\\n"
    >>> read = read_part_locations(table, "xyz-fixed", UNITS["mm-deg"])
    >>> read.names, read.tool_in_frame[0, :3, 3].tolist(), read.refused[1].where
    (['lug-1', 'lug-2'], [0.0, 0.25, 1.0], (3, 'y'))
    """
    lines = lines_of(raw, between)
    count = len(lines.numbers)
    refuse_too_many(count)
    names = names_of(lines)
    gathered = Gathered(count)
    plain = plain_places(lines)
    poses = None if plain is None else _poses_of(lines, plain, form, units)
    if plain is not None and poses is not None:
        gathered.place(range(count), poses, form)
        usual = Left(NONE if plain.shape[1] > len(POSITION) else ORIENTATION)
        for place in range(count):
            gathered.leave(place, *usual)
        careful = [
            place
            for place in range(count)
            if lines.cell(FREEDOM, place) or lines.cell(APPROACH, place)
        ]
    else:
        careful = list(range(count))
    for place in careful:
        try:
            gathered.take(place, _one(lines, place, form, units))
        except (ServiceError, KinematicsError) as error:
            gathered.refused[place] = _at_column(error, lines.numbers[place])
    return gathered.read(names)


def lines_of(raw: bytes, between: Callable[[], None], most: int = MOST_TARGETS) -> Lines:
    """Return the lines of a table, of which more than ``most`` are not read to the end.

    Raises
    ------
    Unparseable, UnknownField, MissingField, UnusableValue : as of ``read_part_locations``.
    """
    if not raw:
        way_out = f"send a header {','.join(COLUMNS)} and lines below it"
        raise Unparseable("the body is empty", way_out=way_out)
    text = io.TextIOWrapper(io.BytesIO(raw), encoding="utf-8-sig", newline="")
    reader = csv.reader(text, strict=True)
    rows: list[list[str]] = []
    numbers: list[int] = []
    try:
        header = [cell.strip() for cell in next(reader, [])]
        _check_header(header)
        for found, begins in blocks(reader, len(header)):
            between()
            rows += found
            numbers += begins
            if len(rows) > most:
                break
    except WrongColumnCount as error:
        # Its code is one of joint values.
        raise UnusableValue(
            error.say, where=error.where, value=error.value, way_out=error.way_out
        ) from None
    except UnicodeDecodeError:
        say = f"not UTF-8 after line {reader.line_num}"
        raise Unparseable(say, where=(reader.line_num,), way_out="send UTF-8") from None
    except csv.Error as error:
        say = f"not CSV at line {reader.line_num}: {error}"
        raise Unparseable(say, where=(reader.line_num,), way_out="mend this line") from None
    cells = zip(*rows, strict=True) if rows else ([] for _ in header)
    return Lines({name: list(column) for name, column in zip(header, cells, strict=True)}, numbers)


def _check_header(header: Sequence[str]) -> None:
    for place, name in enumerate(header):
        if name not in COLUMNS:
            raise UnknownField(
                f'unknown column "{name[:60]}"',
                where=(1, place + 1),
                value=name,
                way_out=way_out_of_unknown(name, COLUMNS),
            )
        if name in header[:place]:
            raise UnusableValue(
                f'the column "{name}" stands twice',
                where=(1, place + 1),
                value=name,
                way_out="leave one of them out",
            )
    wanted = (*POSITION, *(ANGLES if set(ANGLES) & set(header) else ()))
    for name in wanted:
        if name not in header:
            raise MissingField(
                f'the column "{name}" is missing',
                where=(1,),
                way_out=f"begin with the line {','.join(COLUMNS)}; name, freedom, approach, and "
                "r1 r2 r3 together, may be left out",
            )


def names_of(lines: Lines) -> list[str | None]:
    """Return what targets are called.

    Raises
    ------
    UnusableValue : a name is too long, or stands twice.
    """
    names: list[str | None] = [None] * len(lines.numbers)
    if NAME in lines.columns:
        names = [name or None for name in lines.columns[NAME]]
        for place, name in enumerate(names):
            if len(name or "") > LONGEST_NAME:
                raise UnusableValue(
                    f"the name has more than {LONGEST_NAME} characters",
                    where=(lines.numbers[place], NAME),
                    value=name,
                    way_out="give a shorter one",
                )
    refuse_same_names(names, lambda place: (lines.numbers[place], NAME))
    return names


def plain_places(lines: Lines) -> FloatArray | None:
    """Return all numbers, (count, 3 or 6), where each cell holds a plain one; else None."""
    wanted = [name for name in (*POSITION, *ANGLES) if name in lines.columns]
    cells = [cell for name in wanted for cell in lines.columns[name]]
    # Two empty cells side by side would pass for none.
    if not all(cells):
        return None
    numbers = all_at_once(",".join(cells).encode(), len(cells))
    if numbers is None or not np.isfinite(numbers).all():
        return None
    return numbers.reshape(len(wanted), -1).T


def _poses_of(
    lines: Lines,
    numbers: FloatArray,
    form: str,
    units: Units,
) -> FloatArray | None:
    count = len(lines.numbers)
    angles = numbers[:, 3:] if numbers.shape[1] > len(POSITION) else np.zeros((count, 3))
    return poses_as_given(
        form, orientation_in(units, form, angles), units.length_in(numbers[:, :3])
    )


def _one(lines: Lines, place: int, form: str, units: Units) -> OneTarget:
    """Return one target; ``where`` of what is wrong with it ends with a column, or nearly."""
    position = [number(lines.cell(name, place), name) for name in POSITION]
    angles = [lines.cell(name, place) for name in ANGLES]
    left_open: dict[str, Any] = {
        "freedom": _freedom(lines.cell(FREEDOM, place)),
        "approach": _approach(lines.cell(APPROACH, place)),
    }
    if not any(angles):
        return one_target(ReachTarget(position=position, **left_open), units)
    values = [number(text, name) for text, name in zip(angles, ANGLES, strict=True)]
    given = Pose(position=position, orientation=Orientation(form=form, values=values))
    return one_target(ReachTarget(pose=given, **left_open), units)


def _approach(said: str) -> Approach | None:
    if not said:
        return None
    distance = number(said, APPROACH)
    if not distance > 0:
        raise UnusableValue(
            "an approach needs a length",
            where=(APPROACH,),
            value=said,
            way_out="give a length above 0, or leave the cell empty",
        )
    return Approach(distance=distance)


def _freedom(said: str) -> Any:
    """Return what a cell says as a body would say it."""
    if said.startswith(CONE_WORD):
        # Whether it can be used is for the target to tell.
        return Cone.model_construct(cone=number(said.removeprefix(CONE_WORD), FREEDOM))
    if said and said not in FREEDOM_WORDS:
        raise UnusableValue(
            f"there is no freedom {said[:60]!r}",
            where=(FREEDOM,),
            value=said,
            way_out="say none, spin, orientation, or cone:30 with the half-angle",
        )
    return said or None


def _at_column(error: ServiceError | KinematicsError, line: int) -> Detail:
    """Return what is wrong with a line, at its column."""
    if isinstance(error, ServiceError):
        detail = error.details()[0]
    else:
        way = (error.code, error.say, error.where, "body", error.value, error.way_out)
        detail = Detail(*way)  # type: ignore[arg-type]
    column = detail.where[-1] if detail.where else ""
    if isinstance(column, int):
        column = (ANGLES if "values" in detail.where else POSITION)[column]
    elif column not in COLUMNS:
        column = {"position": POSITION[0], "cone": FREEDOM, "distance": APPROACH}.get(
            column, ANGLES[0]
        )
    return replace(detail, where=(line, column), location="body")
