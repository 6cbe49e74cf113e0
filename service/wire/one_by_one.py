"""Items of a list read one by one, so that one that cannot be used does not fail the others.

Left out: what the items are.
"""

from collections.abc import Callable, Sequence
from dataclasses import replace
from typing import TypeVar

from pydantic import ValidationError

from kinematics.errors import KinematicsError
from service.details import Detail, as_given
from service.errors import ServiceError, UnknownField
from service.problems import KINDS
from service.validation import details_of

Item = TypeVar("Item")


def read_one_by_one(
    field: str,
    rows: Sequence[object],
    places: Sequence[int],
    read: Callable[[object], Item],
) -> tuple[dict[int, Item], dict[int, Detail]]:
    """Return what some items of a list say, and what is wrong with the others, by index.

    Parameters
    ----------
    field : of the body, that holds the list. places : indices of the items that are to be read.
    read : reads one; what it raises leads into the item.

    Raises
    ------
    UnknownField : one of them has a field that nobody knows, which is a mistake of the request.

    Examples
    --------
    >>> from service.errors import UnusableValue
    >>> def whole(row):
    ...     if not isinstance(row, int):
    ...         raise UnusableValue("no whole number", value=row)
    ...     return row
    >>> found, refused = read_one_by_one("counts", [1, "x"], [0, 1], whole)
    >>> found, refused[1].where
    ({0: 1}, ('counts', 1))
    """
    found, refused, unknown = dict[int, Item](), dict[int, Detail](), list[Detail]()
    body = {field: rows}
    for place in places:
        try:
            found[place] = read(rows[place])
            continue
        except ValidationError as error:
            details: Sequence[Detail] = details_of(error, body=rows[place])
        except ServiceError as error:
            details = error.details()
        except KinematicsError as error:
            at = (error.code, error.say, error.where, "body", error.value, error.way_out)
            details = [Detail(*at)]  # type: ignore[arg-type]
        details = [replace(detail, where=(field, place, *detail.where)) for detail in details]
        unknown += [detail for detail in details if detail.code == UnknownField.code]
        worst = max(details, key=lambda detail: KINDS[detail.code].number)
        refused[place] = as_given(worst, body)
    if unknown:
        raise UnknownField(unknown[0].say, errors=unknown)
    return found, refused
