"""Many orientations as lists of numbers: as one array if possible, else each for itself.

Left out: what the numbers mean; text is never taken for a number.
"""

from collections.abc import Sequence
from itertools import chain
from math import prod

import numpy as np

from kinematics.errors import KinematicsError
from kinematics.number_checks import checked_numbers
from kinematics.orientation_forms import shape_of
from kinematics.table import FloatArray
from service.details import Detail

FIELD = "values"


def read_orientation_rows(
    rows: Sequence[object], form: str
) -> tuple[FloatArray, dict[int, Detail]]:
    """Return orientations as numbers, and what is wrong with those that are no numbers.

    Parameters
    ----------
    rows : one for each orientation; anything that JSON can hold.
    form : one of the 28.

    Returns
    -------
    values : (count, numbers), a matrix by rows; NaN where ``unreadable`` says why.
    unreadable : complaints by the row's place.

    Examples
    --------
    >>> values, unreadable = read_orientation_rows([[0, 0, 90], [0, "0", 90]], "xyz-fixed")
    >>> values.tolist(), unreadable[1].where
    ([[0.0, 0.0, 90.0], [nan, nan, nan]], ('values', 1, 1))
    """
    shape = shape_of(form)
    together = _together(rows, shape)
    if together is not None:
        return together, {}
    values = np.full((len(rows), prod(shape)), np.nan)
    unreadable: dict[int, Detail] = {}
    for index, row in enumerate(rows):
        alone = _together([row], shape)
        if alone is not None:
            values[index] = alone[0]
            continue
        try:
            checked_numbers(row, shape, f"an orientation in {form}")
        except KinematicsError as error:
            where = (FIELD, index, *error.where)
            unreadable[index] = Detail(
                error.code, error.say, where, "body", error.value, error.way_out
            )
    return values, unreadable


def _together(rows: Sequence[object], shape: tuple[int, ...]) -> FloatArray | None:
    """Return all numbers if there is nothing else, in lists of the right lengths."""
    cells: list[object] = list(rows)
    for length in shape:
        if not all(type(cell) is list for cell in cells):
            return None
        lists: list[list[object]] = cells  # type: ignore[assignment]  # looked at just above
        if not set(map(len, lists)) <= {length}:
            return None
        cells = list(chain.from_iterable(lists))
    if not set(map(type, cells)) <= {int, float}:
        return None
    try:
        numbers = np.fromiter(cells, np.float64, len(cells))
    except OverflowError:  # an integer of more than 308 digits
        return None
    table: FloatArray = numbers.reshape(len(rows), prod(shape))
    return table
