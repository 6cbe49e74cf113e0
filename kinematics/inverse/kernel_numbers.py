"""Numbers of rows, columns and cases, as compiled code takes them without being made anew.

A plain int or truth value is, to the compiler, a type of its own: each function it is passed to
would be compiled once more for that very value. Those of NumPy's own kind are not.

Source: Numba's literal types. Not covered: floats, which cost nothing.
"""

import numpy as np


def entries(begin: int, end: int, step: int = 1) -> tuple[int, ...]:
    """Return begin, begin + step and so on below end.

    Examples
    --------
    >>> a, b = entries(3, 9, 3)
    >>> int(a), int(b)
    (3, 6)
    """
    return tuple(np.arange(begin, end, step, dtype=np.int64))


(NONE,) = entries(0, 1)
"""To begin counting from."""

X, Y, Z = entries(0, 3)
"""Rows and columns of a rotation."""

NO: bool = np.False_  # type: ignore[assignment]  # to the compiler it is one
"""A truth value to be passed."""
