"""An arm with a special triple, taken apart: what its three other joints must do for a target.

Idea: three neighbouring axes that meet leave their meeting point where it is, three parallel ones
leave the planes across them. So E_1 ... E_6 = D says of the other three joints alone that they
bring that point, or plane, from where the target has it to where the arm has it: three equations
for three unknowns, solved in kinematics/inverse/regional.py. A joint behind the triple acts on the
target's side: its line is moved there, or the other joint's line back. Here it is settled, once for
an arm, in which frame and direction to ask, so that the two joints a, b that the regional problem
looks at first stand in one frame and the pair's geometry is worked out once.

Source: Pieper, The kinematics of manipulators under computer control, 1968, for meeting axes; that
parallel ones are the same problem for planes: derived here.

Not covered: targets (kinematics/inverse/solution_table.py), which triple to take.
"""

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.geometry import meeting_point
from kinematics.inverse.regional_pairs import PAIR, QA, QB, write_pair
from kinematics.inverse.screws import Screws
from kinematics.inverse.tolerances import EXACT_AXES, EXACT_SLACK, SLACK_OF_RESIDUAL
from kinematics.inverse.triple import meeting_triple, parallel_triple
from kinematics.number_checks import FloatArray
from kinematics.transforms import inverse

FIRST, IS_PLANE, BY_INVERSE, THIRD_MOVED, START_MOVED = range(5)
"""Entries of ``Peeled.how``: index of the triple's first row; whether its axes are parallel;
whether D^-1 moves things instead of D; whether it moves the third outer joint's line; and whether
the moved point or plane is where the outer joints start (else where they must end)."""


class Peeled(NamedTuple):
    """An arm of six rows with its triple taken out, as the kernels take it; lengths over L.

    Attributes
    ----------
    axis, point, prismatic, tool_at_zero : the arm as it is, as in ``Screws``.
    solved_axis, solved_point : (6, 3), the arm whose triple is exact; the same where it is anyway.
    tool_inverse : (4, 4), base in tool at zero motion.
    how : (5,), see ``FIRST`` and the others.
    rows : (3,), indices of the outer rows a, b, c. sign : (3,), +1 or -1, turn of F per motion.
    slides, axes, points : of a, b, c, (3,), (3, 3), (3, 3); the third line before it is moved.
    pair : of a and b, as ``regional_pairs.write_pair`` makes it.
    fixed : (4,), the point, or normal and offset of the plane, that the triple leaves alone.
    triple : (TRIPLE_ROWS, 3), see ``triple``.
    slack : how far off geometry and target may be.
    """

    axis: FloatArray
    point: FloatArray
    prismatic: NDArray[np.bool_]
    tool_at_zero: FloatArray
    solved_axis: FloatArray
    solved_point: FloatArray
    tool_inverse: FloatArray
    how: NDArray[np.int64]
    rows: NDArray[np.int64]
    sign: FloatArray
    slides: NDArray[np.bool_]
    axes: FloatArray
    points: FloatArray
    pair: FloatArray
    fixed: FloatArray
    triple: FloatArray
    slack: float


class Way(NamedTuple):
    """One way to ask about the outer joints: rows a, b, c, the sign of their turns, what moves."""

    rows: tuple[int, int, int]
    sign: float
    by_inverse: bool
    third_moved: bool
    start_moved: bool


WAYS: dict[int, tuple[Way, ...]] = {
    # E_4 E_5 E_6 D^-1 x = x, or the same read backwards.
    0: (Way((3, 4, 5), 1.0, True, False, True), Way((5, 4, 3), -1.0, True, False, False)),
    # E_5 E_6 (D^-1 E_1 D) D^-1 x = x.
    1: (Way((4, 5, 0), 1.0, True, True, True),),
    # E_2^-1 E_1^-1 (D E_6^-1 D^-1) D x = x.
    2: (Way((1, 0, 5), -1.0, False, True, True),),
    # E_3^-1 E_2^-1 E_1^-1 D x = x, or the same read backwards.
    3: (Way((2, 1, 0), -1.0, False, False, True), Way((0, 1, 2), 1.0, False, False, False)),
}
"""Ways for each first row of the triple. A moved line is that of the only joint on its side of the
triple, so that a and b stand in one frame whatever the target."""


def peeled(exact: Screws, solved: Screws, first: int, is_plane: bool, residual: float) -> Peeled:
    """Return an arm of six rows without its triple.

    Parameters
    ----------
    exact : the arm as it is. solved : the arm nearby whose triple meets or is parallel exactly.
    first : index of the triple's first row, 0 to 3. is_plane : whether the axes are parallel.
    residual : how far apart the two are, over L and rad.

    Examples
    --------
    >>> WAYS[3][0].rows
    (2, 1, 0)
    """
    axis, point = solved.axis[first : first + 3], solved.point[first : first + 3]
    fixed = np.zeros(4)
    if is_plane:
        fixed[:3], fixed[3] = axis[0], axis[0] @ point[0]
        triple = parallel_triple(axis, point)
    else:
        fixed[:3], triple = meeting_point(axis, point), meeting_triple(axis)
    way = max(WAYS[first], key=lambda way: _is_plain(_pair_of(solved, way)))
    rows = list(way.rows)
    return Peeled(
        exact.axis,
        exact.point,
        exact.prismatic,
        exact.tool_at_zero,
        solved.axis,
        solved.point,
        inverse(exact.tool_at_zero),
        np.array([first, is_plane, way.by_inverse, way.third_moved, way.start_moved], np.int64),
        np.array(rows, np.int64),
        np.full(3, way.sign),
        solved.prismatic[rows],
        solved.axis[rows],
        solved.point[rows],
        _pair_of(solved, way),
        fixed,
        triple,
        max(EXACT_SLACK, SLACK_OF_RESIDUAL * residual),
    )


def _pair_of(screws: Screws, way: Way) -> FloatArray:
    """Return the record of the pair (a, b)."""
    rows, pair = list(way.rows), np.zeros(PAIR)
    write_pair(screws.prismatic[rows], screws.axis[rows], screws.point[rows], pair)
    return pair


def _is_plain(pair: FloatArray) -> bool:
    """Return whether the pair's axes meet or are parallel: its equations are the easier ones."""
    return bool(min(abs(pair[QA]), abs(pair[QB])) <= EXACT_AXES)
