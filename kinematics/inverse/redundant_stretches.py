"""Stretches of postures along the values that a joint is held at, and the best posture of each.

Idea: at each held value the other six joints have their handful of postures: nodes. Those that hang
together are paths (redundant_paths.py), and a stretch is what of a path is within travel. Its best
posture seldom stands at a held value. Between three nodes joint values are parabolas as near as
makes no difference, so the best place on these is looked for and brought onto the target; beyond
the last node of a path some places up to the next held value are tried.

Source: none; parabolas.
Not covered: stretches between two held values, which have no node; the edges (redundant_spans.py).
"""

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.descent_arrays import FAR
from kinematics.inverse.held_joint import HeldJoint
from kinematics.inverse.redundant_paths import BEST, FIRST, LAST, link, walk
from kinematics.inverse.tolerances import SAME_PATH
from kinematics.table import FloatArray

_SHARES = np.arange(-8, 9) / 8.0
_ZOOMS = 2
"""Shares of a step that a parabola is looked at, and how often, each time more finely."""
_BEYOND = np.array([0.3, 0.6, 0.9])
"""Shares of a step beyond the last node of a path that are tried."""


class Nodes(NamedTuple):
    """Postures of targets at held values, k in all.

    Attributes
    ----------
    offsets : (m * values + 1,), the first of each target's held values, in order.
    joint_values : (k, joints), one of each solution: within travel if there is any such.
    inside : (k,), whether it is. score : (k,), what is best is highest.
    """

    offsets: NDArray[np.int64]
    joint_values: FloatArray
    inside: NDArray[np.bool_]
    score: FloatArray


class Stretches(NamedTuple):
    """Stretches of paths, s in all, of ``nodes`` with whole turns taken over along them.

    ``ends`` is (s, 3), nodes; ``target`` (s,) of which target; ``ahead``, ``behind`` (k,) the paths
    and ``stretch`` (k,) which stretch each node is of, or -1.
    """

    nodes: Nodes
    ends: NDArray[np.int64]
    target: NDArray[np.intp]
    ahead: NDArray[np.int64]
    behind: NDArray[np.int64]
    stretch: NDArray[np.int64]


class Best(NamedTuple):
    """The best posture (s, joints) of each stretch, its score (s,), and if within travel, (s,)."""

    joint_values: FloatArray
    score: FloatArray
    inside: NDArray[np.bool_]


def nodes_of(joint: HeldJoint, targets: FloatArray, near: FloatArray | None) -> Nodes:
    """Return the postures of targets (m, 4, 4), the tool in base, metres, at all held values.

    Parameters
    ----------
    near : (joints,), what is nearest to it scores highest, instead of what has the most margin.

    Examples
    --------
    A slide along the line of a wrist's shoulder: two links of 0.5 m reach 1 m to either side.

    >>> from kinematics.arm import Arm
    >>> from kinematics.chain import tool_in_base
    >>> from kinematics.inverse.redundant import redundant_of
    >>> from kinematics.table import Convention, JointKind, Row, Table, Travel
    >>> slide = Row(JointKind.PRISMATIC, 0.0, np.pi / 2, 0.0, 0.0, travel=Travel(-3.0, 3.0))
    >>> numbers = ((0, 1.5708, 0), (0.5, 0, 0), (0, 1.5708, 0), (0, -1.5708, 0.5), (0, 1.5708, 0))
    >>> rows = [Row(JointKind.REVOLUTE, a, alpha, d, 0.0) for a, alpha, d in (*numbers, (0, 0, 0))]
    >>> arm = Arm("on a slide", Table(Convention.STANDARD, (slide, *rows)))
    >>> joint = redundant_of(arm, np.eye(4)).joint
    >>> posture = np.array([0.4, 0.0, 0.7, 0.2, 0.3, 0.5, 0.1])
    >>> targets = tool_in_base(arm, posture, np.eye(4))[None]
    >>> nodes = nodes_of(joint, targets, None)
    >>> bool(np.ptp(nodes.joint_values[:, 0]) < 2.0)
    True
    """
    before, after = joint.carried
    carried = (before @ targets[:, None] @ after).reshape(-1, 4, 4)
    inner = joint.locked.solve(carried)
    offsets = np.searchsorted(inner.target, np.arange(len(carried) + 1)).astype(np.int64)
    held = joint.values[inner.target % len(joint.values)][:, None]
    motions = joint.locked.whole(inner.motions, held)
    values, margin, inside = joint.postures(motions, near)
    return Nodes(offsets, values, inside, joint.scored(values, margin, near))


