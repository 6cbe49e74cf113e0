"""One posture's singularity told: kinds, joints, lost motions as twists and in words.

Left out: the numbers themselves (singularity.py).
"""

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import combinations
from math import isnan

import numpy as np

from kinematics import findings
from kinematics.arm import Arm
from kinematics.findings import Finding
from kinematics.jacobian import Motion, motion_of
from kinematics.kernels.judgement import MOVED, SPEED_FACTOR, TRAVEL_JOINT, TURNED
from kinematics.singular_kinds import Anatomy, kinds_of, support_of
from kinematics.singularity import NEAR, REGULAR, SINGULAR, STATES, Judgement
from kinematics.table import FloatArray
from kinematics.task_space import TaskSpace
from kinematics.tolerances import (
    LOST_PART,
    MOST_SPARE,
    NAMED_AXIS,
    NUDGE,
    SETTLED_DECIMALS,
)


@dataclass(frozen=True)
class LostMotion:
    """A direction the tool cannot take, as a unit twist in metres and radians.

    ``linear . v + angular . w = 0`` holds for every motion (v, w) the arm can make there. Near a
    singular posture it is the direction in which the arm is weakest.
    """

    linear: FloatArray
    angular: FloatArray
    say: str


@dataclass(frozen=True)
class PostureSingularity:
    """What one posture's singularity is called and what it costs; SI units.

    Attributes
    ----------
    joints : 1-based numbers of the joint values that move and move nothing.
    travel_to : joint number, signed travel to the singular place, unit; None where not known.
    tool_speed : largest speed (m/s) and turning speed (rad/s) along the weakest direction.
    """

    state: str
    kinds: tuple[str, ...]
    joints: tuple[int, ...]
    lost_motion: tuple[LostMotion, ...]
    travel_to: tuple[int, float, str] | None
    tool_speed: tuple[float, float] | None
    findings: tuple[Finding, ...]


def describe(
    arm: Arm,
    space: TaskSpace,
    anatomy: Anatomy,
    joint_values: FloatArray,
    tool_in_flange: FloatArray,
    motion: Motion,
    judgement: Judgement,
    base_in_frame: FloatArray,
    frame: str,
) -> PostureSingularity:
    """Tell one posture's singularity, lost motions in the axes of ``frame``.

    Parameters
    ----------
    joint_values : (joints,); motion, judgement : of that posture alone, no batch axes.
    base_in_frame : (3, 3), rotation of the base in the frame asked for.
    """
    state = int(judgement.state)
    kinds: tuple[str, ...] = ()
    joints: tuple[int, ...] = ()
    lost: list[FloatArray] = []
    if state != REGULAR:
        left = _lost_directions(arm, space, joint_values, tool_in_flange, judgement)
        lost = [_unit(space.covector(direction)) for direction in left]
        null_motions = _null_motions(judgement)
        taking_part = _taking_part(
            arm, space, joint_values, tool_in_flange, judgement, null_motions
        )
        in_joint_units = null_motions * space.joint_scale[:, None]
        kinds = kinds_of(arm, anatomy, motion, state, in_joint_units, taking_part, lost)
        joints = tuple(index + 1 for index in taking_part)
    travel_to, tool_speed = travel_and_speed(
        arm, judgement.readings.tolist(), judgement.step.tolist()
    )
    return PostureSingularity(
        state=STATES[state],
        kinds=kinds,
        joints=joints,
        lost_motion=tuple(
            _told(direction, space, base_in_frame, frame, state) for direction in lost
        ),
        travel_to=travel_to,
        tool_speed=tool_speed,
        findings=(
            *_state_findings(arm, space, judgement, kinds, joints),
            *_position_findings(arm, space, motion),
        ),
    )


