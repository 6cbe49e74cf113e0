"""Where joint values stand within their travel: margins and findings.

Limits bound the joint values of driven rows, the variable of passive ones, and sums of joint
values. Beyond travel is a finding, never an error: the arm may be there on a displayed value.
"""

from dataclasses import dataclass
from weakref import WeakKeyDictionary

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.chain import as_rows
from kinematics.findings import OUTSIDE_TRAVEL, OUTSIDE_WORKING_TRAVEL, Finding
from kinematics.kernels.travel import travel_left
from kinematics.table import FloatArray, Travel


@dataclass(frozen=True)
class Limit:
    """A bounded linear form of the joint values: ``weights . q + constant`` within ``travel``."""

    travel: Travel
    weights: FloatArray
    constant: float
    unit: str
    subject: str
    joint: int | None
    row: int | None
    working: bool
    reason: str = ""


@dataclass(frozen=True)
class Limits:
    """All limits of an arm, one under the other."""

    each: tuple[Limit, ...]
    weights: FloatArray
    constants: FloatArray
    lower: FloatArray
    upper: FloatArray
    working: NDArray[np.bool_]
    graver: NDArray[np.intp]
    """For each working limit the travel limit of the same subject, -1 for none."""

    def room(self, joint_values: FloatArray) -> FloatArray:
        """Return the share of each travel that is left, (..., limits); negative outside."""
        values = joint_values @ self.weights.T + self.constants
        left: FloatArray = np.minimum(values - self.lower, self.upper - values)
        return left / (self.upper - self.lower)


def travel_margin(arm: Arm, joint_values: FloatArray) -> FloatArray:
    """Return the smallest share of travel left, 0 to 0.5, negative outside; (...,).

    Infinite where nothing bounds the arm. Working travel does not count: it is advice.

    Parameters
    ----------
    joint_values : (..., joints), radians or metres.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> row = Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0, travel=Travel(-1.0, 1.0))
    >>> arm = Arm("one", Table(Convention.STANDARD, (row,)))
    >>> travel_margin(arm, np.array([[0.5], [2.0]]))
    array([ 0.25, -0.5 ])
    """
    return margin_and_outside(arm, joint_values)[0]


def working_margin(arm: Arm, joint_values: FloatArray) -> FloatArray:
    """Return the smallest share of working travel left, negative outside; (...,).

    Infinite where no working travel is said. Travel itself does not count.

    Parameters
    ----------
    joint_values : (..., joints), radians or metres.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> row = Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0, working_travel=Travel(-1.0, 1.0))
    >>> arm = Arm("one", Table(Convention.STANDARD, (row,)))
    >>> working_margin(arm, np.array([[0.5], [2.0]]))
    array([ 0.25, -0.5 ])
    """
    limits = limits_of(arm)
    room = limits.room(joint_values)[..., limits.working]
    least: FloatArray = room.min(axis=-1, initial=np.inf)
    return least


def beyond_travel(arm: Arm, joint_values: FloatArray) -> NDArray[np.bool_]:
    """Return which postures exceed a travel or working travel limit, (...,).

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> row = Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0, working_travel=Travel(-1.0, 1.0))
    >>> arm = Arm("one", Table(Convention.STANDARD, (row,)))
    >>> beyond_travel(arm, np.array([[0.5], [2.0]]))
    array([False,  True])
    """
    return margin_and_outside(arm, joint_values)[1]


def margin_and_outside(arm: Arm, joint_values: FloatArray) -> tuple[FloatArray, NDArray[np.bool_]]:
    """Return what ``travel_margin`` and ``beyond_travel`` tell, found together.

    Examples
    --------
    >>> from kinematics.table import Convention, Table
    >>> margin_and_outside(Arm("empty", Table(Convention.STANDARD, ())), np.empty((1, 0)))
    (array([inf]), array([False]))
    """
    batch, values = as_rows(joint_values)
    run = TravelRun(arm, values)
    run()
    return run.margin.reshape(batch), run.outside.reshape(batch)


class TravelRun:
    """The travel of so many postures and the kernel that finds it.

    Attributes
    ----------
    margin : (count,), smallest share of travel left; outside : (count,), beyond any limit; of the
        joint values that stood in ``joint_values`` (count, joints) at the last call.
    """

    def __init__(self, arm: Arm, joint_values: FloatArray) -> None:
        limits, count = limits_of(arm), len(joint_values)
        self.margin, self.outside = np.empty(count), np.empty(count, dtype=np.bool_)
        self._of_kernel = (
            joint_values,
            limits.weights,
            limits.constants,
            limits.lower,
            limits.upper,
            limits.working,
            self.margin,
            self.outside,
        )

    def __call__(self) -> None:
        """Find it."""
        travel_left(*self._of_kernel)


def limits_exceeded(
    arm: Arm, joint_values: FloatArray
) -> tuple[NDArray[np.bool_], NDArray[np.bool_]]:
    """Return which postures exceed a working travel limit, and which a travel limit; (...,) each.

    The kinds of ``travel_findings`` for many postures: working travel counts only where the same
    subject is within its travel.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> bounds = {"travel": Travel(-2.0, 2.0), "working_travel": Travel(-1.0, 1.0)}
    >>> row = Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0, **bounds)
    >>> arm = Arm("one", Table(Convention.STANDARD, (row,)))
    >>> limits_exceeded(arm, np.array([[0.5], [1.5], [2.5]]))
    (array([False,  True, False]), array([False, False,  True]))
    """
    limits = limits_of(arm)
    outside = limits.room(joint_values) < 0.0
    none = np.zeros((*outside.shape[:-1], 1), dtype=bool)
    outside_graver = np.concatenate([outside, none], axis=-1)[..., limits.graver]
    working = (outside & limits.working & ~outside_graver).any(axis=-1)
    return np.asarray(working), np.asarray(outside[..., ~limits.working].any(axis=-1))


