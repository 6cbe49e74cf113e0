"""How far a joint to spare can be moved with the tool where it is, from edge to edge.

Idea: a stretch found at the held values (redundant.py) ends somewhere in the step beyond its last
one: there a joint comes to the end of its travel, or two ways to the target merge and are gone. The
step is halved, the other six joints brought onto the target from where they were last, until the
edge is known to the last digits. Where two stretches end in one and the same posture they are one
motion, which turns back in the joint that is held; so are those that meet a whole turn apart, and
those that run into each other where another joint moves so fast that the steps lost it.

Source: as redundant.py; halving.
Not covered: motions with the held joint at rest; stretches between two held values.
"""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.held_joint import HeldJoint
from kinematics.inverse.redundant import Redundant
from kinematics.inverse.redundant_paths import BEST, FIRST, LAST, NONE
from kinematics.inverse.redundant_stretches import Stretches, best_of, nodes_of, stretches_of
from kinematics.inverse.tolerances import EDGES_MEET, FAMILY_MOVES, POSTURES_MEET
from kinematics.table import FloatArray

_HALVINGS = 24
"""Of a step of 2 deg: what is left is 2e-9 rad."""
_TURN = 2.0 * np.pi


@dataclass(frozen=True)
class Span:
    """Postures that a redundant arm can pass through with the tool on its target.

    Attributes
    ----------
    interval : of the joint that is held, each (from, to) within travel, rad or m.
    moving : 0-based numbers of the joints that move, the one that is held first.
    witness : (joints,), the best posture.
    """

    interval: tuple[tuple[float, float], ...]
    moving: tuple[int, ...]
    witness: FloatArray


@dataclass(frozen=True, eq=False)
class _Ends:
    """Where stretches end, two each: motion of the held row, posture, and whether a path ends."""

    held: FloatArray
    postures: FloatArray
    merging: NDArray[np.bool_]


def spans_of(redundant: Redundant, target: FloatArray) -> list[Span]:
    """Return the spans within travel of a target (4, 4), the tool in base, metres, best first.

    Accuracy: edges within 1e-8 rad or m. None where no held value has a posture within travel.

    Examples
    --------
    A slide along the line of a wrist's shoulder: it can move until the elbow is stretched.

    >>> from kinematics.arm import Arm
    >>> from kinematics.chain import tool_in_base
    >>> from kinematics.inverse.redundant import redundant_of
    >>> from kinematics.table import Convention, JointKind, Row, Table, Travel
    >>> slide = Row(JointKind.PRISMATIC, 0.0, np.pi / 2, 0.0, 0.0, travel=Travel(-3.0, 3.0))
    >>> numbers = ((0, 1.5708, 0), (0.5, 0, 0), (0, 1.5708, 0), (0, -1.5708, 0.5), (0, 1.5708, 0))
    >>> rows = [Row(JointKind.REVOLUTE, a, alpha, d, 0.0) for a, alpha, d in (*numbers, (0, 0, 0))]
    >>> arm = Arm("on a slide", Table(Convention.STANDARD, (slide, *rows)))
    >>> pose = tool_in_base(arm, np.array([0.4, 0.0, 0.7, 1.4, 0.3, 0.5, 0.1]), np.eye(4))
    >>> spans = spans_of(redundant_of(arm, np.eye(4)), pose)
    >>> {span.moving[0] for span in spans}
    {0}
    """
    joint, targets = redundant.joint, target[None]
    nodes = nodes_of(joint, targets, None)
    if not nodes.inside.any():
        return []
    stretches = stretches_of(joint, nodes)
    ends = _refined(joint, stretches, target)
    witnesses, scores = _best(joint, stretches, targets, ends)
    spans = []
    groups = _joined(joint, stretches, ends)
    for group in sorted(groups, key=lambda group: -scores[group].max()):
        best = group[np.argmax(scores[group])]
        interval = _intervals(joint, ends, group)
        moving = _moving(joint, stretches, ends, group)
        spans.append(Span(interval, moving, witnesses[best]))
    return spans


def _best(
    joint: HeldJoint, stretches: Stretches, targets: FloatArray, ends: _Ends
) -> tuple[FloatArray, FloatArray]:
    """Return the best posture (s, joints) of each stretch, its edges included, and its score."""
    nodes, at = stretches.nodes, stretches.ends[:, BEST]
    values, score, _ = best_of(joint, stretches, targets, None)
    # What was met beyond an edge is of a stretch of its own, too narrow for the steps.
    held = joint.arm.drive_map.motions(values)[:, joint.row]
    beyond = (held < ends.held[:, 0] - EDGES_MEET) | (held > ends.held[:, 1] + EDGES_MEET)
    values = np.where(beyond[:, None], nodes.joint_values[at], values)
    score = np.where(beyond, nodes.score[at], score)
    for side in range(2):
        edge = ends.postures[:, side]
        at_edge = joint.scored(edge, joint.margins(edge), None)
        better = at_edge > score
        values = np.where(better[:, None], edge, values)
        score = np.maximum(score, at_edge)
    return values, score


