"""All motions of six joints in general position, at most one of them sliding: by elimination.

Idea: take an order of the joints round the loop in which the equations are sound for this arm,
read one joint from sixteen eigenvalues and the others from what belongs to it, and bring each
candidate onto its target. As many eigenvalues as are real are solutions, and solutions come in
pairs: where a count is amiss, or nothing was found, a second order in which other joints are the
ones read and dropped is asked too. What both find nothing for has no solution, in floating point.

Source: Raghavan and Roth 1993; Manocha and Canny, Efficient inverse kinematics for general 6R
manipulators, 1994, for eigenvalues; at most 16 solutions: Primrose 1986, Lee and Liang 1988.

Not covered: arms of which three neighbouring axes meet or are parallel exactly (special_triple.py),
two or more sliding joints (two_slides.py), continua of solutions: those targets are left open.
"""

from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.candidates import (
    Landed,
    found_of,
    in_metres,
    land_candidates,
    nearest_motions,
)
from kinematics.inverse.elimination_orders import Candidates, Order, order_of
from kinematics.inverse.found import Found
from kinematics.inverse.landing import land_all
from kinematics.inverse.screws import Screws
from kinematics.inverse.starts import scrambled_halton
from kinematics.inverse.tolerances import (
    BESIDE_A_FOLD,
    ELIMINATION_REAL,
    ELIMINATION_SOUND,
    ELIMINATION_UNSURE,
    NEARLY_LANDED,
)
from kinematics.inverse.twins import twins_of
from kinematics.number_checks import FloatArray

CHUNK = 1024
"""Targets worked on at once: the equations of one are some 10 kB."""

SAMPLES = 8
"""Known motions that an order is tried out on: two solutions that share the joint which is read
off, as in some arms all do, are lost in most of them."""

FOUND_AGAIN = 1e-6
"""Radians, or over L, within which those must come back."""

_SEED = 20_261_203

_NO_HEALTH = 1e-30
"""Health of an order at a target where it breaks down: one such of ``SAMPLES`` lowers the mean of
the logarithms by four decades, and two rule the order out."""


@dataclass(frozen=True)
class EliminationGeometry:
    """The structure that an elimination rests on: none but a sound order."""

    say: str = (
        "no three neighbouring axes meet or are parallel: all solutions by elimination, "
        "a no verified in a second order of the joints"
    )


@dataclass(frozen=True, eq=False)
class Elimination:
    """A solver for an arm of six rows; a no of it holds in floating point where it is not open.

    Attributes
    ----------
    screws : the arm. first : the order that is solved in.
    second : the one that checks it, None where the arm has only one that is sound.
    """

    screws: Screws
    first: Order
    second: Order | None
    geometry: EliminationGeometry = EliminationGeometry()
    proof: str = "elimination"

    def solve(self, targets: FloatArray) -> Found:
        """Return all motions for targets (m, 4, 4), the tool in base, metres; travel ignored.

        Accuracy: within 1e-9 of the arm's length and 1e-9 rad, mostly within 1e-14.
        """
        scaled = np.ascontiguousarray(self.screws.scaled(targets))
        parts = [
            self._solved(scaled[begin : begin + CHUNK])
            for begin in range(0, max(len(scaled), 1), CHUNK)
        ]
        return parts[0] if len(parts) == 1 else _all_of(parts)

    def nearest(self, targets: FloatArray) -> FloatArray:
        """Return row motions (m, 6), rad and metres, that bring the tool near; some ms each."""
        scaled = np.ascontiguousarray(self.screws.scaled(targets))
        return in_metres(self.screws, nearest_motions(self.screws, scaled))

    def _solved(self, scaled: FloatArray) -> Found:
        candidates = self.first.candidates(scaled)
        landed = _landed(self.screws, candidates, scaled)
        doubted = _doubted(candidates, landed)
        unsure = _unsure(candidates, landed)
        which = np.flatnonzero(doubted)
        if len(which) and self.second is not None:
            again = self.second.candidates(scaled[which])
            checked = _landed(self.screws, again, scaled[which])
            unsure[which] = (unsure[which] & _doubted(again, checked)) | _unsure(again, checked)
            landed = _with_more(self.screws, scaled, landed, checked, which)
        elif len(which):
            unsure[which] = True
        odd = landed.counts() % 2 == 1
        if odd.any():
            landed = _with_twins(self.screws, scaled, landed, odd)
            odd = landed.counts() % 2 == 1
        none = landed.counts() == 0
        is_open = odd | (none & (unsure | (landed.left <= NEARLY_LANDED)))
        return found_of(self.screws, landed, is_open)


def _all_of(parts: list[Found]) -> Found:
    """Return what was found for one chunk of targets after another."""
    begins = np.cumsum([0, *(len(part.open) for part in parts[:-1])])
    columns = {
        field.name: np.concatenate([getattr(part, field.name) for part in parts])
        for field in fields(Found)
    }
    shifted = [part.target + begin for part, begin in zip(parts, begins, strict=True)]
    return Found(**{**columns, "target": np.concatenate(shifted)})