def _lost_directions(
    arm: Arm,
    space: TaskSpace,
    joint_values: FloatArray,
    tool_in_flange: FloatArray,
    judgement: Judgement,
) -> list[FloatArray]:
    """Return the scaled directions (rows,) that are lost, or weak, the weakest first."""
    state = int(judgement.state)
    threshold = space.near if state == NEAR else arm.thresholds.singular
    weak = [k for k in range(space.generic_rank) if judgement.values[k] <= threshold][::-1]
    if state == NEAR:
        return [judgement.left[:, k] for k in weak]
    if space.basis.shape[1] == space.generic_rank:
        return _settled([judgement.left[:, k] for k in weak])
    # Here the direction the arm never has (five joints lack one of six) moves with the posture,
    # and at the singular place it mixes with what is lost. A hair aside the two are distinct.
    scaled = space.scaled(_nudged(arm, space, joint_values, tool_in_flange))
    left = np.linalg.svd(scaled, full_matrices=False)[0]
    kept = judgement.left[:, : int(judgement.rank)]
    aside = [left[:, k] - kept @ (kept.T @ left[:, k]) for k in weak]
    return _settled(aside)


def _settled(directions: list[FloatArray]) -> list[FloatArray]:
    """Return an orthonormal basis of the same space, as near to the axes as it goes.

    Lost directions are equally lost, and rounding alone would turn the ones it finds.
    """
    spanning = np.linalg.qr(np.array(directions).T)[0]
    remaining = spanning @ spanning.T
    settled: list[FloatArray] = []
    for _ in directions:
        # Rounded, so that of axes that share a direction equally the first is taken.
        axis = int(np.diag(remaining).round(SETTLED_DECIMALS).argmax())
        settled.append(remaining[axis] / np.sqrt(remaining[axis, axis]))
        remaining = remaining - np.outer(settled[-1], settled[-1])
    return settled


def _nudged(
    arm: Arm, space: TaskSpace, joint_values: FloatArray, tool_in_flange: FloatArray
) -> FloatArray:
    """Return the Jacobian where the one-joint nudge that mends the posture most has been made."""
    postures = joint_values + NUDGE * np.diag(space.joint_scale)
    jacobians = motion_of(arm, postures, tool_in_flange).of_joints
    values = np.linalg.svd(space.scaled(jacobians), compute_uv=False)
    best: FloatArray = jacobians[int(values[:, space.generic_rank - 1].argmax())]
    return best


def _null_motions(judgement: Judgement) -> FloatArray:
    """Return joint motions (joints, k), pure numbers, that (nearly) do not move the task."""
    if int(judgement.state) == NEAR:
        return judgement.right[:, -1:]
    return np.hstack([judgement.right[:, int(judgement.rank) :], judgement.rest])


def _taking_part(
    arm: Arm,
    space: TaskSpace,
    joint_values: FloatArray,
    tool_in_flange: FloatArray,
    judgement: Judgement,
    null_motions: FloatArray,
) -> tuple[int, ...]:
    """Return the indices of the joints that tell the posture.

    With spare joints, what the posture lost mixes with what the arm can always do without moving
    its tool. Two ways to tell them apart are tried, and the one that names fewer joints is taken:
    what is left once the free motions of a posture a hair aside are taken out, and the fewest
    joints whose motion moves nothing.
    """
    state = int(judgement.state)
    spare = judgement.rest.shape[1]
    if state == NEAR or not spare:
        return support_of(null_motions, state)
    scaled = space.scaled(_nudged(arm, space, joint_values, tool_in_flange))
    free = np.linalg.svd(scaled)[2][space.generic_rank :].T
    taken_out = null_motions @ np.linalg.svd(free.T @ null_motions)[2][spare:].T
    ways = [support_of(taken_out, NEAR)]
    if spare <= MOST_SPARE:
        ways.append(_fewest_joints(null_motions, spare))
    return min(ways, key=len)


def _fewest_joints(null_motions: FloatArray, spare: int) -> tuple[int, ...]:
    """Return the joints of the null motions that take the fewest, of several such of all.

    As many entries can be made zero as there are spare motions.
    """
    supports = []
    for zeroed in combinations(range(null_motions.shape[0]), spare):
        left_over = np.linalg.svd(null_motions[list(zeroed)])[2][spare:].T
        supports.append(support_of(null_motions @ left_over, SINGULAR))
    fewest = min(len(support) for support in supports)
    return tuple(sorted({i for support in supports if len(support) == fewest for i in support}))


