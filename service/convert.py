"""Units at the edge: metres and radians inside, the user's units outside, converted here alone.

Nothing else in the service does arithmetic on poses, angles or lengths.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from math import degrees
from typing import Any

import numpy as np

from kinematics.arm import Arm
from kinematics.findings import Finding
from kinematics.orientation_forms import TRIPLES, values_and_distance, values_of
from kinematics.table import FloatArray

ARMS_KEPT = 512
"""Arms, by the units of their joints, whose scales are kept, some 500 bytes each."""

THRESHOLDS_KEPT = 1024
"""Limits of travel and the like, as they were typed, some 100 bytes each."""

_METRES = {"mm": (1.0, 1000.0), "m": (1.0, 1.0), "in": (0.0254, 1.0)}
"""Each length unit in metres, as a numerator and a denominator: 400 mm divided by 1000 is the
double nearest to 0.4 m, which 400 times 0.001 need not be. The inch is exactly 25.4 mm
(international yard and pound agreement, 1959)."""

_RADIANS = {"deg": float(np.deg2rad(1.0)), "rad": 1.0}
_ANGLES = {"deg": float(np.rad2deg(1.0)), "rad": 1.0}

_ANGULAR = frozenset({*TRIPLES, "rotation-vector"})


@dataclass(frozen=True)
class Units:
    """One of the wire's unit systems.

    Examples
    --------
    >>> UNITS["mm-deg"].length_in(400.0), UNITS["mm-deg"].angle_out(np.pi)
    (np.float64(0.4), np.float64(180.0))
    """

    name: str
    length: str
    angle: str

    def length_in(self, value: float | FloatArray) -> FloatArray:
        """Return metres."""
        numerator, denominator = _METRES[self.length]
        metres: FloatArray = np.multiply(value, numerator) / denominator
        return metres

    def length_out(self, metres: float | FloatArray) -> FloatArray:
        """Return lengths in the user's unit."""
        numerator, denominator = _METRES[self.length]
        lengths: FloatArray = np.multiply(metres, denominator) / numerator
        return lengths

    def power_out(self, value: float, power: int) -> float:
        """Return an area (``power`` 2) or a volume (3) in the user's unit of length."""
        for _ in range(power):
            value = float(self.length_out(value))
        return value

    def angle_in(self, value: float | FloatArray) -> FloatArray:
        """Return radians."""
        # The same as deg2rad of each, in a quarter of the time.
        radians: FloatArray = np.multiply(value, _RADIANS[self.angle])
        return radians

    def angle_out(self, radians: float | FloatArray) -> FloatArray:
        """Return angles in the user's unit."""
        angles: FloatArray = np.multiply(radians, _ANGLES[self.angle])
        return angles

    def value_in(self, value: float, unit: str) -> float:
        """Return a joint value or bound in SI; ``unit`` is its SI unit."""
        return float(self.angle_in(value) if unit == "rad" else self.length_in(value))

    def value_out(self, value: float, unit: str) -> float:
        """Return an SI value in the user's unit; a pure number stays as it is."""
        if unit == "rad":
            return degrees(value) if self.angle == "deg" else value
        if unit == "m":
            numerator, denominator = _METRES[self.length]
            return value * denominator / numerator
        return value

    def shortest_out(self, value: float, unit: str) -> float:
        """Return an SI value in the user's unit with the fewest digits that lead back to it.

        A table that is rewritten must show the numbers its owner typed, 37.3 and not
        37.300000000000004.

        Examples
        --------
        >>> units = UNITS["mm-deg"]
        >>> units.shortest_out(units.value_in(37.3, "rad"), "rad")
        37.3
        """
        shown = self.value_out(value, unit)
        for digits in (12, 15, 16):
            shorter = float(f"{shown:.{digits}g}")
            if self.value_in(shorter, unit) == value:
                return shorter
        return shown

    def unit_out(self, unit: str) -> str:
        """Return the user's name for an SI unit."""
        return {"rad": self.angle, "m": self.length}.get(unit, unit)


UNITS = {
    "mm-deg": Units("mm-deg", "mm", "deg"),
    "m-rad": Units("m-rad", "m", "rad"),
    "in-deg": Units("in-deg", "in", "deg"),
}


def joint_values_in(arm: Arm, units: Units, values: FloatArray) -> FloatArray:
    """Return joint values, speeds or steps (..., joints) in SI."""
    factors, divisors = _joint_scales(arm.joint_units, units.name)[0]
    return values * factors / divisors


def joint_row_in(arm: Arm, units: Units, values: Sequence[float]) -> list[float]:
    """Return the values of one posture, a plain number for each joint, in SI."""
    factors, divisors = _joint_scales(arm.joint_units, units.name)[1]
    return [
        value * factor / divisor
        for value, factor, divisor in zip(values, factors, divisors, strict=True)
    ]


