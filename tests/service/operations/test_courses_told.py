"""What is told of travels and approaches: words in the user's units, codes, what is left out.

What follows courses is made up here, so that every case can be had. Left out: whether it is right
(kinematics/travel), and whole answers (contract/test_travels).
"""

from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np
import pytest

from kinematics.findings import NEAR as NEAR_CODE
from kinematics.findings import Finding
from kinematics.reach.targets import NOT_FOUND, OUTSIDE_TRAVEL, UNREACHABLE, Reason
from kinematics.travel.moves import (
    BEYOND_TRAVEL,
    BRANCH_ENDS,
    NO_END,
    NO_START,
    SINGULAR,
    Break,
    Course,
    Extreme,
    Followed,
    Gone,
    Way,
)
from service.errors import ServiceError, TooLarge
from service.operations.arms import Arms
from service.operations.courses_told import (
    approach_out,
    approach_reason_out,
    approach_say,
)
from service.operations.travels import ManyTravels, travels_of_body
from service.wire.arms import ReadArm

LIMIT = Reason("travel-limit", "joint 2 would leave {threshold}", "", 0.0, "rad", 3.2, np.pi)
NEAR = Finding(NEAR_CODE, "near-singular", "{measure} below {threshold}", 0.05, 0.06, joint=2)
LEG = Gone(
    length=0.3,
    turn=np.pi / 2,
    gone=0.3,
    start=np.array([0.0, 1.0]),
    end=np.array([0.5, np.pi]),
    branch_at_start="elbow up",
    branch_at_end="elbow up",
    branch_kept=True,
    margin=Extreme(0.25, 0.1, 2),
    singular_value=Extreme(0.125, 0.2),
    peak_speeds=np.array([np.pi, 1.0]),
    peak_at=np.array([0.0, 0.1]),
    peak_share=Extreme(0.5, 0.1, 1),
    duration=1.5,
    top_speed=0.4,
    shortest=0.75,
    position_error=1e-9,
    angle_error=0.0,
    samples=np.array([[0.0, 1.0], [0.5, np.pi]]),
    shares=np.array([0.0, 1.0]),
)
WHOLE = Way(LEG.start, (LEG,))
BROKEN = Way(
    LEG.start,
    (replace(LEG, gone=0.1),),
    Break(
        *(BEYOND_TRAVEL, 0, 1 / 3, 0.1, replace(LIMIT, nearest=np.eye(4))),
        joint_values=np.array([0.2, np.pi]),
        joint=2,
        verdict=OUTSIDE_TRAVEL,
    ),
)
ENDS = Way(
    LEG.start,
    (replace(LEG, length=0.0, gone=0.0),),
    Break(BRANCH_ENDS, 0, 0.5, 0.0, Reason("branch-ends", "none goes on", "", 0.0, "m")),
)
BODY: dict[str, Any] = {
    "arm": "two-turns",
    "travels": [
        {"name": name, "start": {"joints": [0, 0]}, "legs": [{"end": {"joints": [1, 1]}}] * legs}
        for name, legs in (("one", 1), ("two", 2))
    ],
}


@dataclass
class Made:
    """Answers every course alike."""

    followed: Followed
    seconds: float = 1e-3
    asked: list[Any] = field(default_factory=list)

    def estimated_seconds(self, course: Course) -> float:
        return self.seconds * len(course.legs)

    def follow(self, course: Course, near: Any = None) -> Followed:
        self.asked.append(near)
        return self.followed


def many(arms: Arms[ReadArm], made: Made, **changes: Any) -> ManyTravels:
    found = travels_of_body(arms, {**BODY, "form": "xyz-fixed", **changes})
    vars(found.question)["courses"] = made
    return found


def told(arms: Arms[ReadArm], *ways: Way, **changes: Any) -> Any:
    broken = None if any(way.done for way in ways) else ways[0].broken
    followed = Followed(ways, broken, len(ways), "made up")
    return many(arms, Made(followed), **changes).items(0, 1)[0]


def test_a_whole_way(arms: Arms[ReadArm]) -> None:
    item = told(arms, WHOLE, BROKEN)
    assert (item["name"], item["ok"], item["code"], item["verdict"]) == (
        "one",
        True,
        0,
        "reachable",
    )
    assert (item["breaks"], item["started"], item["whole"], item["say"]) == (None, 2, 1, "made up")
    (way,) = item["ways"]
    (leg,) = way["legs"]
    assert leg["part"] == "leg"
    assert leg["end"] == {"joints": pytest.approx([28.6478898, 180]), "branch": "elbow up"}
    assert (leg["length"], leg["turn"], leg["gone"]) == (300, 90, 300)
    assert leg["margin"] == {"value": 0.25, "at": 100, "joint": 2}
    assert leg["smallest_singular_value"] == {"value": 0.125, "at": 200}
    assert leg["peak_speeds"] == pytest.approx([180, 57.2957795])
    assert leg["share_of_top_speed"] == {"value": 0.5, "at": 100, "joint": 1}
    assert (leg["duration_s"], leg["top_speed"], leg["shortest_s"]) == (1.5, 400, 0.75)
    assert [point["share"] for point in leg["points"]] == [0, 1]
    assert len(told(arms, WHOLE, BROKEN, solutions="all")["ways"]) == 2


