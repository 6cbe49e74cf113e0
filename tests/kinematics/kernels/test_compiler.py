"""Kernels compile where no cache can be kept, and take one layout only."""

import errno
import os
import shutil
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from numba.core.caching import FunctionCache

import kinematics
from kinematics.kernels.compiler import compiled, for_kernel


def no_place(*_: object, **__: object) -> object:
    # What numba says when neither the module's folder nor the user's can be written.
    raise RuntimeError("cannot cache function: no locator available for file")


def full_disk(*_: object, **__: object) -> object:
    raise OSError(errno.ENOSPC, "No space left on device")


def torn_file(*_: object, **__: object) -> object:
    raise EOFError("Ran out of input")


def module_gone(*_: object, **__: object) -> object:
    # An earlier state of the package had it.
    raise ModuleNotFoundError("No module named 'kinematics.kernels.of_yesterday'")


@pytest.mark.parametrize(
    ("method", "failing"),
    [
        ("__init__", no_place),
        ("save_overload", full_disk),
        ("load_overload", torn_file),
        ("load_overload", module_gone),
    ],
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


ONE_TURN = """
import numpy as np
from kinematics.kernels.sine_cosine import sine_cosine
work = np.zeros(8)
sine_cosine(work, 1, 1.0, 1.0, 0.0)
print(int(np.flatnonzero(work == 1.0)[0]), sum(sine_cosine.stats.cache_hits.values()))
"""


def test_what_is_kept_is_made_anew_when_another_module_s_constants_change(tmp_path: Path) -> None:
    """The machine code of one module holds the constants of others, which no file's age shows."""
    kernels = Path(kinematics.__file__).parent
    copy = tmp_path / "kinematics"
    shutil.copytree(kernels, copy, ignore=shutil.ignore_patterns("__pycache__"))
    workspace = copy / "kernels" / "workspace.py"
    text = workspace.read_text(encoding="utf-8")
    assert "\nCOSINE = 0\n" in text
    found = []
    for place in (0, 0, 2, 0):
        changed = text.replace("\nCOSINE = 0\n", f"\nCOSINE = {place}\n")
        workspace.write_text(changed.replace("BLOCK = 128", "BLOCK = 4"), encoding="utf-8")
        # As an archive leaves it: unpacked later, and no younger.
        os.utime(workspace, (1e9, 1e9))
        done = subprocess.run(
            [sys.executable, "-B", "-c", ONE_TURN],
            env=os.environ | {"NUMBA_CACHE_DIR": str(tmp_path / "cache")},
            cwd=tmp_path,
            capture_output=True,
            text=True,
            timeout=120,
            check=False,
        )
        assert done.returncode == 0, done.stderr
        found.append(done.stdout.split())
    assert [place for place, _ in found] == ["0", "0", "2", "0"]
    assert found[1][1] == "1"
