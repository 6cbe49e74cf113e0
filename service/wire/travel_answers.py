"""What is answered about travels, and about approaches to targets, as models for the document.

Left out: how the answers are made (operations).
"""

from typing import Any, Literal

from service.wire.answer_models import AnsweredPose, ArmIdentity, Finding, ItemProblem, Open
from service.wire.models import UnitsName

Verdict = Literal["reachable", "outside-travel", "unreachable", "not-found"]


class Breaks(Open):
    """The first place where a way cannot go on, and why: the last posture, the tool there.

    `distance` is what the tool point has gone of leg number `leg`, `share` the same as a share; of
    an approach to a target they count from the target back.
    """

    code: Literal[
        "start-out-of-reach",
        "end-out-of-reach",
        "travel-limit",
        "singular",
        "branch-ends",
        "off-line",
    ]
    say: str
    leg: int
    share: float
    distance: float
    joint: int | None
    kinds: list[str]
    joints: list[float] | None
    pose: AnsweredPose | None


class Extreme(Open):
    """The least or most of a number on the way, and how far from where counting begins."""

    value: float | None
    at: float
    joint: int | None = None


class Ended(Open):
    """An end of a leg: the posture, and its branch in words where the arm has names for it."""

    joints: list[float]
    branch: str


class _InNumbers(Open):
    """How a straight line or a move in joint values goes.

    `length` is what the tool point goes in all, `turn` what it turns, `gone` what it has gone until
    the end or the break. `margin` is the smallest share of travel left. With a speed: the largest
    speed of each joint, the largest share of a joint's `top_speed`, and the seconds it takes.
    `top_speed` is the largest even speed of the tool point that no joint's top speed is exceeded
    by, `shortest_s` the seconds it then takes.
    """

    length: float
    turn: float
    gone: float
    margin: Extreme
    smallest_singular_value: Extreme
    position_error: float
    angle_error: float
    peak_speeds: list[float] | None
    share_of_top_speed: Extreme | None
    duration_s: float | None
    top_speed: float | None
    shortest_s: float | None
    findings: list[Finding]


class AnsweredApproach(_InNumbers):
    """The straight way to a posture at a target; `at` and `breaks` count from the target back."""

    ok: bool
    start: Ended | None
    breaks: Breaks | None


class Point(Open):
    """Joint values at a share of a leg."""

    share: float
    joints: list[float]


class AnsweredLeg(_InNumbers):
    """One leg of a way, up to where it breaks; `branch_kept` whether it stays on one branch."""

    part: Literal["approach", "retract", "leg"]
    start: Ended
    end: Ended
    branch_kept: bool
    points: list[Point]


class AnsweredWay(Open):
    """How the travel goes from one posture at its start."""

    ok: bool
    code: int
    start: list[float]
    legs: list[AnsweredLeg]
    breaks: Breaks | None


class TravelResult(Open):
    """One travel: whether the arm gets along it, the best way first.

    `started` says how many postures at the start are within travel, `whole` how many of them get to
    the end; `breaks` where the way that gets furthest breaks, if none does.
    """

    name: str | None
    ok: bool
    code: int
    verdict: Verdict | None
    breaks: Breaks | None
    ways: list[AnsweredWay]
    started: int
    whole: int
    say: str
    findings: list[Finding]
    problem: ItemProblem | None = None


class TravelSummary(Open):
    """How many travels there are of each verdict."""

    travels: int
    reachable: int
    outside_travel: int
    unreachable: int
    not_found: int
    refused: int


class TravelsAnswer(Open):
    """Travels in the order asked, and how many there are of each verdict."""

    arm: ArmIdentity
    units: UnitsName
    frame: str
    tool: Any
    travels: list[TravelResult]
    summary: TravelSummary
