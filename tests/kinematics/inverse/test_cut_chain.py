"""A cut ring closes for the joint values that bring the arm to its target."""

import numpy as np
import pytest

from kinematics.inverse.cut_chain import best_cut, open_chain
from kinematics.inverse.descent_arms import lines_of
from kinematics.inverse.landing import land_all
from kinematics.inverse.screws import screws_of
from kinematics.transforms import inverse
from tests.kinematics.example_arms import random_arm, random_joint_values, random_pose
from tests.kinematics.inverse.seeds import fresh


def _ends(chain: object, q: np.ndarray) -> np.ndarray:
    lines, ends = chain.lines, np.empty((len(q), 4, 4))  # type: ignore[attr-defined]
    motions = np.ascontiguousarray(q @ lines.drive.T)
    land_all(lines.axis, lines.point, lines.prismatic, lines.tool_at_zero, motions, ends)
    return ends


@pytest.mark.parametrize("coupled", [False, True])
def test_a_ring_closes_where_the_arm_meets_its_target(coupled: bool) -> None:
    random = fresh()
    for _ in range(20):
        arm = random_arm(random, int(random.integers(2, 8)), coupled=coupled)
        screws = screws_of(arm, random_pose(random))
        lines, q = lines_of(screws, arm), random_joint_values(random, arm, 2)
        ways = np.abs(lines.drive) @ np.abs(q).max(axis=0)
        arms = open_chain(lines, np.eye(4), ways)
        meets, other = _ends(arms, q)
        ring = best_cut(screws, lines, meets, ways)
        at_target, elsewhere = _ends(ring, q)
        np.testing.assert_allclose(at_target, ring.goal, atol=1e-10)
        # The gap at the cut is that at the tool, seen from another place: the same turn.
        off = np.trace(other[:3, :3] @ meets[:3, :3].T)
        np.testing.assert_allclose(np.trace((elsewhere @ inverse(ring.goal))[:3, :3]), off)


@pytest.mark.parametrize("cut", [False, True])
def test_no_posture_brings_the_end_further_from_an_axis_than_said(cut: bool) -> None:
    random = fresh()
    for _ in range(20):
        arm = random_arm(random, int(random.integers(2, 8)))
        screws = screws_of(arm, random_pose(random))
        lines, q = lines_of(screws, arm), random_joint_values(random, arm, 200)
        ways = np.abs(lines.drive) @ np.abs(q).max(axis=0)
        goal = _ends(open_chain(lines, np.eye(4), ways), q[:1])[0]
        chain = best_cut(screws, lines, goal, ways) if cut else open_chain(lines, goal, ways)
        for row in np.flatnonzero(~chain.lines.prismatic):
            later = q @ chain.lines.drive.T
            later[:, : row + 1] = 0.0  # what comes before carries axis and end alike
            ends, of = np.empty((len(q), 4, 4)), chain.lines
            land_all(of.axis, of.point, of.prismatic, of.tool_at_zero, later, ends)
            away = np.cross(ends[:, :3, 3] - of.point[row], of.axis[row])
            assert np.linalg.norm(away, axis=1).max() <= chain.furthest[row] + 1e-12
