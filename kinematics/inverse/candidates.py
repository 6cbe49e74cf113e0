"""Candidates for solutions brought onto their targets: which are there, and each of them once.

Idea: an elimination hands over motions that are right but for rounding, more than there are
solutions, and some that are none. All of them are walked through the table as it stands, bettered
by damped least squares and held against the target; what lands is a solution, what lands where
another did is the same one. The same steps, from starts all around, lead as near to a target that
nothing reaches as they can.

Source: none; bookkeeping around polish.py. Not covered: where candidates come from, travel.
"""

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.found import NO_STAGE, Found
from kinematics.inverse.polish import keep_distinct, polish
from kinematics.inverse.screws import Screws
from kinematics.inverse.starts import scrambled_halton
from kinematics.inverse.tolerances import SAME_MOTIONS, WORTH_POLISHING
from kinematics.number_checks import FloatArray

STEPS = 40
"""Steps of a candidate: a sound one takes one or two, one at a fold some twenty."""

NEAREST_STARTS, NEAREST_STEPS = 24, 80
"""Starts towards a target that nothing reaches, and steps from each."""

ANY_GAP = 1e6
"""Gap of a target that has no candidate, and what is polished however far it is."""

_SEED = 20_261_202


class Landed(NamedTuple):
    """Candidates (k) for m targets after they were brought down; lengths over L.

    Attributes
    ----------
    motions : (k, n); of : (k,), ascending, which target; gaps : (k, 2), length and angle left.
    kept : (k,), which are solutions that stand there once.
    left : (m,), smallest gap of each target's candidates that are none.
    """

    motions: FloatArray
    of: NDArray[np.int64]
    gaps: FloatArray
    kept: NDArray[np.bool_]
    left: FloatArray

    def counts(self) -> NDArray[np.intp]:
        """Return how many solutions each target has, (m,)."""
        return np.bincount(self.of[self.kept], minlength=len(self.left))


def land_candidates(
    screws: Screws, targets: FloatArray, motions: FloatArray, of: NDArray[np.int64]
) -> Landed:
    """Return what becomes of candidates (k, n) for targets (m, 4, 4), lengths over L.

    ``of`` (k,), ascending: which target each is for. ``motions`` are overwritten.

    Examples
    --------
    >>> screws = Screws(np.eye(3)[2:], np.zeros((1, 3)), np.zeros(1, bool), np.eye(4), 1.0)
    >>> near = np.array([[0.05], [-0.05], [1.0]])
    >>> land_candidates(screws, np.eye(4)[None], near, np.zeros(3, np.int64)).kept.tolist()
    [True, False, False]
    """
    gaps, kept = np.empty((len(motions), 2)), np.empty(len(motions), np.bool_)
    left = np.full(len(targets), ANY_GAP)
    lines = screws.axis, screws.point, screws.prismatic, screws.tool_at_zero
    polish(*lines, targets, of, STEPS, WORTH_POLISHING, motions, gaps)
    keep_distinct(screws.prismatic, of, SAME_MOTIONS, motions, gaps, kept, left)
    return Landed(motions, of, gaps, kept, left)


def nearest_motions(screws: Screws, targets: FloatArray) -> FloatArray:
    """Return motions (m, n) that bring the tool near to targets (m, 4, 4), lengths over L.

    The best that least squares find from some starts; some milliseconds each.

    Examples
    --------
    >>> screws = Screws(np.eye(3)[2:], np.zeros((1, 3)), np.zeros(1, bool), np.eye(4), 1.0)
    >>> bool(abs(nearest_motions(screws, np.eye(4)[None])[0, 0]) < 1e-9)
    True
    """
    n, m = screws.rows, len(targets)
    share = 2.0 * scrambled_halton(NEAREST_STARTS, n, _SEED) - 1.0
    motions = np.tile(share * np.where(screws.prismatic, 1.0, np.pi), (m, 1))
    of, gaps = np.repeat(np.arange(m), NEAREST_STARTS), np.empty((len(motions), 2))
    lines = screws.axis, screws.point, screws.prismatic, screws.tool_at_zero
    polish(*lines, targets, of, NEAREST_STEPS, ANY_GAP, motions, gaps)
    best = np.linalg.norm(gaps, axis=1).reshape(m, NEAREST_STARTS).argmin(axis=1)
    nearest: FloatArray = motions.reshape(m, NEAREST_STARTS, n)[np.arange(m), best]
    return nearest


def in_metres(screws: Screws, motions: FloatArray) -> FloatArray:
    """Return motions (k, n) with slides in metres instead of over L.

    Examples
    --------
    >>> screws = Screws(np.eye(3)[2:], np.zeros((1, 3)), np.ones(1, bool), np.eye(4), 2.0)
    >>> in_metres(screws, np.array([[0.5]]))
    array([[1.]])
    """
    return motions * np.where(screws.prismatic, screws.length, 1.0)


def found_of(screws: Screws, landed: Landed, is_open: NDArray[np.bool_]) -> Found:
    """Return solutions in metres, without stages; ``is_open`` (m,): a no would not be proved.

    Examples
    --------
    >>> screws = Screws(np.eye(3)[2:], np.zeros((1, 3)), np.zeros(1, bool), np.eye(4), 1.0)
    >>> target, turned = np.eye(4)[None], np.array([[0.05]])
    >>> landed = land_candidates(screws, target, turned, np.zeros(1, np.int64))
    >>> found_of(screws, landed, np.zeros(1, bool)).motions.round(9) + 0.0
    array([[0.]])
    """
    m, kept = len(is_open), landed.kept
    return Found(
        motions=in_metres(screws, landed.motions[kept]),
        target=landed.of[kept],
        position_error=landed.gaps[kept, 0] * screws.length,
        angle_error=landed.gaps[kept, 1],
        open=is_open,
        stage=np.full(m, NO_STAGE),
        shortfall=np.zeros(m),
        nearest=np.zeros((m, screws.rows)),
    )
