"""What is told of targets: words in the user's units, order, pieces, work that is too long.

What finds solutions is made up here, so that every case can be had. Left out: whether solutions are
right (kinematics/reach), and whole answers (contract/test_reach).
"""

import re
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np
import pytest

from kinematics.findings import Finding
from kinematics.reach.targets import (
    CLOSED_FORM,
    NONE,
    NOT_FOUND,
    ORIENTATION,
    OUTSIDE_TRAVEL,
    REACHABLE,
    UNREACHABLE,
    WITNESS,
    Checks,
    Family,
    Reason,
    Target,
    Targets,
)
from service.convert import UNITS
from service.errors import ServiceError, TooLarge
from service.operations.arms import Arms
from service.operations.reach import ManyTargets, Wanted, reach_question, wanted_solutions
from service.operations.reach_columns import columns_of
from service.operations.reach_judged import told_together
from service.operations.reachers import is_quick, method_of, reacher_of
from service.operations.reasons_told import family_out, reason_out
from service.wire.arms import ReadArm
from service.wire.reach_request import ReachRequest
from service.wire.reach_targets import read_targets

MM = UNITS["mm-deg"]
REASON = Reason("too-far", "{shortfall} of {measure}", "links", 0.25, "m", measure=1.5)
_BOTH = np.array([0.0, np.pi])
FAMILY = Family((1, 2), "rad", ((-np.pi / 2, 0.0),), _BOTH, "1 + 2 = {measure}", np.pi)
FOUND = [[0.1, 0.2], [0.3, 0.4], [0.0, 1.0]]


@dataclass
class Made:
    """Answers every target alike: three solutions, or a no with a reason."""

    verdict: int = REACHABLE
    seconds: float = 1e-5
    asked: list[Any] = field(default_factory=list)

    def estimated_seconds(self, targets: Targets) -> float:
        return self.seconds * len(targets)

    def check(self, targets: Targets, *, best_only: bool = False, near: Any = None) -> Checks:
        self.asked.append((len(targets), near))
        count = len(targets)
        told = {REACHABLE: FOUND, OUTSIDE_TRAVEL: [[3.0, 0.2], [0.2, 3.1]]}
        joints = np.array(told.get(self.verdict, []) * count).reshape(-1, 2)
        each = len(joints) // count
        proof = WITNESS if self.verdict == REACHABLE else CLOSED_FORM
        return Checks(
            verdict=np.full(count, self.verdict),
            proof=np.full(count, proof),
            offsets=np.arange(count + 1) * each,
            found=np.full(count, 3 if self.verdict == REACHABLE else each),
            joint_values=joints,
            margin=np.full(len(joints), 0.25),
            outside_working=np.zeros(len(joints), dtype=bool),
            position_error=np.full(len(joints), 1e-9),
            angle_error=np.full(len(joints), np.pi),
            branch=np.zeros(len(joints), dtype=np.int64),
            branches=("elbow up",),
            words=self,
        )

    def reason(self, index: int) -> Reason | None:
        return None if self.verdict == REACHABLE else REASON

    def families(self, index: int) -> tuple[Family, ...]:
        return (FAMILY,) if self.verdict == REACHABLE and index == 1 else ()

    def findings(self, index: int) -> tuple[Finding, ...]:
        return ()


def many(arms: Arms[ReadArm], made: Made, targets: list[Any], **said: Any) -> ManyTargets:
    body = {"arm": "two-turns", "targets": targets, **said}
    asked = ReachRequest.model_validate(body)
    question = reach_question(arms, asked)
    # Each test has a question of its own; a kept one would keep what is made up.
    question.__dict__["reacher"] = made
    wanted = wanted_solutions(question, asked.solutions, asked.order, asked.near)
    return ManyTargets(question, read_targets(targets, question.units), wanted)


PLACES = [{"name": f"p-{n}", "position": [n, 0, 0]} for n in range(5)]


