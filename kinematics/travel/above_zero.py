"""Refuses distances and speeds that lead nowhere: zero, less, or no number at all.

Left out: how large they may be (the edge knows the units).
"""

from collections.abc import Sequence
from math import isfinite

from kinematics.errors import KinematicsError


def check_above_zero(value: float, what: str, where: Sequence[str | int]) -> None:
    """Refuse a number that is not above 0.

    Raises
    ------
    KinematicsError

    Examples
    --------
    >>> check_above_zero(0.0, "the speed", ("speed",))
    Traceback (most recent call last):
    kinematics.errors.KinematicsError: the speed is 0, which is no way to get anywhere
    """
    if not (value > 0.0 and isfinite(value)):
        raise KinematicsError(
            f"{what} is {value:.6g}, which is no way to get anywhere",
            where=where,
            value=value,
            way_out="give a number above 0, or leave it out",
        )
