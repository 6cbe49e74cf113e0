"""Approaches to places of a planar arm of two links, whose breaks can be told by hand.

Links of 0.4 m and 0.3 m: at r from the first axis cos q2 = (r^2 - 0.25) / 0.24. Left out: whole
answers (contract/test_approaches), and following ways (test_courses).
"""

import numpy as np
import pytest

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.reach.checks import Reacher
from kinematics.reach.targets import (
    BOUND,
    CLOSED_FORM,
    NOT_FOUND,
    ORIENTATION,
    OUTSIDE_TRAVEL,
    REACHABLE,
    SEARCH,
    UNREACHABLE,
    WITNESS,
    Target,
    Targets,
)
from kinematics.table import Convention, JointKind, Row, Table, Travel
from kinematics.travel import approaches
from kinematics.travel.approaches import Approached, with_approaches
from kinematics.travel.courses import Courses
from kinematics.travel.moves import BEYOND_TRAVEL, BRANCH_ENDS, Approach
from tests.kinematics.inverse.seeds import fresh

OUTWARDS, INWARDS = np.array([2.0, 0.0, 0.0]), np.array([-1.0, 0.0, 0.0])


def two_links(lower: float = -3.0, upper: float = 3.0) -> Courses:
    """Return an arm whose second joint is bounded so."""
    rows = tuple(
        Row(JointKind.REVOLUTE, length, 0.0, 0.0, 0.0, travel=Travel(*bounds))
        for length, bounds in ((0.4, (-3.1, 3.1)), (0.3, (lower, upper)))
    )
    return Courses(Reacher(Arm("two-links", Table(Convention.STANDARD, rows)), np.eye(4)))


def place(x: float, y: float = 0.0) -> Target:
    pose = np.eye(4)
    pose[:2, 3] = x, y
    return Target(pose, ORIENTATION)


def asked(
    courses: Courses,
    *approaches: Approach | None,
    near: tuple[float, float] | None = None,
    every_way: bool = False,
) -> Approached:
    """Ask for the place (0.5, 0) as often as there are approaches."""
    targets = Targets.of([place(0.5)] * len(approaches))
    checks = courses.reacher.check(targets, near=None if near is None else np.array(near))
    given = {index: one for index, one in enumerate(approaches) if one is not None}
    return with_approaches(courses, checks, targets, given, every_way=every_way)


def test_a_whole_approach_leads_back_along_the_line() -> None:
    courses = two_links()
    found = asked(courses, Approach(0.3, OUTWARDS), every_way=True)
    assert (found.checks.verdict.tolist(), found.checks.proof.tolist()) == ([REACHABLE], [WITNESS])
    assert (len(found.ways), found.broken) == (2, {})
    for posture, way in zip(found.checks.joint_values, found.ways, strict=True):
        assert way is not None
        assert way.done
        (leg,) = way.legs
        np.testing.assert_allclose(leg.start, posture, atol=1e-12)
        start = tool_in_base(courses.arm, leg.end, courses.tool_in_flange)
        np.testing.assert_allclose(start[:3, 3], [0.2, 0, 0], atol=1e-9)
        # The same elbow: 151 degrees at 0.2 m.
        assert leg.end[1] == pytest.approx(np.sign(posture[1]) * np.arccos(-0.875), abs=1e-9)


def test_beyond_the_links_no_posture_can_start() -> None:
    found = asked(two_links(), Approach(0.3, INWARDS))
    assert found.checks.verdict.tolist() == [UNREACHABLE]
    assert found.checks.proof.tolist() == [BOUND]
    assert (len(found.ways), found.checks.offsets.tolist()) == (0, [0, 0])
    broken = found.broken[0].broken
    assert broken is not None
    assert broken.kind == BRANCH_ENDS
    # The links reach 0.7 m, which is 0.2 m before the place.
    assert broken.distance == pytest.approx(0.2, abs=5e-4)
    assert broken.share == pytest.approx(2 / 3, abs=2e-3)


def test_a_joint_at_its_limit() -> None:
    found = asked(two_links(0.0, 2.0), Approach(0.3, OUTWARDS))
    assert found.checks.verdict.tolist() == [OUTSIDE_TRAVEL]
    assert found.checks.proof.tolist() == [CLOSED_FORM]
    broken = found.broken[0].broken
    assert broken is not None
    assert (broken.kind, broken.joint) == (BEYOND_TRAVEL, 2)
    assert broken.distance == pytest.approx(0.5 - np.sqrt(0.25 + 0.24 * np.cos(2.0)), abs=5e-4)
    # What gets to the place is told, as other postures that travel is in the way of.
    assert len(found.ways) == len(found.checks.joint_values) == 1


