"""What is proved and what is not, shown with a made-up solver that leaves targets open."""

from dataclasses import dataclass, field, replace

import numpy as np
import pytest

from kinematics.arm import CombinedTravel
from kinematics.chain import tool_in_base
from kinematics.inverse.found import POSITION as PLACE
from kinematics.inverse.found import Found, none_found
from kinematics.inverse.measured import POSE, POSITION
from kinematics.inverse.solve import Method
from kinematics.reach import last_proof
from kinematics.reach.answers import Answerer
from kinematics.reach.targets import (
    BOUND,
    BRANCH_AND_BOUND,
    CLOSED_FORM,
    ELIMINATION,
    NOT_FOUND,
    ORIENTATION,
    OUTSIDE_TRAVEL,
    REACHABLE,
    SEARCH,
    UNREACHABLE,
    WITNESS,
    Checks,
    Target,
    Targets,
)
from kinematics.reach.verdicts import Ranking
from kinematics.reach.ways import Asked
from kinematics.table import Travel
from kinematics.tolerances import TARGET_POSITION
from tests.kinematics.example_arms import AT_FLANGE, PLANAR, SIX, arm_of, revolute
from tests.kinematics.inverse.seeds import fresh


@dataclass(frozen=True)
class Made:
    """The geometry of a made-up solver."""

    say: str = "made up"


@dataclass
class Fake:
    """Finds what it is told to find, for every target alike."""

    motions: np.ndarray
    is_open: bool = False
    proof: str = "closed-form"
    geometry: Made = field(default_factory=Made)

    def solve(self, targets: np.ndarray) -> Found:
        m, k = len(targets), len(self.motions)
        return replace(
            none_found(m, self.motions.shape[1]),
            motions=np.tile(self.motions, (m, 1)),
            target=np.repeat(np.arange(m), k).astype(np.intp),
            position_error=np.zeros(m * k),
            angle_error=np.zeros(m * k),
            open=np.full(m, self.is_open),
            stage=np.full(m, 0 if k else PLACE),
            shortfall=np.full(m, 0.0 if k else 0.05),
        )

    def nearest(self, targets: np.ndarray) -> np.ndarray:
        return np.zeros((len(targets), self.motions.shape[1]))


ARM = arm_of(*(replace(row, travel=Travel(-1.0, 2.0)) for row in PLANAR))
NONE_AT_ALL = np.empty((0, 2))


def answered(fake: Fake, place: tuple[float, float] = (0.4, 0.3)) -> Checks:
    """Answer for a place of two links that turn from -1 to 2 rad."""
    answerer = Answerer(Ranking(ARM, AT_FLANGE), POSITION)
    idle = np.zeros(2, np.bool_)
    answerer.method = Method(ARM, AT_FLANGE, POSITION, fake, idle)
    pose = np.eye(4)
    pose[:2, 3] = place
    return answerer.answer(Targets.of([Target(pose, ORIENTATION)]), Asked())


def told(checks: Checks) -> tuple[int, int]:
    return int(checks.verdict[0]), int(checks.proof[0])


def test_a_posture_within_travel_is_a_witness() -> None:
    checks = answered(Fake(np.array([[0.5, 1.0], [-2.0, 1.0]])))
    assert told(checks) == (REACHABLE, WITNESS)
    assert checks.joint_values.tolist() == [[0.5, 1.0]]


def test_postures_beyond_travel_alone_prove_that_travel_is_in_the_way() -> None:
    checks = answered(Fake(np.array([[-2.0, 1.0], [-1.5, 1.0]])))
    assert told(checks) == (OUTSIDE_TRAVEL, CLOSED_FORM)
    assert checks.joint_values.tolist() == [[-1.5, 1.0], [-2.0, 1.0]]
    assert checks.found.tolist() == [2]


def test_nothing_found_is_a_proof_where_no_joint_was_free() -> None:
    checks = answered(Fake(NONE_AT_ALL))
    assert told(checks) == (UNREACHABLE, CLOSED_FORM)
    reason = checks.reason_of(0)
    assert reason is not None
    assert (reason.code, reason.unit, reason.shortfall) == ("position", "m", 0.05)


def test_beyond_the_links_is_proved_by_a_bound_even_if_a_joint_was_free() -> None:
    assert told(answered(Fake(NONE_AT_ALL, is_open=True), (0.8, 0.0))) == (UNREACHABLE, BOUND)


def test_where_a_joint_was_free_a_search_looks_once_more() -> None:
    """The solver overlooks what the search finds."""
    checks = answered(Fake(NONE_AT_ALL, is_open=True))
    assert told(checks) == (REACHABLE, WITNESS)
    shown = tool_in_base(ARM, checks.joint_values, AT_FLANGE)[:, :2, 3]
    np.testing.assert_allclose(shown, [[0.4, 0.3]], atol=1e-8)


WHATEVER = pytest.mark.parametrize(
    "motions", [NONE_AT_ALL, np.array([[-2.0, 1.0]])], ids=["none", "beyond"]
)
BEHIND = (-0.5, -0.2)
"""A place within the links of the arm, and beyond its travel."""


@WHATEVER
def test_a_no_where_a_joint_was_free_is_proved_by_boxes(motions: np.ndarray) -> None:
    """By the search it is known how the arm would get there, beyond its travel."""
    checks = answered(Fake(motions, is_open=True), BEHIND)
    assert told(checks) == (OUTSIDE_TRAVEL, BRANCH_AND_BOUND)
    assert len(checks.joint_values) >= 1
    reason = checks.reason_of(0)
    assert reason is not None
    assert reason.code == "outside-travel"


