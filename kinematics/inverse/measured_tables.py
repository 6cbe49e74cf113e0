"""All motions of six joints whose axes nearly meet or run nearly parallel: tables as measured.

Idea: a drawing has a wrist, the arm that was built has axes that miss each other by microns. Moved
into place they give a closed form, whose solutions lead to those of the measured table, all but
some beside folds. An elimination on the table as it stands knows nothing of the drawing; it is weak
where the table is nearly special, and finds what the other lost. So both are asked, what both found
is told once, and a no is one where neither found anything.

Source: none; a union. Not covered: tables that are special exactly, which the closed form has
alone; how either works (special_triple.py, elimination.py, two_slides.py).
"""

from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np

from kinematics.inverse.candidates import found_of, land_candidates
from kinematics.inverse.found import Found, Geometry, Solver
from kinematics.inverse.screws import Screws
from kinematics.inverse.special_triple import SpecialTriple
from kinematics.number_checks import FloatArray


@dataclass(frozen=True)
class MeasuredGeometry:
    """The structure that the table nearly has, and that nothing is lost by it.

    ``nearly`` : of the special arm nearby, in words.
    """

    nearly: str

    @property
    def say(self) -> str:
        """What answers rest on, for people."""
        structure = self.nearly.removesuffix(", some solutions may be missed")
        return f"{structure}: solved as such and, for what that may lose, as measured"


@dataclass(frozen=True, eq=False)
class MeasuredTable:
    """A solver for a table that is nearly special.

    Attributes
    ----------
    screws : the arm. closed : by the special arm nearby; exact : on the table as it stands.
    """

    screws: Screws
    closed: SpecialTriple
    exact: Solver

    @property
    def proof(self) -> str:
        """What a no rests on: the solver that needs no special arm."""
        return self.exact.proof

    @cached_property
    def geometry(self) -> Geometry:
        """What is used, for people."""
        return MeasuredGeometry(self.closed.geometry.say)

    def solve(self, targets: FloatArray) -> Found:
        """Return all motions for targets (m, 4, 4), the tool in base, metres; travel ignored."""
        by_form, exactly = self.closed.solve(targets), self.exact.solve(targets)
        motions = np.concatenate([by_form.motions, exactly.motions])
        of = np.concatenate([by_form.target, exactly.target])
        order = np.argsort(of, kind="stable")
        motions /= np.where(self.screws.prismatic, self.screws.length, 1.0)
        scaled = np.ascontiguousarray(self.screws.scaled(targets))
        both = land_candidates(self.screws, scaled, motions[order], of[order].astype(np.int64))
        counts = both.counts()
        none = counts == 0
        # Either proves that there is none; what the exact solver has lost leaves all of it open.
        doubted = (counts % 2 == 1) | (counts != exactly.count_per_target())
        is_open = np.where(none, exactly.open & by_form.open, doubted)
        found = found_of(self.screws, both, is_open)
        return replace(
            found,
            stage=np.where(none, by_form.stage, 0),
            shortfall=np.where(none, by_form.shortfall, 0.0),
        )

    def nearest(self, targets: FloatArray) -> FloatArray:
        """Return row motions (m, 6), rad and metres, that bring the tool as near as they can."""
        return self.closed.nearest(targets)