def stretches_of(joint: HeldJoint, nodes: Nodes) -> Stretches:
    """Return the stretches of nodes within travel; of targets without any, of all nodes.

    Examples
    --------
    The slide of ``nodes_of``: one stretch for each way that shoulder, elbow and wrist can stand.

    >>> from kinematics.arm import Arm
    >>> from kinematics.chain import tool_in_base
    >>> from kinematics.inverse.redundant import redundant_of
    >>> from kinematics.table import Convention, JointKind, Row, Table, Travel
    >>> slide = Row(JointKind.PRISMATIC, 0.0, np.pi / 2, 0.0, 0.0, travel=Travel(-3.0, 3.0))
    >>> numbers = ((0, 1.5708, 0), (0.5, 0, 0), (0, 1.5708, 0), (0, -1.5708, 0.5), (0, 1.5708, 0))
    >>> rows = [Row(JointKind.REVOLUTE, a, alpha, d, 0.0) for a, alpha, d in (*numbers, (0, 0, 0))]
    >>> arm = Arm("on a slide", Table(Convention.STANDARD, (slide, *rows)))
    >>> joint = redundant_of(arm, np.eye(4)).joint
    >>> posture = np.array([0.4, 0.0, 0.7, 0.2, 0.3, 0.5, 0.1])
    >>> targets = tool_in_base(arm, posture, np.eye(4))[None]
    >>> len(stretches_of(joint, nodes_of(joint, targets, None)).ends)
    8
    """
    count, each = len(nodes.score), len(joint.values)
    targets = (len(nodes.offsets) - 1) // each
    of = np.repeat(np.arange(targets), np.diff(nodes.offsets[::each]))
    some = np.zeros(targets, np.bool_)
    some[of[nodes.inside]] = True
    ahead, behind = np.empty(count, np.int64), np.empty(count, np.int64)
    values, revolute = nodes.joint_values.copy(), joint.arm.revolute_joints
    link(nodes.offsets, each, values, revolute, joint.scale, SAME_PATH, ahead, behind)
    order = np.argsort(-nodes.score, kind="stable")
    stretch, ends = np.empty(count, np.int64), np.empty((count, 3), np.int64)
    bounds = joint.bounds if some.all() else joint.bounds + np.array([[-FAR], [FAR]])
    paths = order, nodes.inside | ~some[of], ahead, behind
    found = walk(*paths, bounds, joint.turning, SAME_PATH, values, stretch, ends)
    told = nodes._replace(joint_values=values)
    return Stretches(told, ends[:found], of[ends[:found, BEST]], ahead, behind, stretch)


