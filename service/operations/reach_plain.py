"""The answer about one target where there is nothing to be said but the best posture.

It has the words of every other answer (reach_told.py), and takes a third of their time: what a
controller asks for at every cycle. Left out: whatever has a finding, and every no.
"""

from collections.abc import Mapping

from kinematics.reach.one_target import Best
from kinematics.reach.targets import PROOFS, REACHABLE, VERDICTS, WITNESS
from kinematics.singularity import REGULAR, STATES
from service.convert import finding_out, joint_row_out
from service.operations.questions import Question
from service.operations.singularities import Judged, judged_reading
from service.operations.solution_told import solution_out
from service.wire.reach_flat import ReachAnswer


def plain_answer(
    question: Question, best: Best, method: Mapping[str, object], *, nested: bool
) -> ReachAnswer | None:
    """Return the answer, None where the posture is not plainly regular.

    ``method``, ``nested`` : as of ``single_reach``.
    """
    reading = question.reader.read(best.joint_values)
    judged = judged_reading(question, best.joint_values, reading)
    if judged is None or judged.plain.states[0] != REGULAR or judged.space.watched_position_rank:
        return None
    if reading.outside:
        return None
    joints = joint_row_out(question.arm, question.units, best.joint_values)
    codes = frozenset([finding.code for finding in question.repaired])
    code = max(codes, default=0)
    return ReachAnswer(
        head={**question.head, "method": method} if nested else question.head,
        item=_item(question, best, joints, judged, code) if nested else None,
        code=code,
        verdict=VERDICTS[REACHABLE],
        found=best.found,
        joints=joints,
        joint_count=len(joints),
        margin=best.margin,
        state=STATES[REGULAR],
        codes=codes,
    )


def _item(
    question: Question, best: Best, joints: list[float], judged: Judged, code: int
) -> dict[str, object]:
    units = question.units
    singularity, _ = judged.told(0, question.base_in_frame[:3, :3])
    errors = units.value_out(best.position_error, "m"), units.value_out(best.angle_error, "rad")
    return {
        "name": None,
        "ok": True,
        "code": code,
        "verdict": VERDICTS[REACHABLE],
        "proof": PROOFS[WITNESS],
        "reason": None,
        "solutions": [solution_out(joints, best.margin, best.branch, singularity, errors, [])],
        "families": [],
        "found": best.found,
        "findings": [finding_out(units, finding) for finding in question.repaired],
    }
