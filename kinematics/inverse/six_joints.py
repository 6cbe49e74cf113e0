"""Which method has all poses of six joints.

A closed form where three neighbouring axes meet or run parallel, or three rows slide; for two
slides and for axes in no special place an elimination, whose no holds as far as floating point; for
tables that are nearly special, if only by typed decimals, both. None where the arm is of no such
kind: it is searched for.

Source: none; an order. Not covered: other numbers of joints (solve.py).
"""

from kinematics.inverse.elimination import elimination_of
from kinematics.inverse.found import Solver
from kinematics.inverse.geometry import Regime
from kinematics.inverse.measured_tables import MeasuredTable
from kinematics.inverse.screws import Screws
from kinematics.inverse.special_triple import special_triple_of
from kinematics.inverse.three_slides import three_slides_of
from kinematics.inverse.two_slides import two_slides_of


def six_joints_of(screws: Screws) -> Solver | None:
    """Return the solver for all poses of six rows that move by themselves, or None.

    Examples
    --------
    >>> import numpy as np
    >>> axes, slides = np.eye(3)[[0, 2, 1, 1, 2, 0]], np.arange(6) % 2 == 0
    >>> six_joints_of(Screws(axes, np.zeros((6, 3)), slides, np.eye(4), 1.0)).proof
    'closed-form'
    """
    special = special_triple_of(screws)
    if special is not None and getattr(special.geometry, "regime", None) == Regime.EXACT:
        return special
    exact = three_slides_of(screws) or two_slides_of(screws) or elimination_of(screws)
    if special is None or exact is None or exact.proof == "closed-form":
        return exact or special
    return MeasuredTable(screws, special, exact)
