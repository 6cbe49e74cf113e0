"""From targets to solutions by one special triple: ask, close, land, and keep each once.

Idea: four kernels, each over all targets: answers of the outer joints, candidates behind them,
candidates brought onto their targets, and those that are there for the first time. Tables between
them grow chunk after chunk, since nobody knows beforehand how many answers there are; four small
kernels also compile in a fraction of the time of one that holds them all.

Source: none; bookkeeping. Not covered: units (lengths are over L here), more than one triple.
"""

from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.closing import MOST_PER_ANSWER, close_answers
from kinematics.inverse.outer_answers import nearest_answers, outer_answers
from kinematics.inverse.peel import Peeled
from kinematics.inverse.polish import keep_distinct, polish
from kinematics.inverse.regional_rows import FREE, MOST_ROWS_FOUND, NEAR_FREE
from kinematics.inverse.starts import scrambled_halton
from kinematics.inverse.tolerances import (
    ACCEPTED,
    BESIDE_FOLD,
    EDGE,
    EDGE_SLACKS,
    EXACT_SLACK,
    LOOSE,
    NEARLY_LANDED,
    SAME_MOTIONS,
    WORTH_POLISHING,
)
from kinematics.inverse.twins import twins_of
from kinematics.number_checks import FloatArray

USUAL_ANSWERS = 4
"""Answers of the outer joints for one target, but where something is free."""

FEW_STEPS = 40
"""Polishing steps of a candidate; a sound one takes one or two, one at a fold some twenty."""

NO_TARGETS = np.zeros(0, np.bool_)

NOT_TRIED = 1e6
"""Excess of a triple that was never tried, and gap where there was no candidate."""

STARTS = 24
"""Starts of a search by least squares; each costs some 30 us."""

SEARCH_STEPS = 80
"""Steps from each of them; good ones take some fifteen."""

_SEED = 20_251_201


@dataclass(frozen=True, eq=False)
class SolutionTable:
    """Solutions (k) of targets (m); lengths over L.

    Attributes
    ----------
    motions : (k, 6); of : (k,), ascending; gaps : (k, 2), length and angle.
    excess : (m,), least amount by which the triple fails to close, NOT_TRIED where the outer
        joints have no answer.
    is_open : (m,), whether a no is not proved.
    """

    motions: FloatArray
    of: NDArray[np.int64]
    gaps: FloatArray
    excess: FloatArray
    is_open: NDArray[np.bool_]

    @cached_property
    def none(self) -> NDArray[np.bool_]:
        """Which targets have no solution, (m,)."""
        none: NDArray[np.bool_] = np.bincount(self.of, minlength=len(self.is_open)) == 0
        return none

    def with_more(self, other: "SolutionTable", which: NDArray[np.intp]) -> "SolutionTable":
        """Return this with solutions of some of its targets, ``which`` (ascending), added."""
        of = np.concatenate([self.of, which[other.of]])
        order = np.argsort(of, kind="stable")
        return replace(
            self,
            motions=np.concatenate([self.motions, other.motions])[order],
            of=of[order],
            gaps=np.concatenate([self.gaps, other.gaps])[order],
        )


def solve_by(peeled: Peeled, targets: FloatArray) -> SolutionTable:
    """Return all solutions by one triple for targets (m, 4, 4), lengths over L."""
    m = len(targets)
    answers, of, flags = _answers(peeled, targets)
    table = _closed(peeled, targets, answers, of, flags)
    flagged = flags != 0
    if table.none.any() and flagged.any():
        left = np.flatnonzero(table.none & (flags == NEAR_FREE))
        # Its own value of a nearly free joint led nowhere: take samples of it all around.
        again = np.zeros(m, np.bool_)
        again[left] = True
        more = _closed(peeled, targets, answers[again[of]], of[again[of]], np.full(m, FREE))
        table = table.with_more(more, np.arange(m))
    if len(table.gaps) and table.gaps.max() > LOOSE:
        table = _without_near_misses(table, flags)
    is_open = table.is_open | flagged
    if table.none.any() and (flagged.any() or peeled.slack > EXACT_SLACK):
        # What the outer joints miss by more than rounding explains is missed whatever is free;
        # of a rounded table what they miss by less may be met.
        outside = np.flatnonzero(table.none & (table.excess >= NOT_TRIED))
        is_open[outside] = (
            _nearest_answers(peeled, targets[outside])[1] <= EDGE_SLACKS * peeled.slack
        )
    return replace(table, is_open=is_open)