def test_items_stand_in_order_with_refused_ones_between(arms: Arms[ReadArm]) -> None:
    targets = [*PLACES[:2], {"name": "bad"}, *PLACES[2:]]
    asked = many(arms, Made(), targets, solutions="all")
    items = asked.items(0, 6)
    assert [item["name"] for item in items] == ["p-0", "p-1", "bad", "p-2", "p-3", "p-4"]
    assert [item["code"] for item in items] == [0, 0, 105, 0, 0, 0]
    assert [*items[0], "problem"] == list(items[2])
    pieces = [*asked.items(0, 3), *asked.items(3, 6)]
    assert [item["name"] for item in pieces] == [item["name"] for item in items]
    solutions: Any = items[0]["solutions"]
    np.testing.assert_allclose(solutions[0]["joints"], np.rad2deg(FOUND[0]))
    assert (solutions[0]["branch"], solutions[0]["margin"]) == ("elbow up", 0.25)
    assert solutions[0]["position_error"] == pytest.approx(1e-6)
    assert solutions[0]["angle_error"] == pytest.approx(180.0)


def test_the_best_alone_and_how_many_there_were(arms: Arms[ReadArm]) -> None:
    made = Made()
    (item,) = many(arms, made, PLACES[:1]).items(0, 1)
    assert (item["found"], len(item["solutions"])) == (3, 1)  # type: ignore[arg-type]
    assert made.asked == [(1, None)]


def test_the_farthest_from_singular_comes_first(arms: Arms[ReadArm]) -> None:
    made = Made()
    (item,) = many(arms, made, PLACES[:1], order="singularity").items(0, 1)
    assert made.asked == [(1, None)]
    (best,) = item["solutions"]  # type: ignore[misc]
    # The elbow that is bent most, of 0.2, 0.4 and 1 rad.
    np.testing.assert_allclose(best["joints"], np.rad2deg(FOUND[2]))


def test_what_is_near_is_taken_in_the_user_s_units(arms: Arms[ReadArm]) -> None:
    made = Made()
    many(arms, made, PLACES[:1], near=[90, -180]).items(0, 1)
    np.testing.assert_allclose(made.asked[0][1], [np.pi / 2, -np.pi])


def test_a_no_is_told_in_the_user_s_units_and_frame(arms: Arms[ReadArm]) -> None:
    nearest = np.eye(4)
    nearest[:3, 3] = [0.5, 0.0, 0.0]
    question = many(arms, Made(), PLACES[:1], frame="tray", units="in-deg").question
    told: Any = reason_out(question, replace(REASON, nearest=nearest), "matrix")
    assert told["say"] == "9.84252 in of 59.0551 in"
    assert (told["unit"], told["stage"], told["code"]) == ("in", "links", "too-far")
    assert told["shortfall"] == pytest.approx(0.25 / 0.0254)
    # The tray stands 100 mm ahead of the base.
    assert told["nearest"]["position"][0] == pytest.approx(0.4 / 0.0254)
    assert told["nearest"]["orientation"] == {"form": "matrix", "values": np.eye(3).tolist()}
    assert reason_out(question, None, "matrix") is None


def test_a_family_is_told_in_the_user_s_units(arms: Arms[ReadArm]) -> None:
    question = many(arms, Made(), PLACES[:1]).question
    assert family_out(question, FAMILY) == {
        "free_joints": [1, 2],
        "interval": [[-90.0, 0.0]],
        "unit": "deg",
        "witness": {"joints": [0.0, 180.0]},
        "relation": "1 + 2 = 180 deg",
    }
    simple = Family((2,), "rad", (), np.zeros(2))
    assert "relation" not in family_out(question, simple)


def test_beyond_travel_joint_and_excess_are_told(arms: Arms[ReadArm]) -> None:
    (item,) = many(arms, Made(OUTSIDE_TRAVEL), PLACES[:1]).items(0, 1)
    assert (item["ok"], item["code"], item["verdict"]) == (False, 201, "outside-travel")
    # All of them, also where the best alone is asked for.
    solution, other = item["solutions"]  # type: ignore[misc]
    assert other["findings"][0]["joint"] == 2
    (finding,) = solution["findings"]
    assert (finding["joint"], finding["code"], finding["threshold"]) == (1, 4, 170.0)
    assert finding["excess"] == pytest.approx(np.rad2deg(3.0) - 170.0)


