"""Rows between the wire and the core: each number in its own unit, ratios between unlike joints."""

import numpy as np
import pytest

from kinematics.table import JointKind, Travel
from service.convert import UNITS
from service.wire import models
from service.wire.arm_rows import (
    combined_document,
    read_combined,
    read_row,
    read_uncertainty,
    row_document,
)

GIVEN = [
    {"joint": "revolute", "a": 25.4, "alpha": -90, "d": 400, "theta": 0, "travel": [-90, 180]},
    {
        "joint": "prismatic",
        "a": 0,
        "alpha": 0,
        "d": 0,
        "theta": 0,
        "top_speed": 500,
        "couplings": [{"axis": 1, "ratio": 2.0}],
    },
]
ROWS = [models.Row.model_validate(row) for row in GIVEN]
MM, INCH = UNITS["mm-deg"], UNITS["in-deg"]


def test_numbers_are_read_in_the_unit_of_the_joint() -> None:
    turning, sliding = (read_row(row, ROWS, MM) for row in ROWS)
    assert (turning.joint, turning.a, turning.d) == (JointKind.REVOLUTE, 0.0254, 0.4)
    assert turning.travel == Travel(-np.pi / 2, np.pi)
    assert sliding.top_speed == 0.5
    # 2 mm for each degree.
    assert sliding.couplings[0].ratio == pytest.approx(0.002 * 180.0 / np.pi)


def test_rows_go_out_as_they_came_and_in_other_units() -> None:
    rows = tuple(read_row(row, ROWS, MM) for row in ROWS)
    told = [row_document(row, rows, MM) for row in rows]
    assert told[0] == GIVEN[0]
    assert told[1]["couplings"][0]["ratio"] == pytest.approx(2.0)
    assert row_document(rows[0], rows, INCH)["a"] == 1
    assert row_document(rows[1], rows, INCH)["couplings"][0]["ratio"] == pytest.approx(2.0 / 25.4)


def test_sums_have_the_unit_of_their_first_joint() -> None:
    rows = tuple(read_row(row, ROWS, MM) for row in ROWS)
    given = models.CombinedTravel.model_validate({"ratios": {"2": 1.0}, "travel": [-60, 75]})
    combined = read_combined(given, rows, MM)
    assert combined.travel == Travel(-0.06, 0.075)
    assert combined_document(combined, rows, MM) == {"ratios": {"2": 1.0}, "travel": [-60, 75]}


def test_uncertainties_too_many_are_left_for_the_arm_to_refuse() -> None:
    rows = tuple(read_row(row, ROWS, MM) for row in ROWS)
    assert read_uncertainty([180.0, 2.0, 7.0], rows, MM) == (np.pi, 0.002, 7.0)
