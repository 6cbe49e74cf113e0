"""Part locations as CSV, told as a body of JSON has targets, whatever stands in their cells.

So a table can be kept as it came, and what is wrong with one of its lines be told where it is
read. Left out: the columns and what they mean (reach_csv.py).
"""

from collections.abc import Callable
from itertools import repeat
from typing import Any

from service.errors import ServiceError
from service.wire.query import number
from service.wire.reach_csv import (
    ANGLES,
    APPROACH,
    CONE_WORD,
    FREEDOM,
    POSITION,
    Lines,
    lines_of,
    names_of,
    plain_places,
)


def csv_rows(
    raw: bytes, form: str, most: int, between: Callable[[], None] = lambda: None
) -> list[dict[str, Any]]:
    """Return the targets of a table; a cell that is no number stays as it is, to be refused.

    Parameters
    ----------
    raw, form, between : as of ``read_part_locations``.
    most : lines; of more one more is told.

    Raises
    ------
    Unparseable, UnknownField, MissingField, UnusableValue : as of ``read_part_locations``.

    Examples
    --------
    >>> csv_rows(b"x,y,z,name,freedom\\n1,2.5,3,lug-1,\\n4,,6,,cone:30\\n", "xyz-fixed", 9)[0]
    {'name': 'lug-1', 'position': [1.0, 2.5, 3.0]}
    """
    lines = lines_of(raw, between, most)
    names, plain = names_of(lines), plain_places(lines)
    numbers = _cells(lines) if plain is None else plain.tolist()
    open_ends = zip(_texts(lines, FREEDOM), _texts(lines, APPROACH), strict=False)
    rows = []
    for name, cells, (freedom, approach) in zip(names, numbers, open_ends, strict=False):
        row: dict[str, Any] = {} if name is None else {"name": name}
        turned = cells[len(POSITION) :]
        if any(cell != "" for cell in turned):
            orientation = {"form": form, "values": turned}
            row["pose"] = {"position": cells[: len(POSITION)], "orientation": orientation}
        else:
            row["position"] = cells[: len(POSITION)]
        if freedom:
            row["freedom"] = _freedom(freedom)
        if approach:
            row["approach"] = {"distance": _number(approach, APPROACH)}
        rows.append(row)
    return rows


def _texts(lines: Lines, name: str) -> Any:
    if name not in lines.columns:
        return repeat("", len(lines.numbers))
    return (cell.strip() for cell in lines.columns[name])


def _cells(lines: Lines) -> list[list[object]]:
    wanted = [name for name in (*POSITION, *ANGLES) if name in lines.columns]
    columns = [[_number(cell.strip(), name) for cell in lines.columns[name]] for name in wanted]
    return [list(cells) for cells in zip(*columns, strict=True)]


def _number(text: str, name: str) -> object:
    try:
        return number(text, name)
    except ServiceError:
        return text


def _freedom(said: str) -> object:
    if said.startswith(CONE_WORD):
        return {"cone": _number(said.removeprefix(CONE_WORD), FREEDOM)}
    return said
