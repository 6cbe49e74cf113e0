"""Breaks in words, and folds told from postures where joints swing about."""

import numpy as np
import pytest

from kinematics.arm import Arm, CombinedTravel
from kinematics.reach.targets import NOT_FOUND, OUTSIDE_TRAVEL, UNREACHABLE
from kinematics.table import Travel
from kinematics.task_space import task_space
from kinematics.travel.breaks import Breaks
from kinematics.travel.moves import BRANCH_ENDS, OFF_LINE, SINGULAR
from tests.kinematics.example_arms import PLANAR
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.travel.bounded import FLANGE, bounded, upright_arm


def breaks_of(arm: Arm) -> Breaks:
    space = task_space(arm, FLANGE)
    assert space is not None
    return Breaks(arm, FLANGE, space)


def test_a_stretched_elbow_is_a_fold_and_a_lined_up_wrist_is_none() -> None:
    random, breaks = fresh(), breaks_of(upright_arm())
    for _ in range(20):
        posture = random.uniform(-0.8, 0.8, size=6)
        posture[[1, 4]] += 0.9, 1.2
        aside = float(random.choice([-1.0, 1.0])) * 10.0 ** random.uniform(-7.0, -4.0)
        stretched, lined_up = posture.copy(), posture.copy()
        stretched[2], lined_up[4], lined_up[2] = aside, aside, -0.8
        assert breaks.ends(stretched)
        assert not breaks.ends(lined_up)


def test_what_is_said_of_a_branch() -> None:
    breaks = breaks_of(upright_arm())
    stretched = np.array([0.1, 0.9, 1e-4, 0.3, 1.1, 0.2])
    broken = breaks.of_branch(BRANCH_ENDS, 1, 0.25, 0.1, stretched)
    assert (broken.leg, broken.share, broken.distance) == (1, 0.25, 0.1)
    assert broken.kinds == ("elbow",)
    assert broken.reason.code == "branch-ends"
    assert "the branch ends here (elbow; joints" in broken.reason.text()
    assert broken.verdict == UNREACHABLE
    swinging = breaks.of_branch(SINGULAR, 0, 0.0, 0.0, np.array([0.1, 0.9, -0.8, 0.3, 1e-6, 0.2]))
    assert swinging.kinds == ("wrist",)
    assert "singular here (wrist; joints 4, 6)" in swinging.reason.text()
    assert swinging.verdict == NOT_FOUND


def test_what_is_said_of_limits() -> None:
    combined = CombinedTravel({1: 1.0, 2: 1.0}, Travel(-1.0, 1.2))
    breaks = breaks_of(bounded(PLANAR, (1.0, 2.0), combined_travel=(combined,)))
    lower = breaks.of_limit(0, 0.5, 0.2, np.array([-1.0000001, 0.3]), 0)
    assert lower.reason.text() == "joint 1 would leave its travel at -1 rad"
    assert lower.joint == 1
    assert lower.reason.shortfall == pytest.approx(1e-7)
    assert lower.verdict == OUTSIDE_TRAVEL
    both = breaks.of_limit(0, 0.5, 0.2, np.array([0.7, 0.5000001]), 2)
    assert both.joint is None
    assert "combined travel 1" in both.reason.text()
    assert "at 1.2 rad" in both.reason.text()


def test_what_is_said_off_the_line() -> None:
    breaks = breaks_of(bounded(PLANAR, (1.0, 2.0)))
    posture = np.array([0.1, 0.3])
    by_angle = breaks.of_line(0, 0.5, 0.2, posture, (1e-6, 3e-4), (1e-5, 2e-4))
    assert by_angle.kind == OFF_LINE
    assert "keep the orientation of the line" in by_angle.reason.text()
    assert by_angle.reason.shortfall == pytest.approx(1e-4)
    by_place = breaks.of_line(0, 0.5, 0.2, posture, (2e-5, 1e-6), (1e-5, 2e-4))
    assert "the place" in by_place.reason.text()
    assert by_place.reason.unit == "m"
