"""The cases of ``data/*.json`` as the package's arms; lengths in metres, angles in radians.

Left out: what is expected of them, which each test reads for itself.
"""

import json
from pathlib import Path
from typing import Any

import numpy as np

from kinematics.arm import Arm, Tool
from kinematics.table import Convention, JointKind, Row, Table

Case = dict[str, Any]
# What one unit of the file is in SI; the nearest double to a rounded product may differ in the
# last digit, which the cases' tolerances of 1e-12 leave room for.
METRES = {"m": 1.0, "mm": 0.001}
RADIANS = {"rad": 1.0, "deg": np.pi / 180.0}


def cases_of(family: str) -> dict[str, Case]:
    """Return the cases of one file by their id, in its order."""
    file = json.loads((Path(__file__).parent / "data" / f"{family}.json").read_text())
    cases = {case["id"]: case for case in file["cases"]}
    assert file["family"] == family
    assert len(cases) == len(file["cases"]) == file["count"]
    return cases


def entries_of(cases: dict[str, Case]) -> set[str]:
    """Return the names of all entries that are expected in any case."""
    return {entry for case in cases.values() for entry in case["expected"]}


def arm_of(given: Case, units: Case, **more: Any) -> Arm:
    """Return the arm of a case; its tool, where it has one, is the default tool ``given``."""
    metres, radians = METRES[units["length"]], RADIANS[units["angle"]]
    rows = tuple(
        Row(
            JointKind(row["joint"]),
            a=row["a"] * metres,
            alpha=row["alpha"] * radians,
            d=row["d"] * metres,
            theta=row["theta"] * radians,
            direction=row["sign"],
        )
        for row in given["table"]
    )
    for row in given["table"]:
        assert set(row) == {"joint", "a", "alpha", "d", "theta", "sign"}
    if given["tool"] is not None:
        more |= {"tools": {"given": Tool(np.array(given["tool"]))}, "default_tool": "given"}
    if given["base"] is not None:
        more["base_in_world"] = np.array(given["base"])
    return Arm("published", Table(Convention(given["convention"]), rows), **more)


def arm_and_joint_values(case: Case, **more: Any) -> tuple[Arm, np.ndarray]:
    """Return a case's arm and its joint values, one posture or several."""
    units = case["input"]["units"]
    arm = arm_of(case["input"]["arm"], units, **more)
    revolute = [row["joint"] == "revolute" for row in case["input"]["arm"]["table"]]
    scale = np.where(revolute, RADIANS[units["angle"]], METRES[units["length"]])
    return arm, np.asarray(case["input"]["q"], dtype=np.float64) * scale


def assert_within(tolerance: float, actual: object, expected: object) -> None:
    """Compare every entry with an absolute tolerance; shapes must be the same."""
    assert np.shape(actual) == np.shape(expected)
    np.testing.assert_allclose(actual, expected, rtol=0.0, atol=tolerance)


def assert_same_span(tolerance: float, actual: object, expected: object) -> None:
    """Compare the spaces that the rows of two matrices span, by their projections."""
    first, second = np.atleast_2d(np.asarray(actual)), np.atleast_2d(np.asarray(expected))
    assert first.shape == second.shape
    assert_within(tolerance, _projection(first), _projection(second))


def _projection(rows: np.ndarray) -> np.ndarray:
    assert np.linalg.matrix_rank(rows) == len(rows)
    return np.linalg.pinv(rows) @ rows
