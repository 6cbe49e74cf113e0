"""Arms with a joint to spare: witnesses for targets that postures were at, and the best of them."""

from dataclasses import replace

import numpy as np
import pytest

from kinematics.chain import tool_in_base
from kinematics.errors import KinematicsError
from kinematics.inverse.drive import drive_of
from kinematics.inverse.found import Found
from kinematics.inverse.redundant import Redundant, redundant_of
from kinematics.table import Coupling, Travel
from kinematics.travel_limits import travel_margin
from tests.kinematics.example_arms import (
    AT_FLANGE,
    NINE,
    SEVEN,
    SIX,
    SIX_ON_A_TRACK,
    arm_of,
    revolute,
)
from tests.kinematics.inverse.redundant_arms import ARMS
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import postures_within_travel


def made(name: str, random: np.random.Generator) -> tuple[Redundant, np.ndarray]:
    arm, tool = ARMS[name](random)
    redundant = redundant_of(arm, tool)
    assert redundant is not None
    return redundant, tool


def best_margins(redundant: Redundant, found: Found, count: int) -> np.ndarray:
    """Return the best margin of the postures of each target, (count,)."""
    postures = drive_of(redundant.arm).postures(found.motions)
    best = np.full(count, -np.inf)
    np.maximum.at(best, found.target[postures.source], postures.margin)
    return best


@pytest.mark.parametrize("name", ARMS)
def test_targets_that_postures_are_at_are_met_with_about_as_much_travel_left(name: str) -> None:
    random = fresh()
    redundant, tool = made(name, random)
    postures = postures_within_travel(random, redundant.arm, 60)
    targets = tool_in_base(redundant.arm, postures, tool)
    found = redundant.solve(targets)
    length = redundant.joint.locked.screws.length
    assert found.position_error.max() <= 1e-9 * length
    assert found.angle_error.max() <= 1e-9
    best = best_margins(redundant, found, 60)
    assert (best >= 0.0).all()
    # Stretches narrower than a step may have been passed over, few of them.
    short = travel_margin(redundant.arm, postures) - best
    assert np.mean(short > 1e-6) <= 0.1


def test_the_best_posture_is_as_good_as_any_of_a_fine_scan() -> None:
    """Fifty times finer than the steps, but for stretches so narrow that the steps missed them."""
    random = fresh()
    redundant, tool = made("shoulder and wrist", random)
    postures = postures_within_travel(random, redundant.arm, 12)
    targets = tool_in_base(redundant.arm, postures, tool)
    best = best_margins(redundant, redundant.solve(targets), 12)
    joint, short = redundant.joint, []
    fine = np.linspace(*joint.values[[0, -1]], 50 * len(joint.values))[:, None]
    for index, target in enumerate(targets):
        carried = joint.locked.targets(np.broadcast_to(target, (len(fine), 4, 4)), fine)
        inner = joint.locked.solve(carried)
        motions = joint.locked.whole(inner.motions, fine[inner.target])
        short.append(joint.drive.postures(motions).margin.max() - best[index])
    assert min(short) >= -2e-3
    assert np.mean(np.array(short) <= 1e-3) >= 0.7


def test_near_joint_values_the_nearest_posture_comes() -> None:
    """The posture a target was made from is on it, within half a step of a held value."""
    random = fresh()
    redundant, tool = made("on a track", random)
    drive, off = drive_of(redundant.arm), []
    postures = postures_within_travel(random, redundant.arm, 20)
    targets = tool_in_base(redundant.arm, postures, tool)
    for posture, target in zip(postures, targets, strict=True):
        found = redundant.solve(target[None], posture)
        values = drive.postures(found.motions, posture).joint_values
        off.append((np.abs(values - posture) / drive.spans).max(axis=1).min())
    assert np.median(off) < 5e-3
    best = redundant.solve(targets)
    values = drive.postures(best.motions).joint_values
    of = best.target[drive.postures(best.motions).source]
    far = [
        (np.abs(values[of == i] - postures[i]) / drive.spans).max(axis=1).min() for i in range(20)
    ]
    assert np.median(off) < 0.2 * np.median(far)


def test_solutions_of_a_target_are_different_postures() -> None:
    random = fresh()
    redundant, tool = made("on a track", random)
    targets = tool_in_base(redundant.arm, postures_within_travel(random, redundant.arm, 10), tool)
    found = redundant.solve(targets)
    for index in range(10):
        mine = found.motions[found.target == index]
        apart = np.abs(mine[:, None] - mine).max(axis=2) + 9.0 * np.eye(len(mine))
        assert apart.min() > 1e-6


def test_what_only_postures_beyond_travel_reach_is_told_with_one_of_them() -> None:
    random = fresh()
    arm, tool = ARMS["shoulder and wrist"](random)
    rows = list(arm.table.rows)
    rows[3] = replace(rows[3], travel=Travel(-0.2, 0.2))
    redundant = redundant_of(arm_of(*rows), tool)
    assert redundant is not None
    posture = np.array([[0.3, 0.4, 0.2, 1.5, 0.1, 0.5, 0.2]])
    found = redundant.solve(tool_in_base(redundant.arm, posture, tool))
    margins = drive_of(redundant.arm).postures(found.motions).margin
    assert len(margins) == 1
    # The elbow alone is bent as the distance of shoulder and wrist asks, whatever is held.
    np.testing.assert_allclose(margins, -(1.5 - 0.2) / 0.4, atol=1e-6)


def test_nothing_is_found_beyond_the_links_and_the_nearest_is_told() -> None:
    redundant, _ = made("turntable under six", fresh())
    target = np.eye(4)[None]
    target[0, 0, 3] = 9.0
    found = redundant.solve(target)
    assert not len(found.motions)
    assert found.open.all()
    assert redundant.nearest(target).shape == (1, 7)


def test_arms_that_are_none_of_these_have_no_such_solver() -> None:
    bounded = [replace(row, travel=Travel(0.0, 1.0)) for row in NINE[:2]]
    passive = revolute(a=0.1, passive=True, couplings=(Coupling(2, 1.0),))
    for rows in (SIX, (*bounded, *SEVEN), (*SEVEN[:3], passive, *SEVEN[3:])):
        assert redundant_of(arm_of(*rows), AT_FLANGE) is None


def test_a_slide_without_travel_is_refused() -> None:
    with pytest.raises(KinematicsError, match="slides without a travel"):
        redundant_of(arm_of(*SIX_ON_A_TRACK), AT_FLANGE)


def test_what_is_held_is_said() -> None:
    redundant, _ = made("on a track", fresh())
    assert redundant.geometry.say.startswith("joint 1 held at 121 values, for each: ")
    assert redundant.geometry.say.endswith("meet in a point: a spherical wrist")