def test_what_is_not_known_is_null(arms: Arms[ReadArm]) -> None:
    bare = replace(
        LEG, peak_speeds=None, peak_share=None, duration=None, top_speed=None, shortest=None,
        margin=Extreme(np.inf, 0.0),
    )  # fmt: skip
    (leg,) = told(arms, Way(LEG.start, (bare,)))["ways"][0]["legs"]
    for name in ("peak_speeds", "share_of_top_speed", "duration_s", "top_speed", "shortest_s"):
        assert leg[name] is None
    assert leg["margin"] == {"value": None, "at": 0}


def test_what_is_to_be_known_decides_the_code(arms: Arms[ReadArm]) -> None:
    item = told(arms, Way(LEG.start, (replace(LEG, findings=(NEAR,)),)))
    assert (item["ok"], item["code"]) == (True, 1)
    assert item["ways"][0]["legs"][0]["findings"][0]["say"] == "0.05 below 0.06"


def test_a_break_is_told_in_the_user_s_units(arms: Arms[ReadArm]) -> None:
    item = told(arms, BROKEN)
    assert (item["ok"], item["code"], item["verdict"]) == (False, 201, "outside-travel")
    breaks = item["breaks"]
    assert breaks == item["ways"][0]["breaks"]
    assert breaks["say"] == "leg 1 breaks after 100 mm of 300 mm: joint 2 would leave 180 deg"
    assert (breaks["code"], breaks["leg"], breaks["joint"]) == ("travel-limit", 1, 2)
    assert (breaks["share"], breaks["distance"]) == (1 / 3, 100)
    assert breaks["joints"] == pytest.approx([11.4591559, 180])
    assert breaks["pose"]["orientation"] == {"form": "xyz-fixed", "values": [0, 0, 0]}
    turning = told(arms, ENDS)
    assert (turning["code"], turning["verdict"]) == (200, "unreachable")
    assert turning["breaks"]["say"] == "leg 1 breaks after 0.5 of its turn: none goes on"
    assert turning["breaks"]["pose"] is None


def test_a_travel_that_cannot_begin(arms: Arms[ReadArm]) -> None:
    away = Break(NO_START, 0, 0.0, 0.0, LIMIT, verdict=NOT_FOUND)
    followed = Followed((), away, 0, "made up")
    (item,) = many(arms, Made(followed)).items(0, 1)
    assert (item["code"], item["verdict"], item["ways"]) == (202, "not-found", [])
    say = "the start cannot be reached: joint 2 would leave 180 deg"
    assert item["breaks"]["say"] == say  # type: ignore[index]
    no_end = replace(away, kind=NO_END, leg=1)
    followed = Followed((Way(LEG.start, (LEG,), no_end),), no_end, 1, "made up")
    item = many(arms, Made(followed)).items(1, 2)[0]
    say = "the end of leg 2 cannot be reached: joint 2 would leave 180 deg"
    assert item["breaks"]["say"] == say  # type: ignore[index]


def test_an_approach_is_told_from_the_target_back(arms: Arms[ReadArm]) -> None:
    question = many(arms, Made(Followed((WHOLE,), None, 1, ""))).question
    whole = approach_out(question, WHOLE)
    assert (whole["ok"], whole["breaks"]) == (True, None)
    assert whole["start"] == {"joints": pytest.approx([28.6478898, 180]), "branch": "elbow up"}
    assert "end" not in whole
    broken: Any = approach_out(question, BROKEN)
    assert (broken["ok"], broken["start"], broken["breaks"]["distance"]) == (False, None, 100)
    say = (
        "the tool can come straight to the target from 100 mm before it, not from 300 mm: "
        "joint 2 would leave 180 deg"
    )
    assert broken["breaks"]["say"] == say == approach_say(question.units, BROKEN, OUTSIDE_TRAVEL)
    reason: Any = approach_reason_out(question, BROKEN, OUTSIDE_TRAVEL, "matrix")
    assert (reason["code"], reason["stage"]) == ("approach-travel-limit", "approach")
    assert (reason["say"], reason["unit"]) == (say, "mm")
    assert reason["shortfall"] == pytest.approx(200)
    assert reason["nearest"]["orientation"]["form"] == "matrix"
    assert approach_say(question.units, BROKEN, NOT_FOUND) == say
    start = f"{say}; the start itself is out of reach"
    assert approach_say(question.units, BROKEN, UNREACHABLE) == start


def test_the_best_ways_are_near_to_joint_values(arms: Arms[ReadArm]) -> None:
    made = Made(Followed((WHOLE,), None, 1, ""))
    many(arms, made, near=[0, 180]).items(0, 2)
    np.testing.assert_allclose(made.asked, [[0, np.pi]] * 2)
    with pytest.raises(ServiceError) as caught:
        many(arms, made, near=[0])
    assert caught.value.details()[0].where == ("near",)


def test_too_much_work(arms: Arms[ReadArm]) -> None:
    short = many(arms, Made(Followed((WHOLE,), None, 1, ""), seconds=0.01))
    short.refuse_long_work()
    assert 1 <= short.size <= 2
    with pytest.raises(TooLarge, match="about 6 s") as caught:
        many(arms, Made(Followed((), None, 1, ""), seconds=2.0)).refuse_long_work()
    assert (caught.value.where, caught.value.value) == (("travels",), 2)
    assert caught.value.way_out == "send at most 1 of these travels at a time"


def test_singular_is_not_decided(arms: Arms[ReadArm]) -> None:
    reason = Reason("singular", "lined up", "", 0.0, "rad")
    broken = Break(SINGULAR, 0, 0.1, 0.03, reason, kinds=("wrist",), verdict=NOT_FOUND)
    item = told(arms, Way(LEG.start, (LEG,), broken))
    assert (item["code"], item["breaks"]["kinds"]) == (202, ["wrist"])
