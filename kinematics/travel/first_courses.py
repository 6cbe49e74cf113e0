"""Follows one course, so that every kernel of moves has run once.

For whoever wants them compiled ahead of the first question (kinematics/warm_up.py). It begins at
joint values, so that no kernel of reach is needed but those that name branches. Left out: the
answer.
"""

import numpy as np

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.reach.checks import Reacher
from kinematics.reach.targets import Target
from kinematics.table import Convention, JointKind, Row, Table, Travel
from kinematics.travel.courses import Courses
from kinematics.travel.extremes import largest_rates
from kinematics.travel.moves import Approach, Course, Leg, Place
from kinematics.travel.to_targets import back_along

LAST_OF_COURSES = largest_rates
"""A kernel that it ends with."""

_ROW = Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0, travel=Travel(-3.0, 3.0))


def follow_first_courses() -> None:
    """Have the kernels of moves compiled, or loaded from where they are kept.

    Examples
    --------
    >>> follow_first_courses()
    """
    arm, flange = Arm("first", Table(Convention.STANDARD, (_ROW, _ROW))), np.eye(4)
    start = np.array([0.3, 0.4])
    target = Target(tool_in_base(arm, start, flange))
    end = back_along(target, Approach(0.1, np.array([1.0, 0.0, 0.0])), "approach")
    course = Course(Place(start), (Leg(Place(target=end)),), samples=2)
    Courses(Reacher(arm, flange)).follow(course)
