"""Where the tool of an arm is by its live joint values: the pose, its quality and its speeds.

Left out: what comes in (service/live), query strings and formats (wire).
"""

from kinematics.sampled_motion import tool_motion
from service.convert import joint_row_out
from service.errors import NoLivePose
from service.live.clocks import Clock
from service.live.live_arm import LiveArm
from service.live.live_arms import LiveArms
from service.live.samples import STALE
from service.live.seen import Seen, seen_at, seen_now
from service.operations.questions import Question
from service.operations.single import posture_answer, question_about
from service.problems import SIMULATED_CODE, STALE_CODE
from service.wire.live_told import LiveAnswer
from service.wire.single import SingleAnswer, SingleQuestion


def live_answer(live: LiveArm, asked: SingleQuestion, clock: Clock) -> LiveAnswer:
    """Return where the tool is now.

    Raises
    ------
    NoLivePose : no joint values have come yet.
    ServiceError, KinematicsError : what is asked cannot be answered.
    """
    question = question_about(live.standing.stored, asked)
    return _told(asked, question, seen_now(live, clock))


def past_answer(live: LiveArm, asked: SingleQuestion, at_ms: float, clock: Clock) -> LiveAnswer:
    """Return where the tool was.

    Raises
    ------
    NoLivePose : nothing is known of that moment.
    ServiceError, KinematicsError : what is asked cannot be answered.
    """
    question = question_about(live.standing.stored, asked)
    return _told(asked, question, seen_at(live, at_ms, clock))


def live_arm(arms: LiveArms, name: str) -> LiveArm:
    """Return the live state of an arm.

    Raises
    ------
    NoLivePose : nothing ever came of it.
    """
    found = arms.get(name)
    if found is None:
        raise NoLivePose(
            f"no joint values have come of {name!r} yet",
            where=("arm",),
            location="path",
            value=name,
            way_out=f"have them sent to /v1/arms/{name}/joints",
        )
    return found


def _told(asked: SingleQuestion, question: Question, seen: Seen) -> LiveAnswer:
    single = posture_answer(question, seen.joints, asked)
    codes = set(single.codes)
    if seen.reason == STALE:
        codes.add(STALE_CODE)
    if seen.simulated:
        codes.add(SIMULATED_CODE)
    item = single.item | {"code": max(codes, default=0)}
    answer = SingleAnswer(
        single.head,
        item,
        single.margin,
        single.tool_number,
        single.frame_number,
        frozenset(codes),
    )
    units, arm = question.units, question.arm
    # As they came: 30 and not 29.999999999999996.
    joints = [
        units.shortest_out(value, unit)
        for value, unit in zip(seen.joints, arm.joint_units, strict=True)
    ]
    return LiveAnswer(answer, seen, joints, _speeds(question, seen))


def _speeds(question: Question, seen: Seen) -> dict[str, object] | None:
    """Return how fast joints and tool move, the tool's in axes of the frame asked for."""
    if seen.rates is None:
        return None
    arm, units = question.arm, question.units
    tool, base_in_frame = question.tool.tool_in_flange, question.base_in_frame[:3, :3]
    moves = tool_motion(arm, seen.joints, seen.rates, tool, base_in_frame)
    return {
        "joints": joint_row_out(arm, units, seen.rates),
        "linear": [units.value_out(part, "m") for part in moves.linear],
        "angular": [units.value_out(part, "rad") for part in moves.angular],
        "tool_speed": units.value_out(moves.speed, "m"),
        "turning_speed": units.value_out(moves.turning_speed, "rad"),
    }