@pytest.mark.parametrize("every_way", [False, True])
def test_postures_with_a_whole_approach_stand_first(every_way: bool) -> None:
    courses = two_links(-3.0, 2.0)
    approach = Approach(0.3, OUTWARDS)
    left = (-0.6435, np.pi / 2)
    plain = courses.reacher.check(Targets.of([place(0.5)]), near=np.array(left))
    assert plain.joint_values[0, 1] > 0
    found = asked(courses, approach, near=left, every_way=every_way)
    assert found.checks.verdict.tolist() == [REACHABLE]
    assert found.broken == {}
    np.testing.assert_allclose(found.checks.joint_values, plain.joint_values[::-1])
    np.testing.assert_allclose(found.checks.margin, plain.margin[::-1])
    assert [way is not None and way.done for way in found.ways] == [True, False]


def test_targets_without_an_approach_stay_as_they_are() -> None:
    courses = two_links(0.0, 2.0)
    found = asked(courses, None, Approach(0.3, OUTWARDS), None, Approach(0.05, OUTWARDS))
    verdicts = [REACHABLE, OUTSIDE_TRAVEL, REACHABLE, REACHABLE]
    assert found.checks.verdict.tolist() == verdicts
    assert [way is None for way in found.ways] == [True, False, True, False]
    assert list(found.broken) == [1]


def test_what_cannot_be_reached_has_no_approach() -> None:
    courses = two_links()
    targets = Targets.of([place(0.8)])
    checks = courses.reacher.check(targets)
    found = with_approaches(courses, checks, targets, {0: Approach(0.1, OUTWARDS)})
    assert found.checks.verdict.tolist() == checks.verdict.tolist() == [UNREACHABLE]
    assert (found.ways, found.broken) == ((), {})


def test_of_a_search_a_no_is_not_proved(monkeypatch: pytest.MonkeyPatch) -> None:
    """A spare joint: that the links are too short proves a no, that a way breaks does not."""
    rows = tuple(
        Row(JointKind.REVOLUTE, length, 0.0, 0.0, 0.0, travel=Travel(-3.0, 3.0))
        for length in (0.2, 0.3, 0.2)
    )
    arm = Arm("three-links", Table(Convention.STANDARD, rows))
    courses = Courses(Reacher(arm, np.eye(4)))
    found = asked(courses, Approach(0.4, INWARDS))
    assert (found.checks.verdict.tolist(), found.checks.proof.tolist()) == ([UNREACHABLE], [BOUND])
    monkeypatch.setattr(approaches, "_checked_start", lambda *_: None)
    found = asked(courses, Approach(0.4, INWARDS))
    assert (found.checks.verdict.tolist(), found.checks.proof.tolist()) == ([NOT_FOUND], [SEARCH])
    assert found.broken[0].broken is not None


def test_verdicts_agree_with_steps_along_the_line() -> None:
    """Places along the line, solved one by one: whole where each elbow stays within travel."""
    random = fresh()
    met = set[int]()
    for _ in range(60):
        lower, upper = sorted(random.uniform(-3.0, 3.0, 2))
        courses = two_links(lower, upper)
        target = place(*random.uniform(0.15, 0.45, 2))
        along = random.normal(size=3) * [1, 1, 0]
        approach = Approach(float(random.uniform(0.05, 0.4)), along)
        targets = Targets.of([target])
        checks = courses.reacher.check(targets)
        if checks.verdict[0] != REACHABLE:
            continue
        found = with_approaches(courses, checks, targets, {0: approach})
        back = np.linspace(0, approach.distance, 801)[:, None] * along / np.linalg.norm(along)
        line = target.tool_in_base[:2, 3] - back[:, :2]
        cosine = ((line**2).sum(axis=1) - 0.25) / 0.24
        inside = np.abs(cosine) <= 1
        elbow = np.arccos(np.clip(cosine, -1, 1))
        ways = [
            bool((inside & (sign * elbow >= lower) & (sign * elbow <= upper)).all())
            # The first joint turns all about, but not through its own bounds.
            and np.abs(_first(line, sign * elbow)).max() <= 3.1
            for sign in (1, -1)
        ]
        assert (found.checks.verdict[0] == REACHABLE) == any(ways)
        met.add(int(found.checks.verdict[0]))
    assert {REACHABLE, OUTSIDE_TRAVEL} <= met


def _first(line: np.ndarray, elbow: np.ndarray) -> np.ndarray:
    """Return the first joint's values along a line, without jumps."""
    towards = np.arctan2(line[:, 1], line[:, 0])
    behind = np.arctan2(0.3 * np.sin(elbow), 0.4 + 0.3 * np.cos(elbow))
    first = (towards - behind + np.pi) % (2 * np.pi) - np.pi
    return np.unwrap(first)
