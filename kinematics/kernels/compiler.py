"""How the kernels are compiled: one set of flags, and a cache where one can be kept.

Left out: when they are compiled (at the first call; the service does it ahead in a thread).
"""

from collections.abc import Callable
from typing import Any, TypeVar

import numba
import numpy as np
from numpy.typing import NDArray

Function = TypeVar("Function", bound=Callable[..., Any])

FLAGS = frozenset({"contract", "nsz", "nnan", "ninf", "arcp"})
"""Fused multiply-add, and no care for signed zero, NaN and infinity, which are refused before.
Never ``reassoc``: it would undo the split constants of the argument reduction."""


def compiled(function: Function) -> Function:
    """Return ``function`` compiled at its first call, releasing the interpreter while it runs.

    The machine code is kept beside the module or in the user's cache folder. Where neither can
    be written, it is compiled anew in each process.

    Examples
    --------
    >>> @compiled
    ... def doubled(value):
    ...     return 2.0 * value
    >>> doubled(1.5)
    3.0
    """
    options: dict[str, Any] = {
        "fastmath": set(FLAGS),
        "error_model": "numpy",
        "nogil": True,
    }
    try:
        made = numba.njit(cache=True, **options)(function)
    except RuntimeError:
        # No place for a cache: numba says so when the function is made, that is, on import.
        made = numba.njit(cache=False, **options)(function)
    return made  # type: ignore[no-any-return]


def for_kernel(values: NDArray[np.float64]) -> NDArray[np.float64]:
    """Return ``values`` as the one layout kernels are compiled for: C order, writable, float64.

    Another layout would be compiled anew, which takes seconds; copying takes microseconds.

    Examples
    --------
    >>> for_kernel(np.eye(3).T).flags["C_CONTIGUOUS"]
    True
    """
    flags = values.flags
    if flags.c_contiguous and flags.writeable and values.dtype == np.float64:
        return values
    return np.require(values, np.float64, ["C", "W"])