def _without_near_misses(table: SolutionTable, flags: NDArray[np.int64]) -> SolutionTable:
    """Leave out what is accepted but lands worse than all else of its target.

    Another branch may come that near to the target just before its fold. Of free joints samples
    are kept: they land as well as the joint is free.
    """
    tight = table.gaps.max(axis=1) <= LOOSE
    has_tight = np.zeros(len(flags), np.bool_)
    has_tight[table.of[tight]] = True
    kept = tight | ~has_tight[table.of] | (flags[table.of] & FREE != 0)
    return replace(table, motions=table.motions[kept], of=table.of[kept], gaps=table.gaps[kept])


def _answers(
    peeled: Peeled, targets: FloatArray
) -> tuple[FloatArray, NDArray[np.int64], NDArray[np.int64]]:
    m, begin = len(targets), 0
    flags = np.zeros(m, np.int64)
    tables: list[tuple[FloatArray, NDArray[np.int64]]] = []
    while begin < m or not tables:
        room = USUAL_ANSWERS * (m - begin) + MOST_ROWS_FOUND
        answers, of = np.empty((room, 4)), np.empty(room, np.int64)
        begin, rows = outer_answers(
            peeled.how,
            peeled.slides,
            peeled.axes,
            peeled.points,
            peeled.pair,
            peeled.fixed,
            peeled.tool_inverse,
            peeled.slack,
            targets,
            begin,
            answers,
            of,
            flags,
        )
        tables.append((answers[:rows], of[:rows]))
    if len(tables) == 1:
        return *tables[0], flags
    return np.concatenate([t[0] for t in tables]), np.concatenate([t[1] for t in tables]), flags


def _closed(
    peeled: Peeled,
    targets: FloatArray,
    answers: FloatArray,
    of: NDArray[np.int64],
    flags: NDArray[np.int64],
) -> SolutionTable:
    motions, motions_of, excess = _candidates(peeled, targets, answers, of, flags, peeled.slack)
    return _landed(peeled, targets, motions, motions_of, excess, FEW_STEPS)


def _candidates(
    peeled: Peeled,
    targets: FloatArray,
    answers: FloatArray,
    of: NDArray[np.int64],
    flags: NDArray[np.int64],
    slack: float,
) -> tuple[FloatArray, NDArray[np.int64], FloatArray]:
    """Return motions, their targets, and by how much the triple of each target fails to close."""
    room, excess = MOST_PER_ANSWER * len(answers), np.full(len(targets), NOT_TRIED)
    motions, motions_of = np.empty((room, 6)), np.empty(room, np.int64)
    count = close_answers(
        peeled.solved_axis,
        peeled.solved_point,
        peeled.prismatic,
        peeled.tool_inverse,
        peeled.how,
        peeled.rows,
        peeled.sign,
        peeled.triple,
        slack,
        targets,
        answers,
        of,
        flags,
        motions,
        motions_of,
        excess,
    )
    return motions[:count], motions_of[:count], excess


def _landed(
    peeled: Peeled,
    targets: FloatArray,
    motions: FloatArray,
    of: NDArray[np.int64],
    excess: FloatArray,
    steps: int,
) -> SolutionTable:
    """Return what of some candidates is a solution; ``motions`` are overwritten."""
    left = np.full(len(targets), NOT_TRIED)
    motions, of, gaps = _distinct(peeled, targets, motions, of, steps, left)
    odd = np.bincount(of) % 2 == 1 if peeled.slack > EXACT_SLACK else NO_TARGETS
    if odd.any():
        # Solutions come in pairs: the exact arm nearby has lost one of two beside a fold.
        beside = np.flatnonzero(odd[of])
        fold = BESIDE_FOLD * peeled.slack**0.5
        twins, rows = twins_of(_lines(peeled), motions[beside], fold)
        both = np.concatenate([of, of[beside[rows]]])
        order = np.argsort(both, kind="stable")
        motions = np.concatenate([motions, twins])[order]
        motions, of, gaps = _distinct(peeled, targets, motions, both[order], steps, left)
    table = SolutionTable(motions, of, gaps, excess, left <= NEARLY_LANDED)
    if table.none.any():
        np.logical_or(
            table.is_open,
            table.none & (excess <= max(EDGE, EDGE_SLACKS * peeled.slack)),
            out=table.is_open,
        )
    return table


