"""Targets as one batch, reasons as sentences, answers without some of their postures."""

import numpy as np

from kinematics.findings import Finding
from kinematics.reach.targets import (
    CODES,
    CONE,
    NONE,
    NOT_FOUND,
    OUTSIDE_TRAVEL,
    REACHABLE,
    SEARCH,
    SPIN,
    VERDICTS,
    Checks,
    Family,
    Reason,
    Target,
    Targets,
)
from kinematics.tolerances import TARGET_ANGLE, TARGET_POSITION


class Silent:
    """Says nothing."""

    def reason(self, index: int) -> Reason | None:
        return None

    def families(self, index: int) -> tuple[Family, ...]:
        return ()

    def findings(self, index: int) -> tuple[Finding, ...]:
        return ()


def checks_of(verdict: list[int], counts: list[int]) -> Checks:
    count = sum(counts)
    rank = np.arange(count, dtype=float)
    return Checks(
        np.array(verdict),
        np.zeros(len(verdict), np.int64),
        np.concatenate([[0], np.cumsum(counts)]).astype(np.intp),
        np.array(counts),
        rank[:, None],
        rank,
        np.zeros(count, bool),
        rank,
        rank,
        np.zeros(count, np.int64),
        ("so",),
        Silent(),
    )


def test_targets_keep_what_each_says() -> None:
    pose = np.eye(4)
    pose[0, 3] = 0.5
    targets = Targets.of([Target(np.eye(4)), Target(pose, CONE, 0.3, 1e-3, 2e-3)])
    assert len(targets) == 2
    assert targets.freedom.tolist() == [NONE, CONE]
    assert targets.cone.tolist() == [0.0, 0.3]
    assert targets.position_tolerance.tolist() == [TARGET_POSITION, 1e-3]
    assert targets.angle_tolerance.tolist() == [TARGET_ANGLE, 2e-3]
    assert targets.tool_in_base[1, 0, 3] == 0.5
    assert targets.only(np.array([1])).freedom.tolist() == [CONE]
    assert len(Targets.of([])) == 0


def test_a_tolerance_by_default_is_a_hundredth() -> None:
    target = Target(np.eye(4), SPIN)
    np.testing.assert_allclose(target.position_tolerance, 0.01e-3, rtol=1e-15)
    np.testing.assert_allclose(target.angle_tolerance, np.radians(0.01), rtol=1e-15)


def test_verdicts_have_the_codes_of_the_wire() -> None:
    codes = dict(zip(VERDICTS, CODES, strict=True))
    assert codes == {"reachable": 0, "outside-travel": 201, "unreachable": 200, "not-found": 202}


def test_a_reason_is_said_with_its_numbers() -> None:
    say = "{measure} away, {threshold} is reached: {shortfall} too far"
    reason = Reason("beyond-the-links", say, "links", 0.1, "m", 0.9, 0.8)
    assert reason.text() == "0.9 m away, 0.8 m is reached: 0.1 m too far"


def test_postures_go_with_the_verdict() -> None:
    checks = checks_of([REACHABLE, OUTSIDE_TRAVEL, REACHABLE], [2, 3, 1])
    verdict = np.array([REACHABLE, NOT_FOUND, REACHABLE])
    fewer = checks.with_verdicts(verdict, np.array([0, SEARCH, 0]), Silent())
    assert fewer.offsets.tolist() == [0, 2, 2, 3]
    assert fewer.joint_values.ravel().tolist() == [0.0, 1.0, 5.0]
    assert fewer.found.tolist() == [2, 0, 1]
    assert fewer.solutions_of(2) == slice(2, 3)
    assert len(fewer) == 3
