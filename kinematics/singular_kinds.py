"""Which part of the arm a singular posture comes from, by geometry: wrist, elbow, shoulder, ...

Each kind has a measure between 0 (it is there) and 1, made of axes and points alone, so that two
kinds that meet in one rank drop are both told. Left out: whether the posture is singular at all.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.jacobian import Motion, motion_of
from kinematics.singularity import NEAR, SINGULAR, change_of_form
from kinematics.table import FloatArray
from kinematics.task_space import TaskSpace
from kinematics.tolerances import (
    AXES_MEET,
    AXES_PARALLEL,
    KIND_AT,
    KIND_NEARBY,
    KIND_TIED,
    KIND_TYPICAL,
    SUPPORT_AT,
    SUPPORT_NEAR,
)


@dataclass(frozen=True)
class Anatomy:
    """The parts of an arm that give singular postures their names, found once per tool and task.

    Attributes
    ----------
    wrist : last three rows, where they are revolute and the task asks for an orientation.
    wrist_point : rows whose axes meet in the point the arm's inner joints carry; empty means the
        tool point.
    runs : groups of successive revolute rows with parallel axes.
    shoulder : first revolute row, and the next one not parallel to it (-1 where there is none).
    typical : the largest value of each measure over the sample postures.
    """

    wrist: tuple[int, ...]
    wrist_point: tuple[int, ...]
    runs: tuple[tuple[int, ...], ...]
    shoulder: tuple[int, int]
    positional: bool
    length: float
    near: float
    typical: dict[tuple[str, int], float]


def anatomy_of(arm: Arm, space: TaskSpace, tool_in_flange: FloatArray) -> Anatomy:
    """Find the parts of an arm that its singular postures are named after.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> from kinematics.task_space import task_space
    >>> rows = (Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0),) * 2
    >>> arm = Arm("planar", Table(Convention.STANDARD, rows))
    >>> anatomy_of(arm, task_space(arm, np.eye(4)), np.eye(4)).runs
    ((0, 1),)
    """
    revolute = arm.table.chain.revolute
    rows = [index for index in range(len(revolute)) if revolute[index]]
    zero = motion_of(arm, np.zeros(arm.joint_count), tool_in_flange)
    axis, point = zero.axis_direction, zero.axis_point
    positional = all(row < 3 for row in space.rows)
    trailing = _trailing_revolute(revolute)
    wrist = trailing[-3:] if len(trailing) >= 3 and not positional else ()
    anatomy = Anatomy(
        wrist=wrist,
        wrist_point=() if positional else _meeting_rows(axis, point, trailing, space.length),
        runs=_parallel_runs(axis, revolute),
        shoulder=_shoulder_rows(axis, rows),
        positional=positional,
        length=space.length,
        near=space.near,
        typical={},
    )
    samples = motion_of(arm, space.samples, tool_in_flange)
    for index in range(len(space.samples)):
        for kind, measure in _measures(anatomy, samples.of_posture(index)):
            known = anatomy.typical.get(kind, 0.0)
            anatomy.typical[kind] = max(known, measure)
    return anatomy


def kinds_of(
    arm: Arm,
    anatomy: Anatomy,
    motion: Motion,
    state: int,
    null_motions: FloatArray,
    taking_part: Sequence[int],
    lost: Sequence[FloatArray],
) -> tuple[str, ...]:
    """Return the kinds of one near or singular posture, the closest first.

    Parameters
    ----------
    motion : of one posture.
    null_motions : (joints, k), joint motions (rad, m) that (nearly) do not move the task.
    taking_part : indices of the joints that tell the posture where no measure does.
    lost : directions (6,) in metres and radians, base axes, that are (nearly) lost.

    Source
    ------
    The names: Siciliano, Sciavicco, Villani and Oriolo, section 3.3; Craig, chapter 5. The
    measures are our own and hold for offsets too.
    """
    measures: dict[str, float] = {}
    for kind, measure in _measures(anatomy, motion):
        typical = anatomy.typical[kind]
        # A measure that is small everywhere is the build of the arm, not a posture's trouble.
        if typical > KIND_TYPICAL:
            measures[kind[0]] = min(measures.get(kind[0], np.inf), measure / typical)
    closest = min(measures.values(), default=np.inf)
    if state == SINGULAR:
        limit = KIND_AT
    else:
        limit = max(anatomy.near, KIND_TIED * closest) if closest < KIND_NEARBY else 0.0
    kinds = [kind for kind in sorted(measures, key=measures.__getitem__) if measures[kind] <= limit]
    if not kinds:
        kinds = [_by_joints(arm, anatomy, taking_part)]
    stretched = state == SINGULAR and "elbow" in kinds
    if stretched and _at_boundary(arm, anatomy, motion, null_motions, lost):
        kinds.append("boundary")
    return tuple(kinds)


def support_of(null_motions: FloatArray, state: int) -> tuple[int, ...]:
    """Return the indices of the joints that take part in (nearly) null motions (joints, k).

    With spare joints a null motion may mix what the posture lost with what the arm always can;
    the fewest joints whose motion moves nothing are then the telling ones.

    Examples
    --------
    >>> support_of(np.array([[0.0], [0.7], [-0.7]]), SINGULAR)
    (1, 2)
    """
    threshold = SUPPORT_NEAR if state == NEAR else SUPPORT_AT
    taking_part = np.abs(null_motions).max(axis=1, initial=0.0) > threshold
    return tuple(int(index) for index in np.flatnonzero(taking_part))


def _measures(anatomy: Anatomy, motion: Motion) -> Iterator[tuple[tuple[str, int], float]]:
    """Yield each kind, numbered where an arm has several of it, with its measure."""
    axis, point = motion.axis_direction, motion.axis_point
    carried = _carried_point(anatomy, motion)
    if anatomy.wrist:
        values = np.linalg.svd(axis[list(anatomy.wrist)], compute_uv=False)
        yield ("wrist", 0), float(values[-1])
    for number, run in enumerate(anatomy.runs):
        points = [point[row] for row in run]
        if len(run) == 2 or anatomy.positional:
            points.append(carried)
        kind = "elbow" if len(points) == 3 else "alignment"
        yield (kind, number), _bend(points, axis[run[0]])
    first, second = anatomy.shoulder
    if first >= 0:
        out = carried - point[first]
        if second >= 0:
            lever = abs(float(axis[first] @ np.cross(out, axis[second])))
        else:
            lever = float(np.linalg.norm(np.cross(out, axis[first])))
        yield ("shoulder", 0), lever / anatomy.length


def _carried_point(anatomy: Anatomy, motion: Motion) -> FloatArray:
    rows = list(anatomy.wrist_point)
    if not rows:
        tool_point: FloatArray = motion.tool_in_base[:3, 3]
        return tool_point
    if len(rows) == 1:
        last: FloatArray = motion.axis_point[rows[0]]
        return last
    return _closest_point(motion.axis_direction[rows], motion.axis_point[rows])


def _bend(points: list[FloatArray], normal: FloatArray) -> float:
    """Return the largest sine between successive links, seen along the axes; 0 if stretched."""
    links = [second - first for first, second in pairwise(points)]
    flat = [link - normal * (normal @ link) for link in links]
    sines = [0.0]
    for first, second in pairwise(flat):
        lengths = float(np.linalg.norm(first) * np.linalg.norm(second))
        if lengths > 0.0:
            sines.append(float(np.linalg.norm(np.cross(first, second))) / lengths)
    return max(sines)


def _trailing_revolute(revolute: NDArray[np.bool_]) -> tuple[int, ...]:
    count = len(revolute)
    start = count
    while start > 0 and revolute[start - 1]:
        start -= 1
    return tuple(range(start, count))


def _meeting_rows(
    axis: FloatArray, point: FloatArray, trailing: tuple[int, ...], length: float
) -> tuple[int, ...]:
    """Return the last three or two trailing rows if their axes meet, else the last one."""
    for count in (3, 2):
        rows = list(trailing[-count:])
        if len(rows) < count:
            continue
        directions, points = axis[rows], point[rows]
        parallel = np.linalg.norm(np.cross(directions[:-1], directions[1:]), axis=1)
        if (parallel < AXES_PARALLEL).any():
            continue
        away = points - _closest_point(directions, points)
        if np.linalg.norm(np.cross(away, directions), axis=1).max() < AXES_MEET * length:
            return tuple(rows)
    return trailing[-1:]


def _closest_point(directions: FloatArray, points: FloatArray) -> FloatArray:
    """Return the point with the least squared distance from lines through points (k, 3)."""
    across = np.eye(3) - directions[:, :, None] * directions[:, None, :]
    closest: FloatArray = np.linalg.lstsq(
        across.sum(axis=0), (across @ points[:, :, None])[:, :, 0].sum(axis=0), rcond=None
    )[0]
    return closest


def _parallel_runs(axis: FloatArray, revolute: NDArray[np.bool_]) -> tuple[tuple[int, ...], ...]:
    """Group successive revolute rows with parallel axes; a sliding row turns nothing between."""
    runs: list[list[int]] = []
    for row in np.flatnonzero(revolute):
        previous = runs[-1][-1] if runs else None
        if (
            previous is not None
            and np.linalg.norm(np.cross(axis[previous], axis[row])) < AXES_PARALLEL
        ):
            runs[-1].append(int(row))
        else:
            runs.append([int(row)])
    return tuple(tuple(run) for run in runs if len(run) >= 2)


def _shoulder_rows(axis: FloatArray, rows: list[int]) -> tuple[int, int]:
    if not rows:
        return -1, -1
    first = rows[0]
    for row in rows[1:]:
        if np.linalg.norm(np.cross(axis[first], axis[row])) >= AXES_PARALLEL:
            return first, row
    return first, -1


def _by_joints(arm: Arm, anatomy: Anatomy, support: Sequence[int]) -> str:
    rows = {arm.drive_map.driven[index] for index in support}
    if anatomy.wrist and rows <= set(anatomy.wrist):
        return "wrist"
    return "shoulder" if anatomy.shoulder[0] in rows else "elbow"


def _at_boundary(
    arm: Arm,
    anatomy: Anatomy,
    motion: Motion,
    null_motions: FloatArray,
    lost: Sequence[FloatArray],
) -> bool:
    """Whether a stretched or folded elbow puts the tool at the edge of the ring around axis 1.

    The lost direction points at axis 1, and every null motion bends the tool to the same side.
    """
    first = anatomy.shoulder[0]
    if first < 0 or len(lost) != 1:
        return False
    axis = motion.axis_direction[first]
    out = motion.tool_in_base[:3, 3] - motion.axis_point[first]
    radial = out - axis * (axis @ out)
    reach = float(np.linalg.norm(radial))
    if reach < KIND_AT * anatomy.length or np.linalg.norm(lost[0][3:]) > KIND_AT:
        return False
    if np.linalg.norm(np.cross(lost[0][:3], radial / reach)) > KIND_AT:
        return False
    rates = arm.drive_map.matrix @ null_motions
    bends = np.array(
        [change_of_form(motion.of_rows, lost[0], rates[:, k]) for k in range(rates.shape[1])]
    )
    curvatures = np.linalg.eigvalsh(bends @ rates)
    return bool(curvatures[0] > KIND_AT or curvatures[-1] < -KIND_AT)
