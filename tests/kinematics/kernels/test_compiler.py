"""Kernels compile where no cache can be kept, and take one layout only."""

import errno
import os
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from numba.core.caching import FunctionCache

from kinematics.kernels.compiler import compiled, for_kernel


def no_place(*_: object, **__: object) -> object:
    # What numba says when neither the module's folder nor the user's can be written.
    raise RuntimeError("cannot cache function: no locator available for file")


def full_disk(*_: object, **__: object) -> object:
    raise OSError(errno.ENOSPC, "No space left on device")


def torn_file(*_: object, **__: object) -> object:
    raise EOFError("Ran out of input")


@pytest.mark.parametrize(
    ("method", "failing"),
    [("__init__", no_place), ("save_overload", full_disk), ("load_overload", torn_file)],
)
def test_a_cache_that_cannot_be_used_is_done_without(
    monkeypatch: pytest.MonkeyPatch, method: str, failing: Callable[..., object]
) -> None:
    met: list[str] = []

    def watched(*given: object, **named: object) -> object:
        met.append(method)
        return failing(*given, **named)

    # Nothing kept from an earlier run may spare the saving.
    monkeypatch.setattr(FunctionCache, "load_overload", lambda *_: None)
    monkeypatch.setattr(FunctionCache, method, watched)

    def tripled(value: float) -> float:
        return 3.0 * value

    assert compiled(tripled)(2.0) == 6.0
    assert met


def test_the_package_imports_with_an_unusable_cache_folder(tmp_path: Path) -> None:
    """A real one: the folder named for the cache is a file."""
    (tmp_path / "file").write_text("", encoding="utf-8")
    environment = os.environ | {"NUMBA_CACHE_DIR": str(tmp_path / "file" / "cache")}
    done = subprocess.run(
        [sys.executable, "-c", "import kinematics.kernels.decomposition; print('in')"],
        env=environment,
        capture_output=True,
        text=True,
        timeout=120,
        check=False,
    )
    assert (done.returncode, done.stdout.strip()) == (0, "in"), done.stderr


@pytest.mark.parametrize(
    "values",
    [
        np.eye(4).T,
        np.broadcast_to(np.eye(4), (2, 4, 4)),
        np.arange(12.0).reshape(3, 4)[:, ::2],
        np.eye(4, dtype=np.float32),
        np.asfortranarray(np.arange(12.0).reshape(3, 4)),
    ],
)
def test_every_layout_becomes_the_one_kernels_know(values: np.ndarray) -> None:
    given = for_kernel(values)
    assert given.flags.c_contiguous
    assert given.flags.writeable
    assert given.dtype == np.float64
    np.testing.assert_array_equal(given, values)


def test_the_right_layout_is_not_copied() -> None:
    values = np.arange(6.0).reshape(2, 3)
    assert for_kernel(values) is values
