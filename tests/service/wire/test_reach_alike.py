"""Targets said alike: read as arrays just as one by one, and left alone as soon as one differs."""

from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from kinematics.orientation_forms import FORMS, shape_of
from service.convert import UNITS
from service.errors import UnusableValue
from service.surveys.reach_pieces import given_rows, quickly_read, rows_of
from service.wire.reach_alike import PLACE, alike_targets, read_alike
from service.wire.reach_targets import read_targets

MM = UNITS["mm-deg"]
ORIENTATION = {"form": "xyz-fixed", "values": [10, 20, 30.5]}
POSE: dict[str, Any] = {"position": [100, 200, 300], "orientation": ORIENTATION}
MATRIX = [[0, -1, 0, 100], [1, 0, 0, 200], [0, 0, 1, 300], [0, 0, 0, 1]]
FIELDS = "tool_in_frame", "freedom", "cone", "position_tolerance", "angle_tolerance"


def in_form(form: str) -> dict[str, Any]:
    values: Any = np.zeros(shape_of(form)).tolist()
    if form == "matrix":
        values = [[0, -1, 0], [1, 0, 0], [0, 0, 1]]
    elif form.startswith("quaternion"):
        values = [1, 0, 0, 0]
    return {"pose": {"position": [1, 2.5, 3], "orientation": {"form": form, "values": values}}}


ALIKE: list[list[dict[str, Any]]] = [
    [{"position": [1, 2, 3]}, {"position": [4.5, 5, 6]}],
    [{"name": "a", "position": [1, 2, 3]}, {"position": [1, 2, 3]}],
    [{"pose": {"matrix": MATRIX}}, {"name": "", "pose": {"matrix": MATRIX}}],
    *([in_form(form), {"name": "lug", **in_form(form)}] for form in FORMS),
]


@pytest.mark.parametrize("rows", ALIKE, ids=range(len(ALIKE)))
def test_they_are_read_as_one_by_one(rows: list[dict[str, Any]]) -> None:
    alike = alike_targets(rows)
    assert alike is not None
    assert alike.rows() == rows
    found = read_alike(alike, MM)
    assert found is not None
    # A field nothing follows from makes a target one to be looked at by itself.
    odd = read_targets([{**row, "approach": None} for row in rows], MM)
    for field in FIELDS:
        np.testing.assert_allclose(getattr(found, field), getattr(odd, field), atol=1e-15)
    assert (list(found.names), list(found.forms)) == (list(odd.names), list(odd.forms))
    assert found.places.tolist() == odd.places.tolist()


@pytest.mark.parametrize("rows", ALIKE, ids=range(len(ALIKE)))
def test_a_piece_gives_them_back(rows: list[dict[str, Any]]) -> None:
    piece = given_rows(rows, MM)
    assert rows_of(piece) == rows
    found, expected = quickly_read(piece, MM), read_targets(rows, MM)
    assert found is not None
    for field in FIELDS:
        np.testing.assert_array_equal(getattr(found, field), getattr(expected, field))
    assert list(found.names) == list(expected.names)


@pytest.mark.parametrize(
    "odd",
    [
        {"position": [1, 2, 3], "freedom": "orientation"},
        {"position": [1, 2, 3], "name": None},
        {"position": [1, 2, 3], "name": 7},
        {"position": [1, 2, 3], "name": "x" * 201},
        {"position": [1, 2]},
        {"position": [1, 2, "3"]},
        {"position": [1, 2, True]},
        {"position": [1, 2, 10**400]},
        {"position": "abc"},
        {"pose": POSE},
        {},
        [],
        None,
        {"positions": [1, 2, 3]},
    ],
    ids=str,
)
def test_one_that_differs_leaves_all_to_be_read_one_by_one(odd: Any) -> None:
    assert alike_targets([{"position": [1, 2, 3]}, odd]) is None
    assert alike_targets([odd, {"position": [1, 2, 3]}]) is None


@pytest.mark.parametrize(
    "pose",
    [
        None,
        [],
        "matrix",
        {"position": [1, 2, 3]},
        {**POSE, "matrix": MATRIX},
        {**POSE, "orientation": {**ORIENTATION, "unit": "deg"}},
        {**POSE, "orientation": {**ORIENTATION, "form": "xzy-fixed"}},
        {**POSE, "orientation": {**ORIENTATION, "form": ["xyz-fixed"]}},
        {**POSE, "orientation": {**ORIENTATION, "form": "whole"}},
        {**POSE, "orientation": {"form": PLACE, "values": []}},
        {"matrix": MATRIX, "position": [1, 2, 3]},
        {"matrix": MATRIX[:3]},
    ],
    ids=str,
)
def test_so_does_a_pose_that_looks_otherwise(pose: Any) -> None:
    assert alike_targets([{"pose": POSE}, {"pose": pose}]) is None
    assert alike_targets([{"pose": pose}, {"pose": POSE}]) is None


@pytest.mark.parametrize("form", ["place", "whole"])
def test_words_of_our_own_are_no_forms(form: str) -> None:
    turned = {"pose": {"position": [1, 2, 3], "orientation": {"form": form, "values": MATRIX}}}
    read = read_targets([{"pose": POSE}, turned], MM)
    assert list(read.refused) == [1]
    read = read_targets([{"pose": POSE, "freedom": "spin"}, turned], MM)
    assert list(read.refused) == [1]


def test_what_must_be_mended_stays_as_it_came() -> None:
    doubled = {"form": "quaternion-wxyz", "values": [2, 0, 0, 0]}
    rows = [{"pose": {"position": [1, 2, 3], "orientation": doubled}}]
    alike = alike_targets(rows)
    assert alike is not None
    assert read_alike(alike, MM) is None
    assert given_rows(rows, MM).startswith(b"[")
    assert quickly_read(given_rows(rows, MM), MM) is None
    assert 0 in read_targets(rows, MM).repaired


def test_names_twice_are_refused() -> None:
    row = {"name": "lug-1", "position": [1, 2, 3]}
    with pytest.raises(UnusableValue) as refused:
        read_targets([row, {"position": [1, 2, 3]}, row], MM)
    assert refused.value.where == ("targets", 2, "name")


numbers = st.floats(-1e9, 1e9) | st.integers(-(10**9), 10**9)
places = st.lists(st.lists(numbers, min_size=3, max_size=3), min_size=1, max_size=5)


@given(places, st.data())
def test_numbers_and_names_come_back_whatever_they_are(
    given_places: list[list[float]], data: st.DataObject
) -> None:
    text = st.none() | st.text(st.characters(exclude_categories=["Cs"]), max_size=9)
    rows: list[dict[str, Any]] = []
    for place in given_places:
        name = data.draw(text)
        rows.append({"position": place} if name is None else {"name": name, "position": place})
    assert rows_of(given_rows(rows, MM)) == rows
