"""Answers about many targets as columns: a line for each target, or for each of its solutions.

Left out: printing them (wire/reach_lines.py).
"""

from typing import NamedTuple

import numpy as np

from kinematics.reach.targets import CODES, PROOFS, REACHABLE, VERDICTS
from service.operations.reach import ManyTargets
from service.operations.reach_told import ToldChecks
from service.problems import KINDS
from service.wire.reach_lines import ReachColumns


class _Line(NamedTuple):
    """One line; ``solution`` is the one it tells, if any."""

    name: str
    code: int
    codes: frozenset[int] = frozenset()
    verdict: str = ""
    solutions: int = 0
    rank: int = 0
    proof: str = ""
    reason: str = ""
    solution: int | None = None


def columns_of(many: ManyTargets, begin: int, end: int) -> ReachColumns:
    """Return what the lines of targets ``begin`` ... ``end`` say."""
    span, told = many.told(begin, end)
    lines: list[_Line] = []
    number = span.start
    for place in range(begin, end):
        name = many.read.names[place] or ""
        if place in many.read.refused:
            detail = many.read.refused[place]
            lines.append(_Line(name, KINDS[detail.code].number, reason=detail.say))
            continue
        lines += _lines_of(many, told, number, number - span.start, name)
        number += 1
    return _columns(told, lines)


def _lines_of(
    many: ManyTargets, told: ToldChecks, number: int, index: int, name: str
) -> list[_Line]:
    """Return the lines of one target, the ``number``-th usable one, ``index``-th of this piece."""
    checks, count = told.checks, told.found(index)
    verdict = int(checks.verdict[index])
    same = (VERDICTS[verdict], count)
    proof = PROOFS[int(checks.proof[index])]
    if verdict != REACHABLE:
        say = told.reason_say(index)
        return [_Line(name, CODES[verdict], frozenset(), *same, 0, proof, say)]
    of_target = frozenset(finding.code for finding in many.repaired(number))
    lines = []
    for rank, solution in enumerate(told.told_ranks(index), start=1):
        codes = of_target | told.codes(solution)
        code = max(codes, default=0)
        lines.append(_Line(name, code, codes, *same, rank, proof, "", solution))
    return lines


def _columns(told: ToldChecks, lines: list[_Line]) -> ReachColumns:
    checks, question = told.checks, told.question
    joints = np.full((len(lines), question.arm.joint_count), np.nan)
    margins, errors = np.full(len(lines), np.nan), np.full((len(lines), 2), np.nan)
    with_one = [place for place, line in enumerate(lines) if line.solution is not None]
    solutions = [line.solution for line in lines if line.solution is not None]
    if solutions:
        joints[with_one] = np.array(told.joints)[solutions]
        margins[with_one] = checks.margin[solutions]
        errors[with_one] = np.array(told.errors)[:, solutions].T
    applying = {
        code: np.array([code in line.codes for line in lines])
        for code in sorted(set[int]().union(*(line.codes for line in lines)))
    }
    return ReachColumns(
        codes=np.array([line.code for line in lines], dtype=np.int64),
        applying=applying,
        verdicts=[line.verdict for line in lines],
        counts=[line.solutions for line in lines],
        joints=joints,
        margins=margins,
        states=["" if s is None else told.state(s) for s in (line.solution for line in lines)],
        ranks=[line.rank for line in lines],
        proofs=[line.proof for line in lines],
        branches=["" if s is None else told.branch(s) for s in (line.solution for line in lines)],
        errors=errors,
        reasons=[line.reason for line in lines],
        names=[line.name for line in lines],
    )
