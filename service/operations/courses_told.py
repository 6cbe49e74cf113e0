"""Ways along courses as they are answered: where they break and why, speeds, margins.

Left out: what is asked (courses.py, reach.py), and where the answers go.
"""

from collections.abc import Mapping, Sequence
from math import isfinite

from kinematics.reach.targets import CODES, NOT_FOUND, OUTSIDE_TRAVEL, UNREACHABLE, VERDICTS
from kinematics.table import FloatArray
from kinematics.transforms import in_frame
from kinematics.travel.moves import BREAKS, NO_START, Break, Extreme, Followed, Gone, Way
from service.convert import (
    Units,
    computed_finding_out,
    finding_out,
    joint_row_out,
    number_said,
)
from service.operations.courses import APPROACH, LEG, AskedCourse
from service.operations.questions import Question
from service.operations.reasons_told import reason_say
from service.wire.poses import pose_answer

TARGET = "target"
_STARTS = {OUTSIDE_TRAVEL: "is beyond travel", UNREACHABLE: "is out of reach"}


def told_course(
    question: Question, asked: AskedCourse, followed: Followed, *, best_only: bool
) -> dict[str, object]:
    """Return what is answered to one travel, all but its name."""
    ways = followed.ways[:1] if best_only else followed.ways
    told = [way_out(question, way, asked.parts) for way in ways]
    broken = followed.broken
    verdict = 0 if broken is None else broken.verdict
    findings = (*question.repaired, *asked.repaired, *followed.findings)
    codes = [finding.code for finding in findings]
    if followed.ways and broken is None:
        codes += [finding.code for leg in followed.ways[0].legs for finding in leg.findings]
    longest = followed.ways[0].legs if followed.ways else ()
    return {
        "ok": broken is None,
        "code": CODES[verdict] or max(codes, default=0),
        "verdict": VERDICTS[verdict],
        "breaks": None
        if broken is None
        else break_out(question, broken, longest, asked.parts[broken.leg]),
        "ways": told,
        "started": followed.started,
        "whole": sum(way.done for way in followed.ways),
        "say": followed.say,
        "findings": [finding_out(question.units, finding) for finding in findings],
    }


def refused_course(problem: Mapping[str, object], number: int) -> dict[str, object]:
    """Return what is answered to a travel that cannot be used, all but its name."""
    return {
        "ok": False,
        "code": number,
        "verdict": None,
        "breaks": None,
        "ways": [],
        "started": 0,
        "whole": 0,
        "say": "",
        "findings": [],
        "problem": problem,
    }


def way_out(question: Question, way: Way, parts: Sequence[str]) -> dict[str, object]:
    """Return one way as answered: how it goes from one posture at the start."""
    broken = way.broken
    codes = [finding.code for leg in way.legs for finding in leg.findings]
    return {
        "ok": way.done,
        "code": max(codes, default=0) if broken is None else CODES[broken.verdict],
        "start": _joints(question, way.start),
        "legs": [_leg(question, leg, part) for leg, part in zip(way.legs, parts, strict=False)],
        "breaks": None
        if broken is None
        else break_out(question, broken, way.legs, parts[broken.leg]),
    }


def approach_out(question: Question, way: Way) -> dict[str, object]:
    """Return the approach to a posture as answered; places count from the target back.

    ``way`` leads from the target to where the approach starts.
    """
    (leg,) = way.legs
    told = _numbers(question, leg)
    start = _joints(question, leg.end) if way.done else None
    broken = way.broken
    return {
        "ok": way.done,
        "start": None if start is None else {"joints": start, "branch": leg.branch_at_end},
        **told,
        "breaks": None if broken is None else break_out(question, broken, way.legs, TARGET),
    }


def approach_reason_out(
    question: Question, way: Way, verdict: int, form: str
) -> dict[str, object] | None:
    """Return why the tool cannot come to a target as asked, like other reasons.

    ``way`` leads from the target to where it breaks; ``shortfall`` is what is missing of it;
    ``verdict`` is that of the target.
    """
    broken, units = way.broken, question.units
    assert broken is not None
    nearest = broken.reason.nearest
    missing = sum(leg.length for leg in way.legs) - broken.distance
    return {
        "code": f"approach-{BREAKS[broken.kind]}",
        "say": approach_say(units, way, verdict),
        "stage": APPROACH,
        "shortfall": units.value_out(missing, "m"),
        "unit": units.length,
        "nearest": None
        if nearest is None
        else pose_answer(in_frame(question.base_in_frame, nearest), form, units),
    }