@pytest.mark.parametrize(("verdict", "code"), [(UNREACHABLE, 200), (NOT_FOUND, 202)])
def test_codes_of_a_no(arms: Arms[ReadArm], verdict: int, code: int) -> None:
    (item,) = many(arms, Made(verdict), PLACES[:1]).items(0, 1)
    assert (item["ok"], item["code"], item["solutions"], item["found"]) == (False, code, [], 0)


def test_lines_for_targets_or_for_solutions(arms: Arms[ReadArm]) -> None:
    targets = [PLACES[0], {"name": "bad"}, PLACES[1]]
    best = columns_of(many(arms, Made(), targets), 0, 3)
    assert best.names == {0: "p-0", 1: "bad", 2: "p-1"}
    assert best.codes.tolist() == [0, 105, 0]
    assert (list(best.ranks), list(best.counts)) == ([1, 0, 1], [3, 0, 3])
    every = columns_of(many(arms, Made(), targets, solutions="all"), 0, 3)
    assert list(every.ranks) == [1, 2, 3, 0, 1, 2, 3]
    np.testing.assert_allclose(every.joints[:3], np.rad2deg(FOUND))
    assert np.isnan(every.joints[3]).all()
    no = columns_of(many(arms, Made(UNREACHABLE), targets), 0, 3)
    assert (no.reasons[0], no.reasons[2]) == ("250 mm of 1500 mm",) * 2
    assert "pose" in no.reasons[1]


def test_long_work_is_refused_with_what_would_do(arms: Arms[ReadArm]) -> None:
    asked = many(arms, Made(seconds=2.0), PLACES)
    with pytest.raises(TooLarge) as caught:
        asked.refuse_long_work()
    assert re.search(r"about 10 s.*at most 5 s", caught.value.say)
    assert "at most 2 of these" in caught.value.way_out
    assert caught.value.status == 422
    many(arms, Made(seconds=1.0), PLACES).refuse_long_work()


def test_pieces_are_the_shorter_the_longer_a_target_takes(arms: Arms[ReadArm]) -> None:
    sizes = [many(arms, Made(seconds=each), PLACES).size for each in (1e-6, 1e-3, 1.0)]
    assert sizes == [32, 20, 1]


def test_one_reacher_for_the_same_table_tool_and_base(arms: Arms[ReadArm]) -> None:
    def reacher(**said: Any) -> Any:
        asked = ReachRequest.model_validate({"arm": "two-turns", "targets": PLACES, **said})
        question = reach_question(arms, asked)
        question.__dict__.pop("reacher", None)
        return question.reacher

    one = reacher()
    assert reacher(frame="tray", units="m-rad") is one
    assert reacher(tool="pen") is not one


def test_what_answers_rest_on_is_said_once_for_each_freedom(arms: Arms[ReadArm]) -> None:
    question = many(arms, Made(), PLACES[:1]).question
    question.__dict__.pop("reacher")
    found = reacher_of(
        question.arm, question.meant.read.digests.table_digest, question.tool.tool_in_flange
    )
    targets = Targets.of([Target(np.eye(4), NONE), Target(np.eye(4), ORIENTATION)])
    assert not is_quick(found, NONE), "nobody has looked how targets are answered"
    told = method_of(found, targets)
    assert told["proof"] == "closed-form"
    assert told["say"]
    assert method_of(found, targets) is told
    assert is_quick(found, ORIENTATION)
    assert is_quick(found, NONE)


def test_near_is_held_to_the_arm(arms: Arms[ReadArm]) -> None:
    question = many(arms, Made(), PLACES[:1]).question
    with pytest.raises(ServiceError) as caught:
        wanted_solutions(question, "all", None, [1.0])
    assert caught.value.details()[0].where == ("near",)
    with pytest.raises(ServiceError, match="near"):
        wanted_solutions(question, "all", "nearness", None)
    assert wanted_solutions(question, "best", None, None) == Wanted(True, None, None)


def test_nothing_found_is_nothing_judged(arms: Arms[ReadArm]) -> None:
    asked = many(arms, Made(UNREACHABLE), PLACES[:1])
    checks = asked.question.reacher.check(asked.targets)
    assert (
        told_together(asked.question, checks, best_only=True, by_singularity=False).judged is None
    )
