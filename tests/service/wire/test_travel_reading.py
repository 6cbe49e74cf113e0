"""Travels of a body: one that cannot be used fails no others, what refuses all, how many points."""

from typing import Any

import pytest

from kinematics.travel.tolerances import MOST_WAYS
from service.errors import ServiceError, TooLarge, UnknownField, UnusableValue
from service.wire.travel_reading import ReadTravels, read_travels
from service.wire.travel_request import MOST_POINTS, MOST_POINTS_TOLD, MOST_TRAVELS, Travel

TURN = {"form": "xyz-fixed", "values": [0, 0, 0]}
POSE = {"pose": {"position": [1, 2, 3], "orientation": TURN}}
LEGS: dict[str, Any] = {"start": {"joints": [0, 0]}, "legs": [{"end": POSE}]}
TO_TARGET: dict[str, Any] = {"target": POSE, "approach": {"distance": 5}}


def read(*travels: Any, points: int = 0) -> ReadTravels[Travel]:
    return read_travels(list(travels), points, lambda travel: travel)


def test_both_kinds_of_travel() -> None:
    found = read({"name": "a", **LEGS}, TO_TARGET, {"target": POSE, "retract": {"distance": 5}})
    assert (found.names, found.count, sorted(found.asked)) == (["a", None, None], 3, [0, 1, 2])
    first = found.asked[0]
    assert first.legs is not None
    assert (first.legs[0].move, first.legs[0].speed) == ("straight", None)
    approach = found.asked[1].approach
    assert approach is not None
    assert approach.along == "tool-z"


BAD: list[tuple[dict[str, Any], str, tuple[str | int, ...]]] = [
    ({}, "missing-field", ("start",)),
    ({"legs": LEGS["legs"]}, "missing-field", ("start",)),
    ({"start": LEGS["start"]}, "missing-field", ("legs",)),
    ({**LEGS, "legs": []}, "unusable-value", ("legs",)),
    ({**LEGS, "legs": LEGS["legs"] * 101}, "unusable-value", ("legs",)),
    ({**LEGS, "legs": [{"end": POSE, "move": "bent"}]}, "unusable-value", ("legs", 0, "move")),
    ({**LEGS, "legs": [{"end": POSE, "speed": 0}]}, "unusable-value", ("legs", 0, "speed")),
    ({**LEGS, "legs": [{"end": POSE, "speed": -1}]}, "unusable-value", ("legs", 0, "speed")),
    ({**LEGS, "legs": [{"end": POSE, "turn_speed": 0}]},
     "unusable-value", ("legs", 0, "turn_speed")),
    ({**LEGS, "legs": [{}]}, "missing-field", ("legs", 0, "end")),
    ({**LEGS, **TO_TARGET}, "unusable-value", ("start",)),
    ({"target": POSE}, "missing-field", ("approach",)),
    ({"approach": {"distance": 5}}, "missing-field", ("target",)),
    ({**TO_TARGET, "approach": {"distance": 0}}, "unusable-value", ("approach", "distance")),
    ({**TO_TARGET, "retract": {"distance": -1}}, "unusable-value", ("retract", "distance")),
    ({**TO_TARGET, "retract": {"distance": 1, "along": [1, 2]}},
     "unusable-value", ("retract", "along")),
    ({**LEGS, "tolerance": {"position": 0}}, "unusable-value", ("tolerance", "position")),
    ({**LEGS, "name": "n" * 201}, "unusable-value", ("name",)),
]  # fmt: skip


@pytest.mark.parametrize(("travel", "code", "where"), BAD)
def test_one_that_cannot_be_used(
    travel: dict[str, Any], code: str, where: tuple[str | int, ...]
) -> None:
    found = read(travel, LEGS)
    assert list(found.asked) == [1]
    detail = found.refused[0]
    assert (detail.code, detail.where) == (code, ("travels", 0, *where))
    assert detail.way_out
    with pytest.raises(ServiceError) as alone:
        read(travel)
    assert alone.value.status == 422
    assert alone.value.details()[0].code == code


@pytest.mark.parametrize("given", [None, 5, {}, "a", []])
def test_no_travels(given: Any) -> None:
    with pytest.raises(UnusableValue) as caught:
        read_travels(given, 0, lambda travel: travel)
    assert caught.value.where == ("travels",)


def test_what_refuses_all() -> None:
    with pytest.raises(UnusableValue, match="stands twice") as twice:
        read({"name": "a", **LEGS}, {"name": "a", **LEGS})
    assert twice.value.where == ("travels", 1, "name")
    with pytest.raises(UnknownField) as unknown:
        read(LEGS, {**LEGS, "seed": 1})
    assert unknown.value.details()[0].where == ("travels", 1, "seed")
    assert read(*[LEGS] * MOST_TRAVELS).count == MOST_TRAVELS
    with pytest.raises(TooLarge, match="more than 1000") as many:
        read(*[LEGS] * (MOST_TRAVELS + 1))
    assert many.value.status == 422


def test_points_are_counted_over_all_legs() -> None:
    most = MOST_POINTS_TOLD // MOST_POINTS
    assert read(*[LEGS] * most, points=MOST_POINTS).count == most
    with pytest.raises(TooLarge) as caught:
        read(*[LEGS] * (most + 1), points=MOST_POINTS)
    assert (caught.value.where, caught.value.value) == (("points",), MOST_POINTS)
    assert f"at most {MOST_POINTS_TOLD // (most + 1)} points" in caught.value.way_out


def test_every_way_counts_where_all_are_told() -> None:
    def told(travel: dict[str, Any], points: int) -> ReadTravels[Travel]:
        return read_travels([travel], points, lambda travel: travel, every_way=True)

    assert told(LEGS, MOST_POINTS).count == 1
    # An approach and a retract at most, of as many ways as are followed.
    most = MOST_POINTS_TOLD // (2 * MOST_WAYS)
    assert told(TO_TARGET, most).count == 1
    with pytest.raises(TooLarge) as caught:
        told(TO_TARGET, most + 1)
    assert '"best"' in caught.value.way_out
