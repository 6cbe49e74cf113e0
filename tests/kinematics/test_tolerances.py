"""Every threshold gives its reason, is used, and stands where its reason puts it."""

import ast
import re
from pathlib import Path

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

PACKAGES = Path(tolerances.__file__).parents[1]
MODULES = sorted(Path(tolerances.__file__).parent.rglob("tolerances.py"))


def reasons(module: Path) -> dict[str, str]:
    """Return the docstring under each constant; those on lines that follow each other share one."""
    found: dict[str, str] = {}
    reason, begins = "", 0
    for node in reversed(ast.parse(module.read_text(encoding="utf-8")).body):
        if node.end_lineno is None or node.end_lineno + 1 != begins:
            reason = ""
        if isinstance(node, ast.Expr) and isinstance(node.value, ast.Constant):
            reason = str(node.value.value)
        elif isinstance(node, ast.Assign) and isinstance(node.targets[0], ast.Name):
            found[node.targets[0].id] = reason
        begins = node.lineno
    return found


REASONS = [(module, *each) for module in MODULES for each in reasons(module).items()]


def test_all_are_found() -> None:
    named = [name for name in vars(tolerances) if name.isupper()]
    assert sorted(reasons(Path(tolerances.__file__))) == sorted(named)
    assert len(MODULES) >= 5
    assert len(REASONS) >= 150


def test_every_threshold_has_its_reason() -> None:
    without = [(module, name) for module, name, reason in REASONS if len(reason.split()) < 6]
    assert without == []


def test_every_threshold_is_used() -> None:
    words: set[str] = set()
    for package in ("kinematics", "service"):
        for path in (PACKAGES / package).rglob("*.py"):
            if path.name != "tolerances.py":
                words.update(re.findall(r"\w+", path.read_text(encoding="utf-8")))
    assert [name for _, name, _ in REASONS if name not in words] == []


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
