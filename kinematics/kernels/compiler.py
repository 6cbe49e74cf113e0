"""How the kernels are compiled: one set of flags, and a cache where one can be kept.

Left out: when they are compiled (at the first call; the service sees to it ahead).
"""

import hashlib
import inspect
import pickle
import re
from collections.abc import Callable
from contextlib import suppress
from functools import cache
from pathlib import Path
from typing import Any, TypeVar

import numba
import numpy as np
from numba.core.caching import FunctionCache
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
    return _made(function, set(FLAGS))


def compiled_exactly(function: Function) -> Function:
    """Return ``function`` compiled as ``compiled`` does, but keeping NaN and the sign of zero.

    For code that is handed numbers nobody has checked.

    Examples
    --------
    >>> @compiled_exactly
    ... def is_number(value):
    ...     return value == value
    >>> is_number(float("nan"))
    False
    """
    return _made(function, False)


def _made(function: Function, fastmath: set[str] | bool) -> Function:
    # Numba's own types do not say that what it makes is called as the function was.
    made: Any = numba.njit(fastmath=fastmath, error_model="numpy", nogil=True)(function)
    # No place for a cache is told when the cache is made, that is, on import.
    with suppress(RuntimeError):
        made._cache = _CacheIfPossible(function)
    return made  # type: ignore[no-any-return]


_IMPORTED = re.compile(rb"^from (kinematics[\w.]*) import", re.MULTILINE)
_HOME = Path(__file__).parents[2]


@cache
def _text(path: Path) -> tuple[bytes, tuple[Path, ...]]:
    """Return the text of a module and the files of what it imports from the core."""
    text = path.read_bytes()
    names = (match.decode().replace(".", "/") for match in _IMPORTED.findall(text))
    files = (_HOME / f"{name}.py" for name in names)
    return text, tuple(file for file in files if file.is_file())


@cache
def _sources(path: Path) -> str:
    """Return a digest of the texts that machine code of a module is made from."""
    texts: dict[Path, bytes] = {}
    waiting = [path]
    while waiting:
        at = waiting.pop()
        if at not in texts:
            texts[at], imported = _text(at)
            waiting.extend(imported)
    return hashlib.sha256(b"\0".join(texts[at] for at in sorted(texts))).hexdigest()


_UNREADABLE = (OSError, EOFError, pickle.UnpicklingError, ImportError, AttributeError)
"""What reading a cache fails with: a full disk, a torn file, types of a module that is no more."""


class _CacheIfPossible(FunctionCache):
    """Numba's cache, for which a full disk or a torn file is a reason to compile, not to fail.

    Constants and functions of one module are compiled into others. Numba looks at the age of the
    function's own file alone; here what is kept is good for the same text of that file and of all
    that it imports from the core.
    """

    def __init__(self, function: Callable[..., Any]) -> None:
        super().__init__(function)  # type: ignore[no-untyped-call]
        file: Any = self._cache_file
        source = Path(inspect.getfile(function))
        stamp = _sources(source) if source.is_relative_to(_HOME) else ""
        file._source_stamp = (file._source_stamp, stamp)

    def has_any(self) -> bool:
        """Return whether there is machine code of this text, for some processor."""
        file: Any = self._cache_file
        try:
            return bool(file._load_index())
        except _UNREADABLE:
            return False

    def save_overload(self, sig: object, data: object) -> None:
        with suppress(*_UNREADABLE):
            super().save_overload(sig, data)  # type: ignore[no-untyped-call]

    def load_overload(self, sig: object, target_context: object) -> object:
        try:
            return super().load_overload(sig, target_context)  # type: ignore[no-untyped-call]
        except _UNREADABLE:
            # So that what is compiled instead can be kept.
            with suppress(OSError):
                self.flush()  # type: ignore[no-untyped-call]
            return None


def is_kept(kernel: Callable[..., Any]) -> bool | None:
    """Return whether machine code of a kernel is in the cache; None where nothing can be kept.

    Examples
    --------
    >>> is_kept(compiled(lambda value: value)) is True
    False
    """
    cache = getattr(kernel, "_cache", None)
    return cache.has_any() if isinstance(cache, _CacheIfPossible) else None


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
