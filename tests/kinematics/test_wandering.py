"""Arms that wander stay within travel, below their speeds and smooth, and do it the same again."""

import numpy as np
import pytest

from kinematics.arm import Arm, CombinedTravel
from kinematics.errors import KinematicsError
from kinematics.motion_profiles import RAMP_S, top_speeds
from kinematics.table import Coupling, Travel
from kinematics.travel_limits import travel_margin, working_margin
from kinematics.wandering import OFF_THE_ENDS, PAUSE_S, SHARE_OF_TOP_SPEED, Wandering
from tests.kinematics.example_arms import arm_of, prismatic, revolute

WIDE = {"travel": Travel(-2.0, 2.5), "top_speed": 3.0}
LINKED = revolute(passive=True, couplings=(Coupling(2, 1.0),), travel=Travel(-0.6, 0.6))
ARMS = {
    "free": arm_of(revolute(), revolute()),
    "bounded": arm_of(revolute(**WIDE), prismatic(travel=Travel(0.1, 0.7), top_speed=1.5)),
    "working": arm_of(revolute(**WIDE, working_travel=Travel(-1.0, 1.0)), revolute(**WIDE)),
    "linked": arm_of(revolute(**WIDE), revolute(**WIDE), LINKED),
    "combined": arm_of(
        *(revolute(**WIDE),) * 3,
        combined_travel=(CombinedTravel({1: 1.0, 2: -1.0}, Travel(-0.4, 0.3)),),
    ),
    "slide bounded by a sum": arm_of(
        prismatic(travel=Travel(0.0, 1.0)),
        prismatic(),
        combined_travel=(CombinedTravel({1: 1.0, 2: 1.0}, Travel(0.0, 2.0)),),
    ),
}
EVERY_S = 0.01


def motion(arm: Arm, seed: int = 1, seconds: float = 60.0) -> np.ndarray:
    wandering = Wandering(arm, seed=seed)
    return np.array([wandering.at(EVERY_S * step) for step in range(round(seconds / EVERY_S))])


@pytest.mark.parametrize("name", ARMS)
def test_it_stays_within_all_limits_and_speeds_and_moves_smoothly(name: str) -> None:
    arm = ARMS[name]
    postures = motion(arm)
    assert (travel_margin(arm, postures) > 0.0).all()
    assert (working_margin(arm, postures) > 0.0).all()
    speeds = SHARE_OF_TOP_SPEED * top_speeds(arm)
    rates = np.diff(postures, axis=0) / EVERY_S
    assert (abs(rates) <= speeds * (1.0 + 1e-9)).all()
    growth = np.diff(rates, axis=0) / EVERY_S
    assert (abs(growth) <= speeds / RAMP_S * 1.01).all()
    # It does move, with every joint, and rests now and then.
    assert (np.ptp(postures, axis=0) > 0.1).all()
    assert 0.03 < (abs(rates).max(axis=1) == 0.0).mean() < 0.7


def test_the_same_seed_gives_the_same_motion_however_it_is_asked() -> None:
    arm = ARMS["combined"]
    assert (motion(arm, 5, 20.0) == motion(arm, 5, 20.0)).all()
    assert not (motion(arm, 5, 20.0) == motion(arm, 6, 20.0)).all()
    seldom = Wandering(arm, seed=5)
    assert (seldom.at(19.0) == motion(arm, 5, 20.0)[1900]).all()


def test_it_begins_where_it_is_told_to() -> None:
    start = np.array([0.3, 0.2, 0.1])
    wandering = Wandering(ARMS["combined"], seed=1, start=start)
    assert (wandering.at(0.0) == start).all()
    assert abs(wandering.at(0.001) - start).max() < 1e-3


def test_it_keeps_off_the_ends_of_travel() -> None:
    postures = motion(ARMS["bounded"], seconds=300.0)
    assert (travel_margin(ARMS["bounded"], postures) >= OFF_THE_ENDS - 1e-12).all()


def test_pauses_are_as_long_as_they_may_be() -> None:
    rests = abs(np.diff(motion(ARMS["free"], seconds=200.0), axis=0)).max(axis=1) == 0.0
    edges = np.flatnonzero(np.diff(np.concatenate([[0], rests.astype(int), [0]])))
    lengths = EVERY_S * (edges[1::2] - edges[::2])
    assert len(lengths) > 10
    assert lengths[:-1].min() >= PAUSE_S[0] - 2 * EVERY_S
    assert lengths.max() <= PAUSE_S[1] + 2 * EVERY_S


def test_where_limits_leave_a_thin_strip_it_goes_along_it() -> None:
    """A strip of a ten-thousandth of the box, which draws by chance hardly ever meet."""
    rows = (revolute(**WIDE),) * 2
    strip = (CombinedTravel({1: 1.0, 2: -1.0}, Travel(-1e-4, 1e-4)),)
    arm = arm_of(*rows, combined_travel=strip)
    postures = motion(arm, seconds=300.0)
    assert (travel_margin(arm, postures) >= 0.0).all()
    assert len(np.unique(postures.round(9), axis=0)) > 100


@pytest.mark.parametrize(
    ("arm", "say"),
    [
        (arm_of(), "no joints"),
        (arm_of(prismatic()), "slides without end"),
        (
            arm_of(
                revolute(travel=Travel(0.0, 1.0)),
                combined_travel=(CombinedTravel({1: 1.0}, Travel(2.0, 3.0)),),
            ),
            "exclude each other",
        ),
    ],
    ids=["no joints", "endless slide", "nothing left"],
)
def test_an_arm_that_has_nowhere_to_go_is_refused(arm: Arm, say: str) -> None:
    with pytest.raises(KinematicsError, match=say):
        Wandering(arm, seed=1)