@lru_cache(maxsize=ARMS_KEPT)
def _joint_scales(
    joint_units: tuple[str, ...], units: str
) -> tuple[tuple[FloatArray, FloatArray], tuple[list[float], list[float]]]:
    """Return what joint values are multiplied by and then divided by to be SI, (joints,) each.

    As arrays, and as plain numbers.
    """
    numerator, denominator = _METRES[UNITS[units].length]
    per_angle = float(UNITS[units].angle_in(1.0))
    revolute = [unit == "rad" for unit in joint_units]
    factors = np.where(revolute, per_angle, numerator)
    divisors = np.where(revolute, 1.0, denominator)
    return (factors, divisors), (factors.tolist(), divisors.tolist())


def joint_values_out(arm: Arm, units: Units, values: FloatArray) -> FloatArray:
    """Return joint values, speeds or steps (..., joints) in the user's units."""
    return np.where(arm.revolute_joints, units.angle_out(values), units.length_out(values))


def joint_row_out(arm: Arm, units: Units, values: Sequence[float]) -> list[float]:
    """Return the values of one posture, a plain number for each joint, in the user's units."""
    return [
        units.value_out(value, unit) for value, unit in zip(values, arm.joint_units, strict=True)
    ]


def twists_in(units: Units, twists: FloatArray) -> FloatArray:
    """Return twists (..., 6) in m/s and rad/s."""
    return np.concatenate(
        [units.length_in(twists[..., :3]), units.angle_in(twists[..., 3:])], axis=-1
    )


def twists_out(units: Units, twists: FloatArray) -> FloatArray:
    """Return twists (..., 6) in the user's units per second."""
    return np.concatenate(
        [units.length_out(twists[..., :3]), units.angle_out(twists[..., 3:])], axis=-1
    )


def jacobians_out(arm: Arm, units: Units, of_joints: FloatArray) -> FloatArray:
    """Return Jacobians (..., 6, joints) in the user's tool units per joint unit."""
    per_joint = joint_values_in(arm, units, np.ones(arm.joint_count))
    jacobians: FloatArray = of_joints * (twists_out(units, np.ones(6))[:, None] * per_joint)
    return jacobians


def orientation_in(units: Units, form: str, values: FloatArray) -> FloatArray:
    """Return the values of an orientation form in SI: triples and rotation vectors are angles."""
    return units.angle_in(values) if _is_angular(form) else values


def orientation_out(units: Units, form: str, rotation: FloatArray) -> FloatArray:
    """Return the values of rotations (..., 3, 3) in a form and the user's units."""
    return values_out(units, form, values_of(form, rotation))


def pose_orientations_out(
    units: Units, form: str, poses: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Return the rotations of poses (count, 4, 4) in a form and the user's units.

    Beside them how far from gimbal lock they are, (count,) in rad; infinite for forms without one.
    """
    values, from_lock = values_and_distance(form, poses)
    return values_out(units, form, values), from_lock


def orientation_values_out(units: Units, form: str, values: list[Any]) -> list[Any]:
    """Return the values of one orientation, plain numbers in SI, in the user's units."""
    return [units.value_out(value, "rad") for value in values] if _is_angular(form) else values


def values_out(units: Units, form: str, values: FloatArray) -> FloatArray:
    """Return the values of an orientation form in the user's units."""
    return units.angle_out(values) if _is_angular(form) else values


_NOTHING = 1e-13
"""In any unit: below every threshold that is told, and what double arithmetic leaves of a zero."""


def number_said(value: float) -> str:
    """Return a number as it stands in a sentence: six digits, what rounding left of 0 as 0.

    Examples
    --------
    >>> number_said(500.8036237), number_said(-4.96156e-15), number_said(1e-12)
    ('500.804', '0', '1e-12')
    """
    return "0" if abs(value) < _NOTHING else f"{value:.6g}"


def finding_out(units: Units, finding: Finding) -> dict[str, object]:
    """Return a finding as answered, its sentence and numbers in the user's units."""
    return _finding_at(units, finding, units.shortest_out(finding.measure, finding.unit))


def computed_finding_out(units: Units, finding: Finding) -> dict[str, object]:
    """Return a finding about what was computed and not typed: all digits of its measure count."""
    return _finding_at(units, finding, units.value_out(finding.measure, finding.unit))


def _finding_at(units: Units, finding: Finding, measure: float) -> dict[str, object]:
    unit = units.unit_out(finding.unit)
    threshold = _threshold_out(units, finding.threshold, finding.unit)
    shown = f" {unit}" if unit else ""
    answer: dict[str, object] = {
        "code": finding.code,
        "name": finding.name,
        "say": finding.say.format(
            measure=number_said(measure) + shown,
            threshold=number_said(threshold) + shown,
            joint=finding.joint,
            row=finding.row,
        ),
        "measure": measure,
        "threshold": threshold,
        "unit": unit,
    }
    if finding.joint is not None:
        answer["joint"] = finding.joint
    if finding.row is not None:
        answer["row"] = finding.row
    return answer


@lru_cache(maxsize=THRESHOLDS_KEPT)
def _threshold_out(units: Units, threshold: float, unit: str) -> float:
    """Return a threshold as its owner typed it; few are met again and again."""
    return units.shortest_out(threshold, unit)


def _is_angular(form: str) -> bool:
    return form in _ANGULAR