@WHATEVER
def test_a_no_is_not_proved_by_too_few_boxes(
    motions: np.ndarray, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(last_proof, "BOX_BUDGET", 0)
    checks = answered(Fake(motions, is_open=True), BEHIND)
    assert told(checks) == (NOT_FOUND, SEARCH)
    assert not len(checks.joint_values)
    assert checks.found.tolist() == [0]
    reason = checks.reason_of(0)
    assert reason is not None
    assert reason.code == "found-outside-travel"


@WHATEVER
def test_a_search_proves_nothing_but_boxes_do(motions: np.ndarray) -> None:
    checks = answered(Fake(motions, proof="search"), BEHIND)
    verdict = OUTSIDE_TRAVEL if len(motions) else UNREACHABLE
    assert told(checks) == (verdict, BRANCH_AND_BOUND)


def test_boxes_find_what_a_search_overlooks() -> None:
    checks = answered(Fake(NONE_AT_ALL, proof="search"))
    assert told(checks) == (REACHABLE, WITNESS)
    shown = tool_in_base(ARM, checks.joint_values, AT_FLANGE)[:, :2, 3]
    assert np.abs(shown - [[0.4, 0.3]]).max() < TARGET_POSITION


def test_a_search_is_spared_what_no_links_reach() -> None:
    class Careful(Fake):
        def solve(self, targets: np.ndarray) -> Found:
            assert not len(targets)
            return super().solve(targets)

    assert told(answered(Careful(NONE_AT_ALL, proof="search"), (0.8, 0.0))) == (UNREACHABLE, BOUND)


def test_beside_a_singular_solution_a_no_is_not_proved() -> None:
    """Wrist lined up: one point of a continuum, beyond the travel of joint 4."""
    arm = arm_of(*(replace(row, travel=Travel(-1.0, 1.0)) for row in SIX))
    answerer = Answerer(Ranking(arm, AT_FLANGE), POSE)
    posture = np.array([[0.3, 0.4, 0.5, 0.8, 0.0, 0.9]])
    pose = tool_in_base(arm, posture, AT_FLANGE)
    beyond = posture + np.array([[0.0, 0.0, 0.0, 0.7, 0.0, -0.7]])
    answerer.method = Method(arm, AT_FLANGE, POSE, Fake(beyond), np.zeros(6, np.bool_))
    checks = answerer.answer(Targets.of([Target(pose[0])]), Asked())
    assert told(checks) == (REACHABLE, WITNESS)
    (family,) = checks.families_of(0)
    assert family.free_joints == (4, 6)
    assert len(checks.joint_values) == 1


def test_scores_are_margins_within_travel_and_negative_beyond() -> None:
    answerer = Answerer(Ranking(ARM, AT_FLANGE), POSITION)
    places = tool_in_base(ARM, np.array([[0.5, 1.0], [-2.0, 1.0]]), AT_FLANGE)
    far = np.eye(4)
    far[0, 3] = 9.0
    targets = Targets.of([Target(pose, ORIENTATION) for pose in (*places, far)])
    scores = answerer.scores(targets, Asked())
    np.testing.assert_allclose(scores[0], answerer.answer(targets, Asked()).margin[0])
    assert scores[1] < 0.0
    assert scores[2] == -np.inf
    near = answerer.scores(targets, Asked(near=np.array([0.5, 1.0])))
    np.testing.assert_allclose(near[0], 1.0)


def test_an_arm_whose_wrist_nearly_meets_is_searched_for_what_is_missing() -> None:
    """Nothing is proved, and nothing it has been at is out of its reach."""
    random = fresh()
    rows = list(SIX)
    rows[4] = replace(rows[4], a=2e-4, d=1e-4)
    arm = arm_of(*(replace(row, travel=Travel(-2.0, 2.0)) for row in rows))
    answerer = Answerer(Ranking(arm, AT_FLANGE), POSE)
    postures = random.uniform(-2.0, 2.0, size=(100, 6))
    poses = tool_in_base(arm, postures, AT_FLANGE)
    beyond = poses.copy()
    beyond[:, :3, :3] = beyond[:, :3, :3] @ np.diag([1.0, -1.0, -1.0])
    checks = answerer.answer(Targets.of([Target(pose) for pose in (*poses, *beyond)]), Asked())
    assert (checks.verdict[:100] == REACHABLE).sum() >= 98
    assert set(checks.proof.tolist()) <= {WITNESS, SEARCH, ELIMINATION, BRANCH_AND_BOUND, BOUND}


def test_whole_turns_not_looked_at_leave_a_no_to_boxes(monkeypatch: pytest.MonkeyPatch) -> None:
    """Two joints of 300 turns whose sum has a narrow travel, far from the middle."""
    wide = Travel(-1000.0, 1000.0)
    arm = arm_of(
        revolute(a=0.42, travel=wide),
        revolute(a=0.31, travel=wide),
        combined_travel=(CombinedTravel({1: 1.0, 2: 1.0}, Travel(1500.0, 1500.1)),),
    )
    pose = np.eye(4)
    pose[:2, 3] = 0.4, 0.3
    answerer = Answerer(Ranking(arm, AT_FLANGE), POSITION)
    targets = Targets.of([Target(pose, ORIENTATION)])
    assert told(answerer.answer(targets, Asked())) == (OUTSIDE_TRAVEL, BRANCH_AND_BOUND)
    monkeypatch.setattr(last_proof, "BOX_BUDGET", 0)
    assert told(answerer.answer(targets, Asked()))[0] != OUTSIDE_TRAVEL
