"""Answers about many targets as columns: a line for each target, or for each of its solutions.

Left out: printing them (wire/reach_lines.py).
"""

from dataclasses import replace
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.findings import FINE, OUTSIDE_TRAVEL, OUTSIDE_WORKING_TRAVEL
from kinematics.reach.targets import CODES, PROOFS, REACHABLE, VERDICTS
from kinematics.singularity import STATES
from service.operations.reach import ManyTargets
from service.operations.reach_told import NO_STATE, ToldChecks
from service.problems import KINDS
from service.wire.reach_gathered import FIELD
from service.wire.reach_lines import ReachColumns, Texts

_CODES = np.array(CODES)
_REFUSED = -1
"""In place of a target's index, for a line about one that could not be used."""


class _Lines(NamedTuple):
    """Which target each line is about, and which of its solutions it tells.

    Attributes
    ----------
    places : (lines,), of the target in the request.
    targets : index among those answered, or _REFUSED.
    ranks : from 1; 0 where no solution is told.
    solutions : index into all solutions, -1 where none is told.
    """

    places: NDArray[np.intp]
    targets: NDArray[np.intp]
    ranks: NDArray[np.int64]
    solutions: NDArray[np.intp]


def columns_of(
    many: ManyTargets, begin: int, end: int, *, whole_reasons: bool = False
) -> ReachColumns:
    """Return what the lines of targets ``begin`` ... ``end`` say.

    ``whole_reasons`` : whether all that JSON tells of reasons is wanted, beside their sentences.
    """
    span, told = many.told(begin, end, families=False)
    lines = _lines_of(many, span, told, range(begin, end))
    checks, question = told.checks, told.question
    # Of a line without a target or a solution the last entry is told: an empty one.
    verdicts, proofs = (
        np.append(each, -1)[lines.targets] for each in (checks.verdict, checks.proof)
    )
    codes, applying = _codes_of(many, span, told, lines)
    margins, branches = (
        np.append(each, empty)[lines.solutions]
        for each, empty in ((checks.margin, np.nan), (checks.branch, -1))
    )
    joints = told.joints_out()
    nowhere = np.full((1, question.arm.joint_count), np.nan)
    return ReachColumns(
        codes=codes,
        applying=applying,
        verdicts=Texts(VERDICTS, verdicts),
        counts=np.append(checks.found, 0)[lines.targets],
        joints=np.concatenate([joints, nowhere])[lines.solutions],
        margins=margins,
        states=_states_of(told, lines.solutions),
        ranks=lines.ranks,
        proofs=Texts(PROOFS, proofs),
        branches=Texts(checks.branches, branches),
        errors=np.concatenate([told.errors_out(), np.full((1, 2), np.nan)])[lines.solutions],
        reasons=_reasons_of(many, told, lines),
        names=_names_of(many, lines),
        why=_why(many, told, lines, span.start) if whole_reasons else {},
    )


def _lines_of(many: ManyTargets, span: range, told: ToldChecks, asked: range) -> _Lines:
    checks = told.checks
    reached = checks.verdict == REACHABLE
    listed = told.told_counts()
    counts = np.where(reached, listed, 1)
    targets = np.repeat(np.arange(len(counts)), counts)
    within = np.arange(len(targets)) - np.repeat(np.cumsum(counts) - counts, counts)
    first = checks.offsets[:-1][targets] + within
    tells = reached[targets]
    solutions = np.full(len(targets), -1)
    solutions[tells] = told.in_order[first[tells]]
    lines = _Lines(
        many.read.places[span.start : span.stop][targets],
        targets,
        np.where(tells, within + 1, 0),
        solutions,
    )
    refused = [place for place in many.read.refused if place in asked]
    if not refused:
        return lines
    places = np.concatenate([lines.places, refused])
    order = np.argsort(places, kind="stable")

    def among(each: NDArray[np.int64], empty: int) -> NDArray[np.int64]:
        return np.concatenate([each, np.full(len(refused), empty)])[order]

    return _Lines(
        places[order],
        among(lines.targets, _REFUSED),
        among(lines.ranks, 0),
        among(lines.solutions, -1),
    )


def _codes_of(
    many: ManyTargets, span: range, told: ToldChecks, lines: _Lines
) -> tuple[NDArray[np.int64], dict[int, NDArray[np.bool_]]]:
    """Return the code of each line, and where each code that is no refusal applies."""
    applying: dict[int, NDArray[np.bool_]] = {}

    def note(code: int, where: NDArray[np.bool_]) -> None:
        if code != FINE and where.any():
            applying[code] = where | applying.get(code, False)

    tells = lines.solutions >= 0
    if told.judged is not None:
        states = np.append(told.judged.column_of_states(), FINE)[lines.solutions]
        for code in range(1, len(STATES)):
            note(code, states == code)
    codes_beyond = (OUTSIDE_WORKING_TRAVEL, OUTSIDE_TRAVEL)
    for code, beyond in zip(codes_beyond, told.exceeded, strict=True):
        note(code, np.append(beyond, False)[lines.solutions])
    for solution in told.with_more_codes():
        for code in told.codes(solution):
            note(code, lines.solutions == solution)
    for finding in many.question.repaired:
        note(finding.code, tells)
    for number, findings in many.read.repaired.items():
        for finding in findings if number in span else ():
            note(finding.code, tells & (lines.targets == number - span.start))
    codes = np.append(_CODES[told.checks.verdict], 0)[lines.targets]
    for code, where in applying.items():
        codes = np.where(where, np.maximum(codes, code), codes)
    for line in np.flatnonzero(lines.targets == _REFUSED).tolist():
        codes[line] = KINDS[many.read.refused[int(lines.places[line])].code].number
    return codes, dict(sorted(applying.items()))


def _states_of(told: ToldChecks, solutions: NDArray[np.intp]) -> Texts:
    if told.judged is None:
        return Texts((NO_STATE,), np.where(solutions < 0, -1, 0))
    return Texts(STATES, np.append(told.judged.column_of_states(), -1)[solutions])


def _names_of(many: ManyTargets, lines: _Lines) -> dict[int, str]:
    names = many.read.names
    if not any(names):
        return {}
    places = enumerate(lines.places.tolist())
    return {line: name for line, place in places if (name := names[place])}


def _why(
    many: ManyTargets, told: ToldChecks, lines: _Lines, first: int
) -> dict[int, dict[str, object]]:
    """Return reasons as JSON tells them, and problems, whose pointers lead into their target.

    ``first`` : of the usable targets, that is answered first.
    """
    why: dict[int, dict[str, object]] = {}
    for line in np.flatnonzero(lines.ranks == 0).tolist():
        index = int(lines.targets[line])
        if index == _REFUSED:
            detail = many.read.refused[int(lines.places[line])]
            inside = detail.where[2:] if detail.where[:1] == (FIELD,) else detail.where
            why[line] = replace(detail, where=inside).problem_of_item()
        else:
            why[line] = told.reason(index, many.read.forms[first + index]) or {}
    return why


def _reasons_of(many: ManyTargets, told: ToldChecks, lines: _Lines) -> dict[int, str]:
    reasons = {}
    for line in np.flatnonzero(lines.ranks == 0).tolist():
        index = int(lines.targets[line])
        if index == _REFUSED:
            reasons[line] = many.read.refused[int(lines.places[line])].say
        else:
            reasons[line] = told.reason_say(index)
    return reasons