def _told(
    direction: FloatArray, space: TaskSpace, base_in_frame: FloatArray, frame: str, state: int
) -> LostMotion:
    linear, angular = base_in_frame @ direction[:3], base_in_frame @ direction[3:]
    verb = "cannot" if state == SINGULAR else "can hardly"
    # Compare the parts as pure numbers: a twist's linear part is a force's counterpart here.
    moved, turned = np.linalg.norm(linear) * space.length, np.linalg.norm(angular)
    if turned <= LOST_PART * moved:
        say = f"the tool {verb} move along {_axis(linear, frame)}"
    elif moved <= LOST_PART * turned:
        say = f"the tool {verb} turn about {_axis(angular, frame)}"
    else:
        say = (
            f"the tool {verb} turn about {_axis(angular, frame)} "
            f"without moving along {_axis(linear, frame)}"
        )
    return LostMotion(linear + 0.0, angular + 0.0, say)


def _axis(vector: FloatArray, frame: str) -> str:
    unit = _unit(vector)
    largest = int(np.abs(unit).argmax())
    if abs(unit[largest]) >= NAMED_AXIS:
        return f"{frame} {'xyz'[largest]}"
    entries = ", ".join(f"{round(float(entry), 2) + 0.0:.2f}" for entry in unit)
    return f"{frame} direction ({entries})"


def _unit(vector: FloatArray) -> FloatArray:
    unit: FloatArray = vector / np.linalg.norm(vector)
    # Sign is free: let the largest entry be positive, so that answers do not flicker.
    return unit if unit[int(np.abs(unit).argmax())] > 0 else -unit


def travel_and_speed(
    arm: Arm, readings: Sequence[float], step: Sequence[float]
) -> tuple[tuple[int, float, str] | None, tuple[float, float] | None]:
    """Return ``travel_to`` and ``tool_speed`` of one posture from its numbers in a judgement.

    Parameters
    ----------
    readings : (READINGS,); step : (joints,), both of that posture, as plain floats.
    """
    joint, factor = readings[TRAVEL_JOINT], readings[SPEED_FACTOR]
    travel_to = None
    if not isnan(joint):
        index = int(joint)
        travel_to = (index + 1, step[index], arm.joint_units[index])
    tool_speed = None
    if not isnan(factor):
        tool_speed = (factor * readings[MOVED], factor * readings[TURNED])
    return travel_to, tool_speed


def _state_findings(
    arm: Arm,
    space: TaskSpace,
    judgement: Judgement,
    kinds: Sequence[str],
    joints: Sequence[int],
) -> tuple[Finding, ...]:
    state = int(judgement.state)
    if state == REGULAR:
        return ()
    where = f"{' and '.join(kinds)}, joints {', '.join(map(str, joints))}"
    if state == SINGULAR:
        threshold, name = arm.thresholds.singular, "singular"
        say = f"singular ({where}): smallest singular value {{measure}}, zero below {{threshold}}"
    else:
        threshold, name = space.near, "near-singular"
        say = f"near singular ({where}): smallest singular value {{measure}} below {{threshold}}"
    code = findings.SINGULAR if state == SINGULAR else findings.NEAR
    return (Finding(code, name, say, float(judgement.smallest), threshold),)


def _position_findings(arm: Arm, space: TaskSpace, motion: Motion) -> tuple[Finding, ...]:
    rank = space.watched_position_rank
    if not rank:
        return ()
    linear = motion.of_joints[:3] * space.joint_scale / space.length
    value = float(np.linalg.svd(linear, compute_uv=False)[rank - 1])
    if value > arm.thresholds.singular:
        return ()
    say = (
        "the tool point alone has lost a direction: singular value {measure} of the linear rows, "
        "zero below {threshold}"
    )
    return (Finding(findings.FINE, "position-singular", say, value, arm.thresholds.singular),)
