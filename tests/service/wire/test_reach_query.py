"""A controller's question about one target: which numbers, what is free, what is refused."""

import pytest

from kinematics.reach.targets import CONE, FREEDOMS, NONE, ORIENTATION, SPIN
from service.errors import FormNotFlat, ServiceError
from service.wire.reach_query import (
    PARAMETERS,
    REACH_PARAMETERS,
    TABLE_PARAMETERS,
    TABLE_QUERY_PARAMETERS,
    ReachAsked,
    reach_asked,
)

PLACE = {"x": "914.5", "y": "-3.0E+02", "z": " 750"}
POSE = {**PLACE, "r1": "-74", "r2": "0", "r3": "90"}


def asked(**said: str) -> ReachAsked:
    return reach_asked("housing-loader", said)


def test_a_pose_and_a_position() -> None:
    pose = asked(**POSE)
    assert (pose.position, pose.angles) == ([914.5, -300.0, 750.0], [-74.0, 0.0, 90.0])
    assert (pose.freedom, pose.near, pose.single.form) == (NONE, None, "xyz-fixed")
    place = asked(**PLACE)
    assert (place.angles, place.freedom) == (None, ORIENTATION)
    assert asked(**PLACE, freedom="orientation").freedom == ORIENTATION


@pytest.mark.parametrize(
    ("said", "freedom", "cone"),
    [
        ({"freedom": "none"}, NONE, 0),
        ({"freedom": "spin"}, SPIN, 0),
        ({"freedom": "orientation"}, ORIENTATION, 0),
        ({"cone": "30"}, CONE, 30),
        ({"freedom": "cone", "cone": "12.5"}, CONE, 12.5),
    ],
)
def test_what_is_free(said: dict[str, str], freedom: int, cone: float) -> None:
    found = asked(**POSE, **said)
    assert (found.freedom, found.cone) == (freedom, cone)


def test_integers_are_divided_by_the_scale() -> None:
    found = asked(
        x="914500", y="-300000", z="750000", r1="-74000", r2="0", r3="90000", cone="30000",
        near="1000,-2000", scale="1000",
    )  # fmt: skip
    assert (found.position, found.angles) == ([914.5, -300.0, 750.0], [-74.0, 0.0, 90.0])
    assert found.cone == 30
    assert found.near is not None
    assert found.near.values == [1.0, -2.0]


def test_the_same_words_about_another_target_are_the_same_question() -> None:
    one = asked(**POSE, tool="1", frame="fixture-a", near="1,2")
    other = asked(**{**POSE, "x": "1"}, tool="1", frame="fixture-a", cone="3", near="3,4")
    assert one.single is other.single


@pytest.mark.parametrize(
    ("said", "code", "where"),
    [
        ({}, "missing-field", "x"),
        ({"x": "1", "y": "2"}, "missing-field", "z"),
        ({**PLACE, "r2": "3"}, "missing-field", "r1"),
        ({**PLACE, "r1": "3", "r2": "3"}, "missing-field", "r3"),
        ({**PLACE, "x": "nan"}, "not-finite", "x"),
        ({**PLACE, "x": "1,5"}, "unparseable", "x"),
        ({**POSE, "r3": ""}, "unparseable", "r3"),
        ({**PLACE, "x": "1.5", "y": "1", "z": "1", "scale": "10"}, "unparseable", "x"),
        ({**POSE, "freedom": "all"}, "unusable-value", "freedom"),
        ({**POSE, "freedom": "cone"}, "missing-field", "cone"),
        ({**POSE, "freedom": "spin", "cone": "30"}, "unusable-value", "cone"),
        ({**PLACE, "freedom": "none"}, "unusable-value", "freedom"),
        ({**PLACE, "freedom": "spin"}, "unusable-value", "freedom"),
        ({**PLACE, "cone": "30"}, "unusable-value", "cone"),
        ({**POSE, "near": "1,x"}, "unparseable", "near"),
        ({**POSE, "near": ""}, "unparseable", "near"),
        ({**POSE, "approach": "0"}, "unusable-value", "approach"),
        ({**POSE, "approach": "-5"}, "unusable-value", "approach"),
        ({**POSE, "approach": "x"}, "unparseable", "approach"),
        ({**POSE, "along": "0,0,1"}, "missing-field", "approach"),
        ({**POSE, "approach": "5", "along": "0,0"}, "unusable-value", "along"),
        ({**POSE, "approach": "5", "along": "0,0,0"}, "unusable-value", "along"),
        ({**POSE, "approach": "5", "along": "tool-x"}, "unusable-value", "along"),
    ],
)
def test_what_is_refused(said: dict[str, str], code: str, where: str) -> None:
    with pytest.raises(ServiceError) as caught:
        asked(**said)
    detail = caught.value.details()[0]
    assert (detail.code, detail.where, detail.location) == (code, (where,), "query")
    assert detail.way_out


def test_an_approach_is_along_tool_z_unless_said() -> None:
    assert asked(**POSE).approach is None
    usual = asked(**POSE, approach="50").approach
    assert usual is not None
    assert (usual.distance, usual.along) == (50, "tool-z")
    assert asked(**POSE, approach="50", along="tool-z").approach == usual
    whole = dict.fromkeys(POSE, "1000")
    down = asked(**whole, approach="500", along="0,0,-10", scale="10").approach
    assert down is not None
    assert (down.distance, down.along) == (50, [0, 0, -1])


@pytest.mark.parametrize("form", ["quaternion-wxyz", "rotation-vector", "matrix"])
def test_angles_are_those_of_a_triple(form: str) -> None:
    with pytest.raises(FormNotFlat):
        asked(**POSE, form=form)
    assert asked(**POSE, form="zyz-current").single.form == "zyz-current"


def test_what_is_documented_is_known() -> None:
    assert {each["name"] for each in REACH_PARAMETERS} == PARAMETERS
    assert {each["name"] for each in TABLE_QUERY_PARAMETERS} == TABLE_PARAMETERS
    (freedom,) = (each for each in REACH_PARAMETERS if each["name"] == "freedom")
    assert freedom["schema"]["enum"] == list(FREEDOMS)
