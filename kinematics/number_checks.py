"""Numbers as they come in from outside: real, finite, as many as needed, not too large.

And numbers that things are known by, of which each has its own.

Left out: what the numbers mean; whoever asks checks that next.
"""

import math
from collections.abc import Mapping
from numbers import Real

import numpy as np
from numpy.typing import NDArray

from kinematics.errors import InvalidOrientation, KinematicsError, NotFinite, OutOfRange
from kinematics.tolerances import LARGEST_MAGNITUDE

FloatArray = NDArray[np.float64]


def checked_numbers(
    values: object,
    shape: tuple[int, ...],
    what: str,
    refusal: type[KinematicsError] = InvalidOrientation,
) -> FloatArray:
    """Return nested lists of numbers as an array of this shape, or say which entry is at fault.

    Text, None, booleans and complex numbers are refused rather than converted.

    Parameters
    ----------
    values : nested lists, tuples or arrays of real numbers.
    shape : the shape they must have.
    what : name of the values in the error's sentence, e.g. ``"a quaternion"``.
    refusal : class raised for a wrong count or an entry that is no number.

    Returns
    -------
    numbers : ``shape``, float64, a copy.

    Raises
    ------
    refusal : another shape, or an entry that is no real number.
    NotFinite : NaN or infinity.
    OutOfRange : an entry beyond 1e9.
        ``where`` of each holds the indices of the entry.

    Examples
    --------
    >>> checked_numbers([1, 2.5], (2,), "a pair")
    array([1. , 2.5])
    """
    plain = _as_lists(values, len(shape))
    if not _has_shape(plain, shape):
        count = " x ".join(str(length) for length in shape)
        raise refusal(
            f"{what} takes {count} numbers",
            value=values,
            way_out=f"give {count} numbers, as {'rows of ' if len(shape) > 1 else ''}a list",
        )
    numbers = np.empty(shape)
    for index in np.ndindex(*shape):
        entry = plain
        for position in index:
            entry = entry[position]  # type: ignore[index]  # _has_shape has looked
        numbers[index] = _checked_number(entry, index, what, refusal)
    return numbers


def refuse_shared_numbers(
    what: str, numbers: Mapping[str, int | None], refusal: type[KinematicsError]
) -> None:
    """Refuse two things that a controller would know by the same number.

    Parameters
    ----------
    what : the field that holds them.
    numbers : by the name of each; None for one without.

    Raises
    ------
    refusal : ``where`` leads to the number of the second.

    Examples
    --------
    >>> from kinematics.errors import InvalidArm
    >>> refuse_shared_numbers("tools", {"pen": 1, "saw": None, "claw": 1}, InvalidArm)
    Traceback (most recent call last):
    ...
    kinematics.errors.InvalidArm: claw and pen have the same number 1
    """
    seen: dict[int, str] = {}
    for name, number in numbers.items():
        if number is None:
            continue
        if number in seen:
            raise refusal(
                f"{name} and {seen[number]} have the same number {number}",
                where=(what, name, "number"),
                value=number,
                way_out="give each a number of its own",
            )
        seen[number] = name


def _as_lists(values: object, depth: int) -> object:
    if isinstance(values, np.ndarray):
        return values.tolist()
    # What is nested deeper cannot be right, and may be nested deeper than Python can follow.
    if isinstance(values, list | tuple) and depth:
        return [_as_lists(entry, depth - 1) for entry in values]
    return values


def _has_shape(values: object, shape: tuple[int, ...]) -> bool:
    if not shape:
        return not isinstance(values, list)
    return (
        isinstance(values, list)
        and len(values) == shape[0]
        and all(_has_shape(entry, shape[1:]) for entry in values)
    )


def _checked_number(
    entry: object, where: tuple[int, ...], what: str, refusal: type[KinematicsError]
) -> float:
    if isinstance(entry, bool) or not isinstance(entry, Real):
        raise refusal(
            f"{what} holds an entry that is no number",
            where=where,
            value=entry,
            way_out="give plain numbers, without quotes",
        )
    try:
        number = float(entry)
    except OverflowError:  # an integer of more than 308 digits
        number = float(np.finfo(np.float64).max)
    if not math.isfinite(number):
        raise NotFinite(
            f"{what} holds {number}",
            where=where,
            value=entry,
            way_out="give a finite number; a failed measurement cannot be computed with",
        )
    if abs(number) > LARGEST_MAGNITUDE:
        raise OutOfRange(
            f"{what} holds {number:.6g}, beyond 1e9 in SI units",
            where=where,
            value=entry,
            way_out="check the units; magnitudes above 1e9 m or 1e9 rad are refused",
        )
    return number
