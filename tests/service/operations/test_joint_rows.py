"""Joint vectors of a request: all at once where nothing is wrong, else each by itself."""

import math
from typing import Any

import numpy as np
import pytest

from kinematics.arm import Arm
from kinematics.errors import KinematicsError, OutOfRange
from kinematics.table import Convention, JointKind, Row, Table
from service.convert import UNITS
from service.errors import ServiceError, TooLarge, UnusableValue
from service.operations import joint_rows
from service.operations.joint_rows import (
    MOST_VECTORS,
    MOST_VECTORS_WITH_SINGULARITY,
    JointRows,
    read_joint_rows,
    read_vectors,
)

TURN = Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0)
SLIDE = Row(JointKind.PRISMATIC, 0.0, 0.0, 0.0, 0.0)
ARM = Arm("turn-and-slide", Table(Convention.STANDARD, (TURN, SLIDE)))
EMPTY = Arm("empty", Table(Convention.STANDARD, ()))
MM = UNITS["mm-deg"]


def read(rows: list[Any], arm: Arm = ARM) -> JointRows:
    return read_joint_rows(arm, MM, rows, singularity=True)


def test_good_vectors_in_si() -> None:
    found = read([[90, 250], [-180.0, 0]])
    np.testing.assert_array_equal(found.values, [[math.pi / 2, 0.25], [-math.pi, 0.0]])
    np.testing.assert_array_equal(found.places, [0, 1])
    assert (found.refused, found.count) == ({}, 2)


def test_none_and_those_of_an_arm_without_joints() -> None:
    assert read([]).values.shape == (0, 2)
    assert read([[], []], EMPTY).values.shape == (2, 0)
    assert read([[], []], EMPTY).count == 2


def test_the_long_way_reads_as_the_short_way(monkeypatch: pytest.MonkeyPatch) -> None:
    rows = [[90, 250], [-180.0, 0.1], [1e-300, -5]]
    short = read(rows)
    monkeypatch.setattr(joint_rows, "_all_at_once", lambda *_: None)
    long = read(rows)
    np.testing.assert_array_equal(long.values, short.values)
    np.testing.assert_array_equal(long.places, short.places)


@pytest.mark.parametrize(
    ("row", "code", "where", "value"),
    [
        ([1], "wrong-joint-count", ("joints", 1), 1),
        ([], "wrong-joint-count", ("joints", 1), 0),
        ([1, 2, 3], "wrong-joint-count", ("joints", 1), 3),
        ([1, "2"], "unusable-value", ("joints", 1, 1), "2"),
        ([True, 2], "unusable-value", ("joints", 1, 0), True),
        ([None, 2], "unusable-value", ("joints", 1, 0), None),
        ([[1], 2], "unusable-value", ("joints", 1, 0), [1]),
        ("12", "unusable-value", ("joints", 1), "12"),
        ({"q1": 1}, "unusable-value", ("joints", 1), {"q1": 1}),
        ([1, math.nan], "not-finite", ("joints", 1, 1), math.nan),
        ([-math.inf, 1], "not-finite", ("joints", 1, 0), -math.inf),
        ([10**400, 1], "not-finite", ("joints", 1, 0), 10**400),
        ([1, 1e308], "out-of-range", ("joints", 1, 1), 1e308),
        ([1e12, 1], "out-of-range", ("joints", 1, 0), 1e12),
    ],
)
def test_one_bad_vector_among_good_ones(
    row: Any, code: str, where: tuple[Any, ...], value: object
) -> None:
    found = read([[0, 1], row, [90, 2]])
    assert list(found.refused) == [1]
    detail = found.refused[1]
    assert (detail.code, detail.where) == (code, where)
    # As it was given, in the user's units.
    assert repr(detail.value) == repr(value)
    assert detail.say
    assert detail.way_out
    np.testing.assert_array_equal(found.places, [0, 2])
    np.testing.assert_array_equal(found.values, [[0, 0.001], [math.pi / 2, 0.002]])
    assert found.count == 3


def test_when_none_can_be_used_all_are_told() -> None:
    with pytest.raises(ServiceError) as caught:
        read([[1], [1, math.nan], "x"])
    told = [(detail.code, detail.where) for detail in caught.value.details()]
    assert told == [
        ("wrong-joint-count", ("joints", 0)),
        ("not-finite", ("joints", 1, 1)),
        ("unusable-value", ("joints", 2)),
    ]
    assert caught.value.status == 422


def test_too_many() -> None:
    assert (MOST_VECTORS, MOST_VECTORS_WITH_SINGULARITY) == (200_000, 20_000)
    row = [0.0, 0.0]
    assert read([row] * 20_000).count == 20_000
    with pytest.raises(TooLarge) as caught:
        read([row] * 20_001)
    assert (caught.value.where, caught.value.value, caught.value.status) == (
        ("joints",),
        20_001,
        422,
    )
    assert read_joint_rows(ARM, MM, [row] * 20_001, singularity=False).count == 20_001
    with pytest.raises(TooLarge):
        read_joint_rows(ARM, MM, [row] * 200_001, singularity=False)


def twice(values: np.ndarray) -> np.ndarray:
    return 2.0 * values


def test_vectors_carried_along_keep_to_the_usable_ones() -> None:
    rows = read([[0, 1], ["x", 1], [90, 2]])
    found = read_vectors("loads", [[1, 2], [3, 4], [5, 6]], 2, rows, twice)
    np.testing.assert_array_equal(found, [[2, 4], [10, 12]])
    assert read_vectors("loads", None, 2, rows, twice) is None


@pytest.mark.parametrize(
    ("given", "kind", "where", "value"),
    [
        ([[1, 2]], UnusableValue, ("loads",), 1),
        ([[1, 2], [1]], KinematicsError, ("loads", 1), [1]),
        ([[1, 2], 5], KinematicsError, ("loads", 1), 5),
        ([[1, "2"], [1, 2]], KinematicsError, ("loads", 0, 1), "2"),
        ([[1, 2], [math.inf, 2]], KinematicsError, ("loads", 1, 0), math.inf),
        ([[1, 2], [1, 6e8]], OutOfRange, ("loads", 1, 1), 1.2e9),
    ],
)
def test_vectors_carried_along_that_cannot_be_used(
    given: list[Any], kind: type[Exception], where: tuple[Any, ...], value: object
) -> None:
    with pytest.raises(kind) as caught:
        read_vectors("loads", given, 2, read([[0, 1], [90, 2]]), twice)
    assert (caught.value.where, caught.value.value) == (where, value)  # type: ignore[attr-defined]


def test_pieces_are_counted_from_their_own_start() -> None:
    rows = read([[0, 1], ["x", 1], [90, 2], [0, math.nan], [45, 3]])
    together: list[list[float]] = []
    for begin, end in [(0, 2), (2, 4), (4, 5)]:
        piece = rows.piece(begin, end)
        assert piece.count == end - begin
        assert {begin + index for index in piece.refused} == {1, 3} & set(range(begin, end))
        assert (piece.places < piece.count).all()
        together += piece.values.tolist()
    assert together == rows.values.tolist()
    good = read([[0, 1], [90, 2], [45, 3]])
    np.testing.assert_array_equal(good.piece(1, 3).values, good.values[1:])
