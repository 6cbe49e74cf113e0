"""The same arm in the other convention, as a document that can be stored.

Left out: the regrouping itself (the core's).
"""

from dataclasses import replace

import numpy as np

from kinematics.arm import BASE, Arm
from kinematics.findings import FINE, Finding
from kinematics.table import Convention, Table
from kinematics.table_conversion import converted
from service.convert import finding_out
from service.operations.arms import Arms
from service.operations.meant_arms import meant_arm
from service.wire import models
from service.wire.arms import ReadArm, arm_document

_LEFT = (
    "the base is no longer where the cell places it, so the arm is given without its cell: base "
    "and frames of the cell are its own now"
)
TEXTS = ("title", "status", "notes")


def converted_table(arms: Arms[ReadArm], asked: models.ConversionRequest) -> dict[str, object]:
    """Return the arm in the convention asked for, and what moved to make it so."""
    meant = meant_arm(arms, asked.arm)
    units = meant.read.units
    other = converted(meant.arm, Convention(asked.to))
    left_cell = _must_leave_cell(meant.arm, other)
    if left_cell:
        other = replace(other, cell=None)
    texts = {key: meant.read.document[key] for key in TEXTS if key in meant.read.document}
    findings = [*meant.repaired, *_moved(meant.arm.table, Convention(asked.to))]
    if left_cell:
        findings.append(Finding(FINE, "cell-left", _LEFT, 0.0, 0.0))
    return {
        "arm": arm_document(other, units, texts),
        "units": units.name,
        "findings": [finding_out(units, finding) for finding in findings],
    }


def _must_leave_cell(before: Arm, after: Arm) -> bool:
    """Whether the base has moved away from where the cell places it."""
    cell = before.cell
    places = cell is not None and cell.places_arm
    return places and not np.array_equal(before.base_in_world, after.base_in_world)


def _moved(before: Table, after: Convention) -> list[Finding]:
    """Return what moved, where something did: a and alpha of 0 move nothing."""
    if before.convention is after or not before.rows:
        return []
    row = before.rows[-1 if after is Convention.MODIFIED else 0]
    if row.a == 0 and row.alpha == 0:
        return []
    if after is Convention.MODIFIED:
        name = "flange-moved"
        say = (
            "the flange now sits at the last row's joint axis; every tool took in the last row's "
            "a and alpha, and the former flange is kept as a tool"
        )
    else:
        name = f"{BASE}-moved"
        say = (
            "the base took in the first row's a and alpha: poses in the base change, poses in the "
            "world do not"
        )
    return [Finding(FINE, name, say, 0.0, 0.0)]
