"""Asks for one target of each kind, so that every kernel of reach has run once.

For whoever wants them compiled ahead of the first question (kinematics/warm_up.py), in two parts
that take about as long. The arms are the smallest that lead each way: two structures of six axes,
three joints that turn and slide, four axes, a level wrist; and two of no structure. Left out: the
answers.
"""

import numpy as np

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.inverse.continuation import follow
from kinematics.inverse.four_axes_postures import palletiser
from kinematics.reach.checks import Reacher
from kinematics.reach.targets import NONE, ORIENTATION, Target, Targets
from kinematics.table import Convention, Coupling, JointKind, Row, Table, Travel

_TURN, _SLIDE = JointKind.REVOLUTE, JointKind.PRISMATIC
_QUARTER = np.pi / 2
_TRAVEL = Travel(-3.0, 3.0)


def _row(kind: JointKind, a: float, alpha: float, d: float) -> Row:
    return Row(kind, a, alpha, d, 0.0, travel=_TRAVEL)


_SHOULDER = (
    _row(_TURN, 0.05, _QUARTER, 0.4),
    _row(_TURN, 0.5, 0.0, 0.0),
    _row(_TURN, 0.1, _QUARTER, 0.0),
)
_WRIST = (
    _row(_TURN, 0.0, -_QUARTER, 0.4),
    _row(_TURN, 0.0, _QUARTER, 0.0),
    _row(_TURN, 0.0, 0.0, 0.1),
)
_THREE_PARALLEL = (
    _row(_TURN, 0.0, _QUARTER, 0.3),
    *(_row(_TURN, length, 0.0, 0.0) for length in (0.5, 0.4)),
    *(_row(_TURN, 0.0, alpha, 0.1) for alpha in (_QUARTER, -_QUARTER, 0.0)),
)
_NO_STRUCTURE = (*_SHOULDER, *(_row(_TURN, 0.03, alpha, 0.1) for alpha in (0.7, -0.9, 0.4, 0.2)))
_FOUR_AXES = (
    _row(_TURN, 0.4, 0.0, 0.3),
    _row(_TURN, 0.3, np.pi, 0.0),
    _row(_SLIDE, 0.0, 0.0, 0.1),
    _row(_TURN, 0.0, 0.0, 0.0),
)
_LEVEL_WRIST = (
    *_SHOULDER[:2],
    _row(_TURN, 0.4, 0.0, 0.0),
    Row(
        _TURN, 0.1, _QUARTER, 0.0, 0.0,
        passive=True, couplings=(Coupling(2, -1.0), Coupling(3, -1.0)),
    ),
    _row(_TURN, 0.0, 0.0, 0.1),
)  # fmt: skip
_Asked = tuple[tuple[Row, ...], tuple[int, ...]]
_CLOSED_FORMS: tuple[_Asked, ...] = (
    ((*_SHOULDER, *_WRIST), (NONE,)),
    (_THREE_PARALLEL, (NONE,)),
    (_SHOULDER, (ORIENTATION,)),
    ((*_SHOULDER[:2], _row(_SLIDE, 0.1, 0.3, 0.1)), (ORIENTATION,)),
    ((*(_row(_SLIDE, 0.0, alpha, 0.0) for alpha in (_QUARTER, _QUARTER, 0.0)),), (ORIENTATION,)),
    (_FOUR_AXES, (NONE,)),
    (_LEVEL_WRIST, (NONE,)),
    ((_row(_SLIDE, 0.0, _QUARTER, 0.0), *_SHOULDER, *_WRIST), (NONE,)),
)
_SEARCHES: tuple[_Asked, ...] = (
    (_NO_STRUCTURE, (ORIENTATION, NONE)),
    (_NO_STRUCTURE[:6], (NONE,)),
)

LAST_OF_CLOSED_FORMS, LAST_OF_SEARCHES = palletiser, follow
"""A kernel that each of the two ends with."""


def check_closed_forms() -> None:
    """Have the kernels of closed forms compiled, or loaded from where they are kept.

    Examples
    --------
    >>> check_closed_forms()
    """
    _check(_CLOSED_FORMS)


def check_searches() -> None:
    """Have the kernels of searches and families compiled, or loaded from where they are kept.

    Examples
    --------
    >>> check_searches()
    """
    _check_boxes()
    _check(_SEARCHES)


def _check_boxes() -> None:
    """Ask four joints for a pose that they have but for a turn, which boxes prove."""
    arm, flange = Arm("first", Table(Convention.STANDARD, _NO_STRUCTURE[:4])), np.eye(4)
    turned = tool_in_base(arm, np.full(4, 0.3), flange)
    turned[:3, 1:3] *= -1.0
    checks = Reacher(arm, flange).check(Targets.of([Target(turned)]))
    checks.reason_of(0)


def _check(asked: tuple[_Asked, ...]) -> None:
    flange = np.eye(4)
    for rows, freedoms in asked:
        arm = Arm("first", Table(Convention.STANDARD, rows))
        reacher = Reacher(arm, flange)
        joints = np.full((1, arm.joint_count), 0.3)
        near = tool_in_base(arm, joints, flange)[0]
        beyond = near.copy()
        beyond[0, 3] += 5.0
        for freedom in freedoms:
            targets = Targets.of([Target(near, freedom), Target(beyond, freedom)])
            for nearest in (None, joints[0]):
                if reacher.one_target is not None:
                    reacher.one_target.best(flange, near[None], nearest, named=True)
                checks = reacher.check(targets, near=nearest)
                for index in range(len(checks)):
                    checks.reason_of(index)
                    checks.families_of(index)
