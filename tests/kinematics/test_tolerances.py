"""Every threshold gives its reason, is used, and stands where its reason puts it."""

import ast
import re
from pathlib import Path

import pytest

from kinematics import tolerances
from kinematics.tolerances import (
    AXES_MEET,
    AXES_PARALLEL,
    DRIVE_MAP_SINGULAR,
    GENERIC_RANK,
    KIND_AT,
    KIND_NEARBY,
    KIND_TYPICAL,
    LARGEST_MAGNITUDE,
    MOST_ROWS,
    NAMED_AXIS,
    NEAR_SINGULAR,
    NUDGE,
    RIGID_REPAIRED,
    RIGID_SILENT,
    SAMPLE_POSTURES,
    SINGULAR,
    SUPPORT_AT,
    SUPPORT_NEAR,
)

NAMES = [name for name in vars(tolerances) if name.isupper()]
PACKAGES = Path(tolerances.__file__).parents[1]


def reasons() -> dict[str, str]:
    """Return the docstring under each constant."""
    body = ast.parse(Path(tolerances.__file__).read_text(encoding="utf-8")).body
    found: dict[str, str] = {}
    for node, following in zip(body, [*body[1:], None], strict=True):
        if isinstance(node, ast.Assign) and isinstance(node.targets[0], ast.Name):
            says = isinstance(following, ast.Expr) and isinstance(following.value, ast.Constant)
            found[node.targets[0].id] = str(following.value.value) if says else ""  # type: ignore[union-attr]
    return found


def test_all_are_found() -> None:
    assert sorted(reasons()) == sorted(NAMES)
    assert len(NAMES) >= 25


@pytest.mark.parametrize("name", NAMES)
def test_every_threshold_has_its_reason(name: str) -> None:
    assert len(reasons()[name].split()) >= 6


@pytest.mark.parametrize("name", NAMES)
def test_every_threshold_is_used(name: str) -> None:
    users = [
        path
        for package in ("kinematics", "service")
        for path in (PACKAGES / package).rglob("*.py")
        if path.name != "tolerances.py"
        and re.search(rf"\b{name}\b", path.read_text(encoding="utf-8"))
    ]
    assert users


def test_numbers_of_the_contract() -> None:
    assert (LARGEST_MAGNITUDE, MOST_ROWS, SAMPLE_POSTURES) == (1e9, 32, 16)
    assert (RIGID_SILENT, RIGID_REPAIRED) == (1e-12, 5e-3)


def test_thresholds_stand_in_the_order_their_reasons_need() -> None:
    rounding = 1e-14
    four_decimals = 5e-5  # half of the last of four decimals of a radian
    # Zero: above rounding, below a step of any encoder; near: a small share of the best.
    assert 100 * rounding < SINGULAR < 1e-6 < NEAR_SINGULAR < 0.1
    assert rounding < DRIVE_MAP_SINGULAR < 1e-6
    # What typing leaves is not what the arm was built for.
    assert four_decimals < GENERIC_RANK < NEAR_SINGULAR
    assert four_decimals < AXES_PARALLEL
    assert rounding < AXES_MEET <= 1e-6
    # A kind is told at six decimals of a degree, and by build only far above that.
    assert 1e-6 * 3.15 / 180 < KIND_AT < KIND_TYPICAL < KIND_NEARBY < 1.0
    # A nudge leaves the singular place clearly and moves directions less than words resolve.
    assert SINGULAR < NUDGE < 1.0 - NAMED_AXIS
    assert NUDGE < SUPPORT_AT < SUPPORT_NEAR < 1.0
