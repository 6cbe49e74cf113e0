"""Codes that never change, and sentences with their values in SI."""

from dataclasses import FrozenInstanceError

import pytest

from kinematics import findings
from kinematics.findings import Finding


def test_codes_of_the_wire() -> None:
    """From the table of codes on the wire: texts may change, these never do."""
    named = {name: value for name, value in vars(findings).items() if name.isupper()}
    assert named == {
        "FINE": 0,
        "NEAR": 1,
        "SINGULAR": 2,
        "OUTSIDE_WORKING_TRAVEL": 3,
        "OUTSIDE_TRAVEL": 4,
        "ANGLES_NOT_UNIQUE": 5,
        "INPUT_REPAIRED": 6,
    }


@pytest.mark.parametrize(
    ("unit", "text"),
    [
        ("rad", "joint 2 of row 3: 1.23457 rad, limit 0.001 rad"),
        ("", "joint 2 of row 3: 1.23457, limit 0.001"),
    ],
)
def test_text_has_six_digits_and_the_unit(unit: str, text: str) -> None:
    say = "joint {joint} of row {row}: {measure}, limit {threshold}"
    assert Finding(4, "outside", say, 1.2345678, 1e-3, unit, joint=2, row=3).text() == text


def test_a_finding_is_a_value() -> None:
    finding = Finding(1, "near-singular", "near", 0.01, 0.02)
    assert finding == Finding(1, "near-singular", "near", 0.01, 0.02)
    assert (finding.unit, finding.joint, finding.row) == ("", None, None)
    with pytest.raises(FrozenInstanceError):
        finding.measure = 0.0  # type: ignore[misc]