def approach_say(units: Units, way: Way, verdict: int) -> str:
    """Return why the tool cannot come to a target as asked, in one sentence."""
    assert way.broken is not None
    say = break_say(units, way.broken, way.legs, TARGET)
    if way.broken.verdict == verdict or verdict == NOT_FOUND:
        return say
    # What breaks the way is not all: nobody could start there.
    return f"{say}; the start itself {_STARTS[verdict]}"


def break_out(
    question: Question, broken: Break, legs: Sequence[Gone], part: str
) -> dict[str, object]:
    """Return where and why a way breaks, as answered."""
    units, reason = question.units, broken.reason
    nearest, posture = reason.nearest, broken.joint_values
    return {
        "code": BREAKS[broken.kind],
        "say": break_say(units, broken, legs, part),
        "leg": broken.leg + 1,
        "share": broken.share,
        "distance": units.value_out(broken.distance, "m"),
        "joint": broken.joint,
        "kinds": list(broken.kinds),
        "joints": None if posture is None else _joints(question, posture),
        "pose": None
        if nearest is None
        else pose_answer(in_frame(question.base_in_frame, nearest), question.form, units),
    }


def break_say(units: Units, broken: Break, legs: Sequence[Gone], part: str) -> str:
    """Return where and why a way breaks, in one sentence."""
    say = reason_say(units, broken.reason)
    if broken.leg >= len(legs):
        what = "the start" if broken.kind == NO_START else f"the end of {LEG} {broken.leg + 1}"
        return f"{what} cannot be reached: {say}"
    length = legs[broken.leg].length
    gone = f"{number_said(units.value_out(broken.distance, 'm'))} {units.length}"
    whole = f"{number_said(units.value_out(length, 'm'))} {units.length}"
    if part == TARGET:
        return (
            f"the tool can come straight to the target from {gone} before it, not from {whole}: "
            + say
        )
    called = f"{LEG} {broken.leg + 1}" if part == LEG else f"the {part}"
    if length > 0.0:
        return f"{called} breaks after {gone} of {whole}: {say}"
    return f"{called} breaks after {broken.share:.4g} of its turn: {say}"


def _leg(question: Question, leg: Gone, part: str) -> dict[str, object]:
    return {
        "part": part,
        "start": {"joints": _joints(question, leg.start), "branch": leg.branch_at_start},
        "end": {"joints": _joints(question, leg.end), "branch": leg.branch_at_end},
        "branch_kept": leg.branch_kept,
        **_numbers(question, leg),
        "points": [
            {"share": float(share), "joints": _joints(question, row)}
            for share, row in zip(leg.shares, leg.samples, strict=True)
        ],
    }


def _numbers(question: Question, leg: Gone) -> dict[str, object]:
    """Return how a leg goes, in numbers."""
    units = question.units
    return {
        "length": units.value_out(leg.length, "m"),
        "turn": units.value_out(leg.turn, "rad"),
        "gone": units.value_out(leg.gone, "m"),
        "margin": _extreme(units, leg.margin),
        "smallest_singular_value": _extreme(units, leg.singular_value),
        "position_error": units.value_out(leg.position_error, "m"),
        "angle_error": units.value_out(leg.angle_error, "rad"),
        "peak_speeds": None if leg.peak_speeds is None else _joints(question, leg.peak_speeds),
        "share_of_top_speed": None if leg.peak_share is None else _extreme(units, leg.peak_share),
        "duration_s": _known(leg.duration),
        "top_speed": None if leg.top_speed is None else units.value_out(leg.top_speed, "m"),
        "shortest_s": _known(leg.shortest),
        "findings": [computed_finding_out(units, finding) for finding in leg.findings],
    }


def _known(number: float | None) -> float | None:
    """Return a number that an answer can hold: what takes for ever takes no number of seconds."""
    return None if number is None or not isfinite(number) else number


def _extreme(units: Units, extreme: Extreme) -> dict[str, object]:
    told: dict[str, object] = {
        "value": _known(extreme.value),
        "at": units.value_out(extreme.distance, "m"),
    }
    return told if extreme.joint is None else {**told, "joint": extreme.joint}


def _joints(question: Question, values: FloatArray) -> list[float]:
    return joint_row_out(question.arm, question.units, values.tolist())
