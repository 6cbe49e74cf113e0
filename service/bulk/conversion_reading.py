"""What a request about many orientations asks: from a JSON body, or from a table and its query.

Left out: answering.
"""

from collections.abc import Callable, Mapping

from kinematics.table import FloatArray
from service.convert import UNITS
from service.details import Detail
from service.errors import ServiceError, UnusableValue
from service.operations.conversions import MOST_ORIENTATIONS, Conversions, Where, refuse_too_many
from service.problems import MOST_DETAILS
from service.wire.csv_rows import WrongColumnCount, read_csv
from service.wire.formats import Format
from service.wire.npy import read_npy
from service.wire.orientation_rows import FIELD, read_orientation_rows
from service.wire.poses import checked_form
from service.wire.rotation_query import (
    FLAT_FORM,
    NESTED_FORM,
    VALUE_PARAMETERS,
    form_said,
    units_said,
    value_parameter,
    width_of,
)
from service.wire.rotations import ConversionsRequest

VALUES = FIELD
_LETTER = "r"


def conversions_of_body(
    asked: ConversionsRequest, wanted: Format, table: FloatArray | None = None
) -> Conversions:
    """Return the orientations of a JSON body.

    Parameters
    ----------
    table : the orientations (count, ...), if they have been read already.

    Raises
    ------
    ServiceError, KinematicsError : what it says cannot be used, or no orientation of it can.
    """
    form = checked_form(asked.from_, ("from",))
    to = checked_form(_wanted_form(wanted) if asked.to is None else asked.to, ("to",))
    refuse_too_many(len(asked.values) if table is None else len(table))
    if table is not None and table[0].size == width_of(form) and _is_nested(table, form):
        values, unreadable = table.reshape(len(table), -1), dict[int, Detail]()
    else:
        rows = asked.values if table is None else table.tolist()
        _refuse_one(rows, form)
        values, unreadable = read_orientation_rows(rows, form)

    def body_place(row: int, at: Where) -> Where:
        return (VALUES, row, *at)

    found = Conversions(form, to, UNITS[asked.units], values, body_place, unreadable)
    if not found.any_usable():
        details = found.refusals(MOST_DETAILS)
        raise ServiceError(details[0].say, errors=details, status=422)
    return found


def conversions_of_table(
    raw: bytes,
    is_csv: bool,
    parameters: Mapping[str, str],
    wanted: Format,
    between: Callable[[], None],
) -> Conversions:
    """Return the orientations of a table; one that cannot be used does not refuse the others.

    Parameters
    ----------
    between : called now and then; may raise to give up.

    Raises
    ------
    ServiceError : what the query says cannot be used, or the table has other columns.
    """
    form = form_said(parameters, "from")
    to = form_said(parameters, "to", _wanted_form(wanted))
    units = units_said(parameters)
    width = width_of(form)
    if not is_csv:
        values = read_npy(raw)
        if values.shape[1] != width:
            raise UnusableValue(
                f"{values.shape[1]} columns for orientations in {form}",
                value=values.shape[1],
                way_out=f"in each row send {width} numbers" + _by_rows(form),
            )
        refuse_too_many(len(values))
        return Conversions(form, to, units, values, _npy_place)
    try:
        lines = read_csv(raw, width, MOST_ORIENTATIONS, between, letter=_LETTER)
    except WrongColumnCount as error:
        way_out = f"{error.way_out}; {form} takes {width} numbers" + _by_rows(form)
        raise UnusableValue(
            error.say, where=error.where, value=error.value, way_out=way_out
        ) from None
    refuse_too_many(len(lines.values))

    def line_place(row: int, at: Where) -> Where:
        return (lines.lines[row], *([value_parameter(at)] if at else []))

    return Conversions(form, to, units, lines.values, line_place, lines.unreadable, lines.names)


def _wanted_form(wanted: Format) -> str:
    return FLAT_FORM if wanted == "csv" else NESTED_FORM


def _is_nested(table: FloatArray, form: str) -> bool:
    return (table.ndim == 3) == (form == "matrix")


def _refuse_one(rows: list[object], form: str) -> None:
    if rows and not any(isinstance(row, list) for row in rows):
        raise UnusableValue(
            "values is a list of orientations, and this is one",
            where=(VALUES,),
            value=rows,
            way_out=f"write [[...]], one list for each orientation in {form}",
        )


def _by_rows(form: str) -> str:
    return ", the rows of the matrix one after the other" if form == "matrix" else ""


def _npy_place(row: int, at: Where) -> Where:
    return (row, *([VALUE_PARAMETERS.index(value_parameter(at))] if at else []))