def travel_findings(arm: Arm, joint_values: FloatArray) -> tuple[Finding, ...]:
    """Return a finding for each limit that one posture exceeds, naming joint, value and limit.

    Parameters
    ----------
    joint_values : (joints,), radians or metres.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> row = Row(JointKind.PRISMATIC, 0.0, 0.0, 0.0, 0.0, travel=Travel(0.0, 0.5))
    >>> arm = Arm("one", Table(Convention.STANDARD, (row,)))
    >>> travel_findings(arm, np.array([0.6]))[0].text()
    'joint 1 is at 0.6 m, beyond its travel limit 0.5 m'
    """
    (found,) = each_travel_findings(arm, joint_values[None])
    return found


def each_travel_findings(arm: Arm, joint_values: FloatArray) -> list[tuple[Finding, ...]]:
    """Return what ``travel_findings`` tells of each of many postures (count, joints).

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> row = Row(JointKind.PRISMATIC, 0.0, 0.0, 0.0, 0.0, travel=Travel(0.0, 0.5))
    >>> arm = Arm("one", Table(Convention.STANDARD, (row,)))
    >>> [len(found) for found in each_travel_findings(arm, np.array([[0.6], [0.5]]))]
    [1, 0]
    """
    limits = limits_of(arm)
    values = joint_values @ limits.weights.T + limits.constants
    return [_findings(limits, row) for row in values.tolist()]


def _findings(limits: Limits, values: list[float]) -> tuple[Finding, ...]:
    """Return the findings about what is bounded, at its values in the order of ``limits``."""
    found: list[Finding] = []
    beyond: set[str] = set()
    for limit, value in zip(limits.each, values, strict=True):
        lower, upper = limit.travel.lower, limit.travel.upper
        if lower <= value <= upper or limit.subject in beyond:
            continue
        reason = f" ({limit.reason})" if limit.reason else ""
        kind = "working travel" if limit.working else "travel"
        found.append(
            Finding(
                code=OUTSIDE_WORKING_TRAVEL if limit.working else OUTSIDE_TRAVEL,
                name="outside-working-travel" if limit.working else "outside-travel",
                say=f"{limit.subject} is at {{measure}}, beyond its {kind} limit "
                f"{{threshold}}{reason.replace('{', '{{').replace('}', '}}')}",
                measure=value,
                threshold=lower if value < lower else upper,
                unit=limit.unit,
                joint=limit.joint,
                row=limit.row,
            )
        )
        beyond.add(limit.subject)
    return tuple(found)


_kept: WeakKeyDictionary[Arm, Limits] = WeakKeyDictionary()
"""What was found of an arm, as long as somebody has the arm."""


def limits_of(arm: Arm) -> Limits:
    """Return all limits of an arm, travel before working travel; kept as long as the arm is.

    Examples
    --------
    >>> from kinematics.table import Convention, Table
    >>> limits_of(Arm("empty", Table(Convention.STANDARD, ()))).each
    ()
    """
    limits = _kept.get(arm)
    if limits is None:
        limits = _kept[arm] = _in_the_form_of_kernels(arm)
    return limits


def _in_the_form_of_kernels(arm: Arm) -> Limits:
    each = tuple(_listed(arm))
    travel = {limit.subject: place for place, limit in enumerate(each) if not limit.working}
    return Limits(
        each=each,
        weights=np.array([limit.weights for limit in each]).reshape(len(each), arm.joint_count),
        constants=np.array([limit.constant for limit in each]),
        lower=np.array([limit.travel.lower for limit in each]),
        upper=np.array([limit.travel.upper for limit in each]),
        working=np.array([limit.working for limit in each], dtype=bool),
        graver=np.array(
            [travel.get(limit.subject, -1) if limit.working else -1 for limit in each],
            dtype=np.intp,
        ),
    )


def _listed(arm: Arm) -> list[Limit]:
    """List the limits of the arm, travel before working travel so that the graver one is told."""
    limits: list[Limit] = []
    driven = arm.drive_map.driven
    for index, row in enumerate(arm.table.rows):
        if row.passive:
            weights, constant = arm.drive_map.matrix[index], row.offset
            subject, joint = f"passive row {index + 1}", None
        else:
            joint = driven.index(index) + 1
            weights, constant = np.eye(len(driven))[joint - 1], 0.0
            subject = f"joint {joint}"
        for travel, working in ((row.travel, False), (row.working_travel, True)):
            if travel is not None:
                reason = row.working_reason if working else ""
                limits.append(
                    Limit(
                        travel,
                        weights,
                        constant,
                        row.unit,
                        subject,
                        joint,
                        index + 1,
                        working,
                        reason,
                    )
                )
    for number, combined in enumerate(arm.combined_travel, start=1):
        weights = np.zeros(len(driven))
        for row_number, ratio in combined.ratios.items():
            weights[driven.index(row_number - 1)] = ratio
        unit = arm.table.rows[next(iter(combined.ratios)) - 1].unit
        terms = " + ".join(f"{ratio:g} x row {row}" for row, ratio in combined.ratios.items())
        subject = f"combined travel {number} ({terms})"
        limits.append(Limit(combined.travel, weights, 0.0, unit, subject, None, None, False))
    return limits
