"""All motions of six joints of which three neighbouring ones have axes that meet or are parallel.

Idea: the three leave a point, or the planes across them, where they are, so the other three alone
must bring that point or plane into place: three equations for three unknowns, at most four
answers. Each leaves the triple a turn, or a planar motion, that it can make in two ways: at most
eight solutions, in closed form. An arm may have several such triples; the next one is asked where
the first was in a free place and found nothing, and least squares from some starts after that.

Source: Pieper, The kinematics of manipulators under computer control, 1968, for axes that meet;
parallel ones by planes instead of points: derived here, and so for every place of the triple in
the chain, with sliding joints outside it.

Not covered: arms without such a triple; what is lost beside a fold where the table is rounded.
"""

from dataclasses import dataclass

import numpy as np

from kinematics.inverse.found import (
    MEETING_POINT,
    MEETING_TURN,
    NO_STAGE,
    PLANE,
    REACH_ACROSS,
    WRIST_CENTRE,
    WRIST_ORIENTATION,
    Found,
    Geometry,
)
from kinematics.inverse.geometry import geometry_of
from kinematics.inverse.peel import FIRST, IS_PLANE, Peeled, peeled
from kinematics.inverse.screws import Screws
from kinematics.inverse.solution_table import NOT_TRIED, SolutionTable, nearest_by, solve_by, sought
from kinematics.number_checks import FloatArray


@dataclass(frozen=True, eq=False)
class SpecialTriple:
    """A solver for an arm of six rows with a special triple; its no is proved in closed form.

    Attributes
    ----------
    screws : the arm. parts : one for each special triple, the one to ask first first.
    geometry : which triple, and how exactly the table has it. residual : see there.
    """

    screws: Screws
    parts: tuple[Peeled, ...]
    geometry: Geometry
    residual: float
    proof: str = "closed-form"

    def solve(self, targets: FloatArray) -> Found:
        """Return all motions for targets (m, 4, 4), the tool in base, metres; travel ignored.

        Accuracy: within 1e-9 of the arm's length and 1e-9 rad, mostly within 1e-14.
        """
        scaled = np.ascontiguousarray(self.screws.scaled(targets))
        table = solve_by(self.parts[0], scaled)
        for part in (*self.parts[1:], None):
            if not table.none.any():
                break
            left = np.flatnonzero(table.is_open & table.none)
            if len(left) and part is not None:
                table = table.with_more(solve_by(part, scaled[left]), left)
            elif len(left):
                table = table.with_more(sought(self.parts[0], scaled[left]), left)
        return self._found(table)

    def nearest(self, targets: FloatArray) -> FloatArray:
        """Return row motions (m, 6), rad and metres, that bring the tool as near as they can.

        Turned as the target where the triple can do the turn. Best effort, some ms each.
        """
        scaled = np.ascontiguousarray(self.screws.scaled(targets))
        return self._in_metres(nearest_by(self.parts[0], scaled))

    def _in_metres(self, motions: FloatArray) -> FloatArray:
        if not self.screws.prismatic.any():
            return motions
        return motions * np.where(self.screws.prismatic, self.screws.length, 1.0)

    def _found(self, table: SolutionTable) -> Found:
        m, length = len(table.excess), self.screws.length
        stage, shortfall = np.full(m, NO_STAGE), np.zeros(m)
        if table.none.any():
            outer, inner, unit = self._stages()
            untried = table.excess >= NOT_TRIED
            stage[table.none] = np.where(untried, outer, inner)[table.none]
            closed = table.none & ~untried
            shortfall[closed] = table.excess[closed] * unit
        return Found(
            motions=self._in_metres(table.motions),
            target=table.of,
            position_error=table.gaps[:, 0] * length,
            angle_error=table.gaps[:, 1].copy(),
            open=table.is_open,
            stage=stage,
            shortfall=shortfall,
            nearest=np.zeros((m, 6)),
        )

    def _stages(self) -> tuple[int, int, float]:
        """Return where the outer joints and where the triple fall short, and what 1 is of that."""
        how = self.parts[0].how
        if how[IS_PLANE]:
            return PLANE, REACH_ACROSS, self.screws.length
        if how[FIRST] == 3:
            return WRIST_CENTRE, WRIST_ORIENTATION, 1.0
        return MEETING_POINT, MEETING_TURN, 1.0


def special_triple_of(screws: Screws) -> SpecialTriple | None:
    """Return the solver for an arm of six rows with a special triple; None for any other arm.

    Examples
    --------
    A wrist at right angles on a shoulder, an elbow and no offsets:

    >>> axes, points = np.eye(3)[[2, 1, 1, 2, 1, 2]], np.zeros((6, 3))
    >>> points[2, 2], points[3:, 2] = 0.5, 0.9
    >>> tool = np.eye(4)
    >>> tool[2, 3] = 1.0
    >>> screws = Screws(axes, points, np.zeros(6, dtype=bool), tool, 1.0)
    >>> solver = special_triple_of(screws)
    >>> solver.geometry.say
    'axes 4, 5 and 6 meet in a point: a spherical wrist'
    >>> target = np.eye(4)
    >>> target[:3, :3], target[:3, 3] = [[0, 0, 1], [0, 1, 0], [-1, 0, 0]], [0.6, 0.2, 0.3]
    >>> len(solver.solve(target[None]).motions)
    8
    """
    geometry = geometry_of(screws)
    if screws.rows != 6 or not geometry.triples:
        return None
    parts = tuple(
        peeled(screws, triple.solved, triple.first, triple.parallel, triple.residual)
        for triple in geometry.triples
    )
    return SpecialTriple(screws, parts, geometry, geometry.residual)