def _distinct(
    peeled: Peeled,
    targets: FloatArray,
    motions: FloatArray,
    of: NDArray[np.int64],
    steps: int,
    left: FloatArray,
) -> tuple[FloatArray, NDArray[np.int64], FloatArray]:
    """Return what of some motions lands, each once, its target and gaps; ``left`` as the kernel."""
    gaps, kept = np.empty((len(motions), 2)), np.empty(len(motions), np.bool_)
    worth = WORTH_POLISHING if steps == FEW_STEPS else NOT_TRIED
    polish(*_lines(peeled), targets, of, steps, worth, motions, gaps)
    keep_distinct(peeled.prismatic, of, SAME_MOTIONS, motions, gaps, kept, left)
    return motions[kept], of[kept], gaps[kept]


def _lines(peeled: Peeled) -> tuple[FloatArray, FloatArray, NDArray[np.bool_], FloatArray]:
    return peeled.axis, peeled.point, peeled.prismatic, peeled.tool_at_zero


def sought(peeled: Peeled, targets: FloatArray) -> SolutionTable:
    """Return what least squares from some starts find for targets (m, 4, 4), lengths over L."""
    m = len(targets)
    motions, of = _starts(peeled, m)
    return _landed(peeled, targets, motions, of, np.full(m, NOT_TRIED), SEARCH_STEPS)


def nearest_by(peeled: Peeled, targets: FloatArray) -> FloatArray:
    """Return motions (m, 6) that bring the tool near to targets that it does not reach.

    Turned as the target, with the outer joints as near as they come, where the triple can do the
    turn; else what least squares find from there and from some starts.
    """
    m, every = len(targets), np.arange(len(targets))
    answers, _ = _nearest_answers(peeled, targets)
    regular = np.zeros(m, np.int64)
    turned, of, _ = _candidates(peeled, targets, answers, every, regular, NOT_TRIED)
    turned_gaps = _gaps(peeled, targets, turned, of, 0)
    starts, starts_of = _starts(peeled, m)
    starts, starts_of = np.concatenate([turned, starts]), np.concatenate([of, starts_of])
    gaps = np.linalg.norm(_gaps(peeled, targets, starts, starts_of, SEARCH_STEPS), axis=1)
    nearest: FloatArray = np.empty((m, 6))
    for b in every:
        own, mine = np.flatnonzero(starts_of == b), np.flatnonzero(of == b)
        nearest[b] = starts[own[gaps[own].argmin()]]
        exact = mine[turned_gaps[mine, 1] <= ACCEPTED]
        if len(exact):
            nearest[b] = turned[exact[turned_gaps[exact, 0].argmin()]]
    return nearest


def _nearest_answers(peeled: Peeled, targets: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return what brings the outer joints nearest, (m, 4), and by how much they miss, (m,)."""
    answers, misses = np.empty((len(targets), 4)), np.empty(len(targets))
    outer = peeled.how, peeled.slides, peeled.axes, peeled.points, peeled.fixed
    nearest_answers(*outer, peeled.tool_inverse, targets, answers, misses)
    return answers, misses


def _gaps(
    peeled: Peeled,
    targets: FloatArray,
    motions: FloatArray,
    of: NDArray[np.int64],
    steps: int,
) -> FloatArray:
    """Return the gaps (k, 2) of motions bettered in place by so many steps."""
    gaps = np.empty((len(motions), 2))
    polish(*_lines(peeled), targets, of, steps, NOT_TRIED, motions, gaps)
    return gaps


def _starts(peeled: Peeled, m: int) -> tuple[FloatArray, NDArray[np.int64]]:
    """Return the same starts for each of m targets: over a turn, and over L to both sides."""
    share = 2.0 * scrambled_halton(STARTS, 6, _SEED) - 1.0
    starts = share * np.where(peeled.prismatic, 1.0, np.pi)
    return np.tile(starts, (m, 1)), np.repeat(np.arange(m), STARTS)