def elimination_of(screws: Screws) -> Elimination | None:
    """Return the solver for an arm of six rows; None where no order of its joints is sound.

    Each order is tried out on some known motions; some ten milliseconds. Arms with a triple of
    axes that meet or are parallel exactly, or two sliding joints, have none as a rule.

    Examples
    --------
    >>> axes, points = np.eye(3)[[2, 1, 0, 1, 2, 0]], np.arange(18.0).reshape(6, 3) % 5 / 5
    >>> solver = elimination_of(Screws(axes, points, np.zeros(6, bool), np.eye(4), 1.0))
    >>> solver is None or solver.proof
    'elimination'
    """
    if screws.rows != 6 or np.count_nonzero(screws.prismatic) > 1:
        return None
    motions = 2.0 * scrambled_halton(SAMPLES, 6, _SEED) - 1.0
    motions *= np.where(screws.prismatic, 0.5, np.pi)
    targets = np.empty((SAMPLES, 4, 4))
    lines = screws.axis, screws.point, screws.prismatic, screws.tool_at_zero
    land_all(*lines, motions, targets)
    sound: list[Order] = []
    for order in _by_health(screws, targets):
        if sound and (
            order.positions[2] == sound[0].positions[2]
            or order.positions[5] == sound[0].positions[5]
        ):
            continue
        if _comes_back(order, targets, motions):
            sound.append(order)
        if len(sound) == 2:
            break
    if not sound:
        return None
    return Elimination(screws, sound[0], sound[1] if len(sound) > 1 else None)


def _by_health(screws: Screws, targets: FloatArray) -> list[Order]:
    """Return the orders that are sound on targets, the soundest first."""
    rated: list[tuple[float, Order]] = []
    for reverse in (False, True):
        for shift in range(6):
            for still in range(3):
                order = order_of(screws, shift, reverse, still)
                if order is None:
                    break
                health = order.candidates(targets).health
                score = float(np.exp(np.log(np.maximum(health, _NO_HEALTH)).mean()))
                if score > ELIMINATION_SOUND:
                    rated.append((score, order))
                    break
    return [order for _, order in sorted(rated, key=lambda each: -each[0])]


def _comes_back(order: Order, targets: FloatArray, motions: FloatArray) -> bool:
    """Tell whether an order finds the motions that targets were made from."""
    landed = _landed(order.screws, order.candidates(targets), targets)
    apart = landed.motions - motions[landed.of]
    turns = np.where(order.screws.prismatic, 0.0, 2.0 * np.pi * np.rint(apart / (2.0 * np.pi)))
    same = (np.abs(apart - turns).max(axis=1, initial=0.0) < FOUND_AGAIN) & landed.kept
    return len(np.unique(landed.of[same])) == len(targets)


def _landed(screws: Screws, candidates: Candidates, targets: FloatArray) -> Landed:
    return land_candidates(screws, targets, candidates.motions, candidates.of)


def _doubted(candidates: Candidates, landed: Landed) -> NDArray[np.bool_]:
    """Tell where solutions are not as many as real eigenvalues, odd, or none at all, (m,)."""
    counts = landed.counts()
    real = np.bincount(candidates.of[candidates.apart < ELIMINATION_REAL], minlength=len(counts))
    doubted: NDArray[np.bool_] = (counts != real) | (counts % 2 == 1) | (counts == 0)
    return doubted


def _unsure(candidates: Candidates, landed: Landed) -> NDArray[np.bool_]:
    """Tell where finding nothing says little: almost real eigenvalues, or nothing to divide by."""
    m = len(candidates.health)
    near = np.bincount(candidates.of[candidates.apart < ELIMINATION_UNSURE], minlength=m)
    unsure: NDArray[np.bool_] = near > landed.counts()
    return unsure | (candidates.health < ELIMINATION_SOUND)


def _with_more(
    screws: Screws, targets: FloatArray, landed: Landed, more: Landed, which: NDArray[np.intp]
) -> Landed:
    """Return what landed with more of some of its targets, ``which`` (ascending)."""
    motions, of = more.motions[more.kept], which[more.of[more.kept]]
    return _together(screws, targets, landed, motions, of, more.left, which)


def _with_twins(
    screws: Screws, targets: FloatArray, landed: Landed, odd: NDArray[np.bool_]
) -> Landed:
    """Return what landed with the others of pairs beside folds, where one of a pair is missing."""
    alone = np.flatnonzero(landed.kept & odd[landed.of])
    lines = screws.axis, screws.point, screws.prismatic, screws.tool_at_zero
    twins, rows = twins_of(lines, landed.motions[alone], BESIDE_A_FOLD)
    none = np.empty(0)
    return _together(
        screws, targets, landed, twins, landed.of[alone[rows]], none, np.empty(0, np.intp)
    )


def _together(
    screws: Screws,
    targets: FloatArray,
    landed: Landed,
    motions: FloatArray,
    of: NDArray[np.int64],
    left: FloatArray,
    which: NDArray[np.intp],
) -> Landed:
    both = np.concatenate([landed.motions[landed.kept], motions])
    of = np.concatenate([landed.of[landed.kept], of])
    order = np.argsort(of, kind="stable")
    joined = land_candidates(screws, targets, np.ascontiguousarray(both[order]), of[order])
    smallest = np.minimum(landed.left, joined.left)
    smallest[which] = np.minimum(smallest[which], left)
    return joined._replace(left=smallest)
