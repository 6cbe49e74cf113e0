"""Rows of an arm between the wire and the core: their numbers in SI units, and back.

A row's own unit is that of its joint; ratios between rows are of the one's unit per the other's.

Left out: the arm around them (arms.py), and what is wrong with rows (kinematics/table.py).
"""

from typing import Any

from kinematics.arm import CombinedTravel
from kinematics.table import Coupling, JointKind, Row, Travel
from service.convert import Units
from service.wire import models


def read_row(row: models.Row, rows: list[models.Row], units: Units) -> Row:
    """Return a row of a document whose shapes and types are checked; ``rows`` are all of them."""
    unit = _si_unit(row.joint)
    return Row(
        joint=JointKind(row.joint),
        a=float(units.length_in(row.a)),
        alpha=float(units.angle_in(row.alpha)),
        d=float(units.length_in(row.d)),
        theta=float(units.angle_in(row.theta)),
        direction=row.direction,
        travel=_bounds_in(row.travel, unit, units),
        working_travel=_bounds_in(row.working_travel, unit, units),
        working_reason=row.working_reason or "",
        top_speed=None if row.top_speed is None else units.value_in(row.top_speed, unit),
        couplings=tuple(
            Coupling(
                coupling.axis,
                coupling.ratio * _ratio_scale(row.joint, rows, coupling.axis, units),
            )
            for coupling in row.couplings
        ),
        passive=row.passive,
    )


def row_document(row: Row, rows: tuple[Row, ...], units: Units) -> dict[str, Any]:
    """Return a row as a document in ``units``; what has its usual value is left out."""
    document: dict[str, Any] = {
        "joint": row.joint.value,
        "a": units.shortest_out(row.a, "m"),
        "alpha": units.shortest_out(row.alpha, "rad"),
        "d": units.shortest_out(row.d, "m"),
        "theta": units.shortest_out(row.theta, "rad"),
    }
    if row.direction != 1:
        document["direction"] = row.direction
    if row.travel is not None:
        document["travel"] = _bounds_out(row.travel, row.unit, units)
    if row.working_travel is not None:
        document["working_travel"] = _bounds_out(row.working_travel, row.unit, units)
    if row.working_reason:
        document["working_reason"] = row.working_reason
    if row.top_speed is not None:
        document["top_speed"] = units.shortest_out(row.top_speed, row.unit)
    if row.couplings:
        document["couplings"] = [
            {
                "axis": coupling.axis,
                "ratio": units.value_out(coupling.ratio, row.unit)
                / units.value_out(1.0, rows[coupling.axis - 1].unit),
            }
            for coupling in row.couplings
        ]
    if row.passive:
        document["passive"] = True
    return document


def read_combined(
    given: models.CombinedTravel, rows: tuple[Row, ...], units: Units
) -> CombinedTravel:
    """Return the bounds of a sum of joint values; its unit is that of the first of them."""
    ratios = {int(number): ratio for number, ratio in given.ratios.items()}
    first = next(iter(ratios), 0)
    unit = rows[first - 1].unit if 1 <= first <= len(rows) else "rad"
    travel = Travel(*(units.value_in(bound, unit) for bound in given.travel))
    return CombinedTravel(ratios, travel)


def combined_document(given: CombinedTravel, rows: tuple[Row, ...], units: Units) -> dict[str, Any]:
    """Return the bounds of a sum of joint values as a document in ``units``."""
    unit = rows[next(iter(given.ratios)) - 1].unit
    return {
        "ratios": {str(row): ratio for row, ratio in given.ratios.items()},
        "travel": _bounds_out(given.travel, unit, units),
    }


def read_uncertainty(given: list[float], rows: tuple[Row, ...], units: Units) -> tuple[float, ...]:
    """Return the uncertainties of joint values in SI units; those too many are left as they are."""
    driven = [row.unit for row in rows if not row.passive]
    read = [units.value_in(value, unit) for value, unit in zip(given, driven, strict=False)]
    return (*read, *given[len(driven) :])


def _ratio_scale(joint: str, rows: list[models.Row], axis: int, units: Units) -> float:
    """Return SI per SI for a ratio given in this row's unit per the other's; 1 for like kinds."""
    other = rows[axis - 1].joint if 1 <= axis <= len(rows) else joint
    if other == joint:
        return 1.0
    return units.value_in(1.0, _si_unit(joint)) / units.value_in(1.0, _si_unit(other))


def _si_unit(joint: str) -> str:
    return "rad" if joint == "revolute" else "m"


def _bounds_in(bounds: list[float] | None, unit: str, units: Units) -> Travel | None:
    if bounds is None:
        return None
    lower, upper = (units.value_in(bound, unit) for bound in bounds)
    return Travel(lower, upper)


def _bounds_out(bounds: Travel, unit: str, units: Units) -> list[float]:
    return [units.shortest_out(bound, unit) for bound in bounds]
