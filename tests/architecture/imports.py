"""What each module of the two packages imports, read from its text and never by running it.

Imports inside functions count: they are imports all the same.
"""

import ast
from functools import cache
from pathlib import Path

ROOT = Path(__file__).parents[2]
PACKAGES = ("kinematics", "service")


@cache
def modules() -> dict[str, Path]:
    """Return the modules of both packages by their dotted names."""
    found = {}
    for package in PACKAGES:
        for path in sorted((ROOT / package).rglob("*.py")):
            parts = path.relative_to(ROOT).with_suffix("").parts
            name = ".".join(parts[:-1] if parts[-1] == "__init__" else parts)
            found[name] = path
    return found


@cache
def tree_of(module: str) -> ast.Module:
    return ast.parse(modules()[module].read_text(encoding="utf-8"))


@cache
def imported_by(module: str) -> frozenset[str]:
    """Return the dotted names of all modules that a module imports, ours and others'."""
    found: set[str] = set()
    for node in ast.walk(tree_of(module)):
        if isinstance(node, ast.Import):
            found |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{module} imports relatively"
            whole = str(node.module)
            for alias in node.names:
                inner = f"{whole}.{alias.name}"
                found.add(inner if inner in modules() else whole)
    return frozenset(found)


def ours(module: str) -> set[str]:
    """Return the modules of the two packages that a module imports."""
    return {name for name in imported_by(module) if name.partition(".")[0] in PACKAGES}


def others(module: str) -> set[str]:
    """Return the top-level packages outside the two that a module imports."""
    return {name.partition(".")[0] for name in imported_by(module)} - set(PACKAGES)


def within(name: str, packages: tuple[str, ...]) -> bool:
    return any(name == package or name.startswith(f"{package}.") for package in packages)
