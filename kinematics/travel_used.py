"""How much of each travel a posture has used: what a scale with a mark and two stops shows.

Idea: one entry for each joint value, then for each bound on anything else (a passive row, a sum of
joint values), with travel and working travel side by side. Left out: margins and findings, which
say whether that is too much (travel_limits.py).
"""

from collections.abc import Sequence
from dataclasses import dataclass

from kinematics.arm import Arm
from kinematics.table import Travel
from kinematics.travel_limits import Limit, limits_of


@dataclass(frozen=True)
class TravelUsed:
    """Where one bounded value stands; rad or m, as ``unit`` says.

    Attributes
    ----------
    subject : in words, "joint 2"; joint, row : numbers from 1, None where it is no such thing.
    travel, working_travel : None where there is none.
    share : of the travel that lies below the value: 0 at the lower stop, 1 at the upper, outside
        of that beyond them; None without travel.
    """

    subject: str
    joint: int | None
    row: int | None
    value: float
    unit: str
    travel: Travel | None
    working_travel: Travel | None
    share: float | None


def travel_used(arm: Arm, joint_values: Sequence[float]) -> tuple[TravelUsed, ...]:
    """Return where each joint value of one posture (joints,) stands, and all else that is bounded.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> row = Row(JointKind.PRISMATIC, 0.0, 0.0, 0.0, 0.0, travel=Travel(0.0, 0.5))
    >>> arm = Arm("one", Table(Convention.STANDARD, (row,)))
    >>> travel_used(arm, [0.1])[0].share
    0.2
    """
    bounds: dict[str, dict[bool, Limit]] = {}
    for limit in limits_of(arm).each:
        bounds.setdefault(limit.subject, {})[limit.working] = limit
    used: list[TravelUsed] = []
    for joint, index in enumerate(arm.drive_map.driven, start=1):
        found = bounds.pop(f"joint {joint}", {})
        value, unit = float(joint_values[joint - 1]), arm.joint_units[joint - 1]
        used.append(_used(f"joint {joint}", joint, index + 1, value, unit, found))
    for subject, found in bounds.items():
        limit = next(iter(found.values()))
        value = float(limit.weights @ joint_values + limit.constant)
        used.append(_used(subject, limit.joint, limit.row, value, limit.unit, found))
    return tuple(used)


def _used(
    subject: str,
    joint: int | None,
    row: int | None,
    value: float,
    unit: str,
    found: dict[bool, Limit],
) -> TravelUsed:
    travel = found[False].travel if False in found else None
    working = found[True].travel if True in found else None
    share = None if travel is None else (value - travel.lower) / (travel.upper - travel.lower)
    return TravelUsed(subject, joint, row, value, unit, travel, working, share)