def best_of(
    joint: HeldJoint, stretches: Stretches, targets: FloatArray, near: FloatArray | None
) -> Best:
    """Return the best posture of each stretch of targets (m, 4, 4), between held values too.

    Examples
    --------
    A shorter slide that alone has travel: held in the middle it leaves half of that, the most.

    >>> from kinematics.arm import Arm
    >>> from kinematics.chain import tool_in_base
    >>> from kinematics.inverse.redundant import redundant_of
    >>> from kinematics.table import Convention, JointKind, Row, Table, Travel
    >>> slide = Row(JointKind.PRISMATIC, 0.0, np.pi / 2, 0.0, 0.0, travel=Travel(0.0, 1.0))
    >>> numbers = ((0, 1.5708, 0), (0.5, 0, 0), (0, 1.5708, 0), (0, -1.5708, 0.5), (0, 1.5708, 0))
    >>> rows = [Row(JointKind.REVOLUTE, a, alpha, d, 0.0) for a, alpha, d in (*numbers, (0, 0, 0))]
    >>> arm = Arm("on a slide", Table(Convention.STANDARD, (slide, *rows)))
    >>> joint = redundant_of(arm, np.eye(4)).joint
    >>> posture = np.array([0.4, 0.0, 0.7, 0.2, 0.3, 0.5, 0.1])
    >>> targets = tool_in_base(arm, posture, np.eye(4))[None]
    >>> best = best_of(joint, stretches_of(joint, nodes_of(joint, targets, None)), targets, None)
    >>> float(best.joint_values[best.score.argmax(), 0].round(6))
    0.5
    """
    nodes, at = stretches.nodes, stretches.ends[:, BEST]
    best = Best(nodes.joint_values[at].copy(), nodes.score[at].copy(), nodes.inside[at].copy())
    first, last = at == stretches.ends[:, FIRST], at == stretches.ends[:, LAST]
    which = np.flatnonzero(~first & ~last)
    if len(which):
        three = np.stack([stretches.behind[at], at, stretches.ahead[at]], axis=1)[which]
        guessed = _top_of_parabola(joint, nodes.joint_values[three], near)
        there, landed = joint.brought(guessed, targets[stretches.target[which]])
        _keep_better(joint, best, which, there, landed, near)
    for at_end, way in ((first, -1.0), (last, 1.0)):
        which = np.flatnonzero(at_end)
        held = joint.arm.drive_map.motions(best.joint_values[which])[:, joint.row]
        held = held[:, None] + way * joint.step * _BEYOND
        inside = (held >= joint.values[0]) & (held <= joint.values[-1])
        which = np.repeat(which, inside.sum(axis=1))
        if len(which):
            from_end, asked = nodes.joint_values[at[which]], targets[stretches.target[which]]
            there, met = joint.followed(from_end, asked, held[inside])
            _keep_better(joint, best, which, there, met, near)
    return best


def _keep_better(
    joint: HeldJoint,
    best: Best,
    which: NDArray[np.intp],
    there: FloatArray,
    met: NDArray[np.bool_],
    near: FloatArray | None,
) -> None:
    """Enter postures (k, joints) for the stretches ``which`` (k,) where they are met and better."""
    margin = joint.margins(there)
    score = np.where(met, joint.scored(there, margin, near), -np.inf)
    order = np.argsort(score, kind="stable")
    # The best of each stretch is entered last.
    order = order[score[order] > best.score[which[order]]]
    best.joint_values[which[order]], best.score[which[order]] = there[order], score[order]
    best.inside[which[order]] = margin[order] >= 0.0


def _top_of_parabola(joint: HeldJoint, three: FloatArray, near: FloatArray | None) -> FloatArray:
    """Return the best postures (s, joints) on parabolas through three each, (s, 3, joints)."""
    middle, slope = three[:, 1], 0.5 * (three[:, 2] - three[:, 0])
    bend = 0.5 * (three[:, 2] + three[:, 0]) - middle
    at, width = np.zeros(len(three)), 1.0
    for _ in range(_ZOOMS):
        shares = np.clip(at[:, None] + width * _SHARES, -1.0, 1.0)[..., None]
        values = middle[:, None] + shares * slope[:, None] + shares**2 * bend[:, None]
        score = joint.scored(values, joint.margins(values), near)
        place = np.argmax(score, axis=1)
        at, width = shares[np.arange(len(at)), place, 0], width / 8.0
    top: FloatArray = middle + at[:, None] * slope + (at * at)[:, None] * bend
    return top