def _refined(joint: HeldJoint, stretches: Stretches, target: FloatArray) -> _Ends:
    """Return where the stretches of one target end, both ways; arrays (s, 2, ...)."""
    nodes, last = stretches.nodes, len(joint.values) - 1
    at = stretches.ends[:, [FIRST, LAST]]
    place = np.searchsorted(nodes.offsets, at, side="right") - 1
    postures = nodes.joint_values[at]
    onward = np.stack([place[:, 0] - 1, place[:, 1] + 1], axis=1)
    open_ended = (onward >= 0) & (onward <= last)
    low = joint.values[place]
    high = joint.values[np.clip(onward, 0, last)]
    which = np.flatnonzero(open_ended.ravel())
    low, high, flat = low.ravel(), high.ravel(), postures.reshape(-1, postures.shape[2])
    merging = np.zeros(len(low), np.bool_)
    for _ in range(_HALVINGS):
        middle = 0.5 * (low[which] + high[which])
        each = np.broadcast_to(target, (len(which), 4, 4))
        there, met = joint.followed(flat[which], each, middle)
        within = met & (joint.margins(there) >= 0.0)
        # Beyond both, gone as well as out of travel, a path ends where it is gone.
        merging[which] = np.where(within, merging[which], ~met)
        low[which] = np.where(within, middle, low[which])
        high[which] = np.where(within, high[which], middle)
        flat[which] = np.where(within[:, None], there, flat[which])
    shape = at.shape
    return _Ends(low.reshape(shape), flat.reshape(postures.shape), merging.reshape(shape))


def _joined(joint: HeldJoint, stretches: Stretches, ends: _Ends) -> list[NDArray[np.intp]]:
    """Return which stretches are one motion."""
    count = len(stretches.ends)
    group, side = np.arange(count), np.tile([0, 1], count)
    postures, held = ends.postures.reshape(2 * count, -1), ends.held.ravel()
    apart = _apart(joint, postures[:, None], postures)
    along, merging = np.abs(held[:, None] - held), ends.merging.ravel()
    same = merging[:, None] & merging & (side[:, None] == side) & (along < EDGES_MEET)
    if joint.turns_endlessly:
        same |= np.abs(along - _TURN) < EDGES_MEET
    met = np.argwhere(np.triu(same & (apart < POSTURES_MEET), 1)) // 2
    for one, other in (*met.tolist(), *_run_into(joint, stretches, ends)):
        group[group == group[one]] = group[other]
    return [np.flatnonzero(group == number) for number in np.unique(group)]


def _apart(joint: HeldJoint, one: FloatArray, other: FloatArray) -> FloatArray:
    """Return by how much postures differ, (...,), but for turns of joints that turn endlessly."""
    off = one - other
    turns = np.where(joint.drive.endless, np.rint(off / _TURN), 0.0)
    apart: FloatArray = (np.abs(off - _TURN * turns) / joint.scale).max(axis=-1)
    return apart


def _run_into(joint: HeldJoint, stretches: Stretches, ends: _Ends) -> Iterator[tuple[int, int]]:
    """Yield stretches that go on in another one, which began anew as a joint moved fast."""
    nodes, last = stretches.nodes, len(joint.values) - 1
    place = np.searchsorted(nodes.offsets, stretches.ends[:, [FIRST, LAST]], side="right") - 1
    onward = np.clip(place + np.array([-1, 1]), 0, last)
    reached = (onward != place) & (np.abs(ends.held - joint.values[onward]) < EDGES_MEET)
    for one, side in np.argwhere(reached).tolist():
        begin, end = nodes.offsets[onward[one, side] : onward[one, side] + 2]
        others = stretches.stretch[begin:end]
        apart = _apart(joint, nodes.joint_values[begin:end], ends.postures[one, side])
        for other in others[(others != NONE) & (apart < POSTURES_MEET)].tolist():
            yield one, other


def _intervals(
    joint: HeldJoint, ends: _Ends, group: NDArray[np.intp]
) -> tuple[tuple[float, float], ...]:
    """Return the values of the held joint along some stretches, overlapping ones as one."""
    merged: list[list[float]] = []
    values = np.sort(ends.postures[group][:, :, joint.row], axis=1)
    for low, high in sorted(values.tolist()):
        if merged and low <= merged[-1][1] + EDGES_MEET:
            merged[-1][1] = max(merged[-1][1], high)
        else:
            merged.append([low, high])
    return tuple((low, high) for low, high in merged)


def _moving(
    joint: HeldJoint, stretches: Stretches, ends: _Ends, group: NDArray[np.intp]
) -> tuple[int, ...]:
    """Return the joints that move along some stretches, the held one first."""
    held, moved = joint.row, np.zeros(joint.arm.joint_count, np.bool_)
    for one in group:
        values = stretches.nodes.joint_values[stretches.stretch == one]
        values = np.concatenate([values, ends.postures[one]])
        moved |= np.ptp(values, axis=0) > FAMILY_MOVES
    others = [int(joint) for joint in np.flatnonzero(moved) if joint != held]
    return (held, *others)
