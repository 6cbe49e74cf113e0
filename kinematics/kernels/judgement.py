"""What decomposed Jacobians of many postures say: state, numbers, the step to the singular place.

Left out: the words (kinematics/lost_motion.py) and what spare joints could share of a speed.
"""

import numpy as np
from numpy.typing import NDArray

from kinematics.kernels.compiler import compiled_exactly
from kinematics.kernels.jacobian import change_with_rows
from kinematics.number_checks import FloatArray

SMALLEST, CONDITION, MANIPULABILITY, SPEED_FACTOR, MOVED, TURNED, TRAVEL_JOINT = range(7)
"""Columns of the readings of a posture; NaN where there is no such number.

Smallest singular value; condition number, infinite where singular; product of the singular values;
tool speed along the weakest direction at full joint speeds, in scaled units; lengths of that
direction's linear part (m) and angular part (rad); index of the joint that goes furthest to the
singular place."""

READINGS = 7


@compiled_exactly
def judge_postures(
    values: FloatArray,
    left: FloatArray,
    right: FloatArray,
    of_rows: FloatArray,
    row_map: FloatArray,
    length: float,
    joint_scale: FloatArray,
    drive_matrix: FloatArray,
    top_speeds: FloatArray,
    rank: int,
    bounds: tuple[float, float, float, float, float],
    basis: FloatArray,
    state: NDArray[np.int64],
    ranks: NDArray[np.int64],
    directions: FloatArray,
    readings: FloatArray,
    step: FloatArray,
) -> None:
    """Write what the decomposition of each scaled Jacobian says.

    Parameters
    ----------
    values : (count, rank or more); left : (count, k, ...); right : (count, joints, joints).
    of_rows : (count, 6, rows); row_map : (k, 6), from the six rows to the scaled task rows.
    length : characteristic length; joint_scale : (joints,); drive_matrix : (rows, joints).
    top_speeds : (joints,), or (0,) where they are not known or spare joints could share them.
    rank : generic rank, at least 1.
    bounds : largest value that is singular, and that is near; smallest gradient that leads
        anywhere; longest step that does; share by which one joint must go further than another.
    basis : (task rows, k), of the motions that ``left`` is written in.
    state : (count,), 0 regular, 1 near, 2 singular; ranks : (count,).
    directions : (count, task rows, rank), the left vectors in the scaled task rows.
    readings : (count, READINGS); step : (count, joints), NaN where there is none to tell.

    Source
    ------
    Derivative of a singular value: u^T dJ v.
    """
    singular, near, level, furthest, tie = bounds
    count, joints, rows = values.shape[0], joint_scale.shape[0], drive_matrix.shape[0]
    weakest = rank - 1
    covector, rates = np.zeros((count, 6)), np.zeros((count, rows))
    for b in range(count):
        for k in range(row_map.shape[0]):
            for row in range(6):
                covector[b, row] += row_map[k, row] * left[b, k, weakest]
        for joint in range(joints):
            rate = right[b, joint, weakest] * joint_scale[joint]
            for row in range(rows):
                rates[b, row] += drive_matrix[row, joint] * rate
    of_variables = np.empty((count, rows))
    change_with_rows(of_rows, covector, rates, of_variables)
    for b in range(count):
        smallest = values[b, weakest]
        state[b] = 2 if smallest <= singular else (1 if smallest <= near else 0)
        ranks[b] = 0
        readings[b, MANIPULABILITY] = 1.0
        for k in range(rank):
            readings[b, MANIPULABILITY] *= values[b, k]
            ranks[b] += values[b, k] > singular
            for row in range(basis.shape[0]):
                directions[b, row, k] = 0.0
                for motion in range(basis.shape[1]):
                    directions[b, row, k] += basis[row, motion] * left[b, motion, k]
        readings[b, SMALLEST] = smallest
        readings[b, CONDITION] = values[b, 0] / smallest if smallest > singular else np.inf
        moved, turned = 0.0, 0.0
        for entry in range(3):
            moved += (covector[b, entry] * length * length) ** 2
            turned += covector[b, 3 + entry] ** 2
        readings[b, MOVED], readings[b, TURNED] = np.sqrt(moved), np.sqrt(turned)
    _tool_speeds(values, right, joint_scale, top_speeds, weakest, singular, readings)
    _steps_to_singular(
        values, of_variables, joint_scale, drive_matrix, weakest, (singular, level), step
    )
    _furthest_joints(joint_scale, step, furthest, tie, readings)


@compiled_exactly
def _tool_speeds(
    values: FloatArray,
    right: FloatArray,
    joint_scale: FloatArray,
    top_speeds: FloatArray,
    weakest: int,
    singular: float,
    readings: FloatArray,
) -> None:
    """Write the tool speed along the weakest direction at full joint speeds, NaN if not known."""
    for b in range(values.shape[0]):
        readings[b, SPEED_FACTOR] = np.nan
        if top_speeds.shape[0] > 0:
            demand = 0.0
            for joint in range(joint_scale.shape[0]):
                rate = right[b, joint, weakest] * joint_scale[joint]
                demand = max(demand, abs(rate) / top_speeds[joint])
            # At the singular place the rounding left of the value is no speed.
            smallest = values[b, weakest]
            readings[b, SPEED_FACTOR] = smallest / demand if smallest > singular else 0.0


@compiled_exactly
def _steps_to_singular(
    values: FloatArray,
    of_variables: FloatArray,
    joint_scale: FloatArray,
    drive_matrix: FloatArray,
    weakest: int,
    bounds: tuple[float, float],
    step: FloatArray,
) -> None:
    """Write the first-order step to the singular place, from what each row's variable changes."""
    singular, level = bounds
    rows, joints = drive_matrix.shape
    gradient = np.empty(joints)
    for b in range(values.shape[0]):
        squared = 0.0
        for joint in range(joints):
            change = 0.0
            for row in range(rows):
                change += of_variables[b, row] * drive_matrix[row, joint]
            gradient[joint] = change * joint_scale[joint]
            squared += gradient[joint] ** 2
        smallest = values[b, weakest]
        # At the singular place itself the value has a kink and its gradient says nothing.
        known = squared > level * level and smallest > singular
        for joint in range(joints):
            pure = -smallest / squared * gradient[joint]
            step[b, joint] = pure * joint_scale[joint] if known else np.nan


@compiled_exactly
def _furthest_joints(
    joint_scale: FloatArray, step: FloatArray, furthest: float, tie: float, readings: FloatArray
) -> None:
    """Write which joint goes furthest in each step, the first of several; NaN where none."""
    for b in range(step.shape[0]):
        readings[b, TRAVEL_JOINT] = np.nan
        most = 0.0
        for joint in range(joint_scale.shape[0]):
            pure = abs(step[b, joint]) / joint_scale[joint]
            # Of a step that is not known nothing is longer than anything.
            most = max(most, pure) if pure >= 0.0 else np.inf
        # Where the value is flat, the first-order step leads nowhere.
        if most <= furthest:
            for joint in range(joint_scale.shape[0]):
                if abs(step[b, joint]) >= most * (1.0 - tie) * joint_scale[joint]:
                    readings[b, TRAVEL_JOINT] = joint
                    break
