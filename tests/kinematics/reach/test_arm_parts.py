"""Which parts of an arm can stand on one side or the other, by class (words: test_branches.py)."""

import numpy as np
import pytest

from kinematics.inverse.screws import screws_of
from kinematics.reach.arm_parts import meeting_point, parts_of
from kinematics.table import Row
from tests.kinematics.example_arms import (
    AT_FLANGE,
    FIVE,
    PLANAR,
    SELECTIVE,
    SEVEN,
    SHOULDER_AND_ELBOW,
    SIX,
    SIX_ON_A_TRACK,
    arm_of,
    random_arm,
)
from tests.kinematics.inverse.seeds import fresh

UP = np.array([0.0, 0.0, 1.0])
FIRST_WORDS: dict[str, tuple[tuple[Row, ...], list[str]]] = {
    "six": (SIX, ["wrist centre ahead of axis 1", "elbow above", "wrist not turned over"]),
    "five": (FIVE, ["wrist ahead of axis 1", "elbow above"]),
    "three": (SHOULDER_AND_ELBOW, ["tool ahead of axis 1", "elbow above"]),
    "four axes": (SELECTIVE, ["elbow to the left, seen from above"]),
    "two links": (PLANAR, ["elbow to the left, seen from above"]),
    "on a track": (
        SIX_ON_A_TRACK,
        ["wrist centre ahead of axis 2", "elbow out along axis 2", "wrist not turned over"],
    ),
    "seven": (SEVEN, ["wrist centre ahead of axis 1", "elbow above", "wrist not turned over"]),
}


@pytest.mark.parametrize("name", FIRST_WORDS)
def test_parts_of_an_arm(name: str) -> None:
    rows, words = FIRST_WORDS[name]
    parts = parts_of(screws_of(arm_of(*rows), AT_FLANGE), UP)
    assert [first for first, _ in parts.words] == words
    assert len(parts.features) == len(parts.by_posture) == len(words)


def test_places_are_sorted_for_the_kernel_and_features_follow() -> None:
    parts = parts_of(screws_of(arm_of(*SIX), AT_FLANGE), UP)
    places, features = parts.for_kernel()
    assert (np.diff(places[:, 4]) >= 0).all()
    for sorted_one, given in zip(features, parts.features, strict=True):
        assert sorted_one[0] == given[0]
        for now, before in zip(sorted_one[1:], given[1:], strict=True):
            np.testing.assert_array_equal(places[now], parts.places[before])


def test_where_the_last_axes_meet() -> None:
    screws = screws_of(arm_of(*SIX), AT_FLANGE)
    centre = meeting_point(screws, 3)
    assert centre is not None
    np.testing.assert_allclose(centre, screws.point[4], atol=1e-12)
    assert meeting_point(screws_of(arm_of(*SIX[:5]), AT_FLANGE), 3) is None
    assert (
        meeting_point(screws_of(random_arm(fresh(), 6, prismatic_share=0.0), AT_FLANGE), 3) is None
    )


def test_any_arm_has_parts_or_none() -> None:
    random = fresh()
    for joints in range(1, 9):
        for _ in range(5):
            arm = random_arm(random, joints)
            parts = parts_of(screws_of(arm, AT_FLANGE), UP)
            places, _ = parts.for_kernel()
            assert np.isfinite(places).all()
