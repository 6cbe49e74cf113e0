"""Rows of an orientation: one array where all is plain, else each row for itself."""

import numpy as np
import pytest

from service.wire.orientation_rows import read_orientation_rows

EYE = [[1, 0, 0], [0, 1.0, 0], [0, 0, 1]]


def test_plain_rows() -> None:
    values, unreadable = read_orientation_rows([[1, 2.5, -3], [0, 0, float("nan")]], "zyx-fixed")
    assert unreadable == {}
    assert np.array_equal(values, [[1, 2.5, -3], [0, 0, np.nan]], equal_nan=True)
    matrices, unreadable = read_orientation_rows([EYE, EYE], "matrix")
    assert unreadable == {}
    assert np.array_equal(matrices, [np.eye(3).ravel()] * 2)


@pytest.mark.parametrize("form", ["zyx-fixed", "quaternion-wxyz", "matrix"])
def test_no_rows(form: str) -> None:
    values, unreadable = read_orientation_rows([], form)
    assert (len(values), unreadable) == (0, {})


@pytest.mark.parametrize(
    ("form", "row", "where"),
    [
        ("zyx-fixed", [0, 0], ("values", 1)),
        ("zyx-fixed", [0, 0, 0, 0], ("values", 1)),
        ("zyx-fixed", [0, "0", 0], ("values", 1, 1)),
        ("zyx-fixed", [0, 0, None], ("values", 1, 2)),
        ("zyx-fixed", [True, 0, 0], ("values", 1, 0)),
        ("zyx-fixed", [0, [0], 0], ("values", 1)),
        ("zyx-fixed", [[0, 0, 0]], ("values", 1)),
        ("zyx-fixed", "0,0,0", ("values", 1)),
        ("zyx-fixed", None, ("values", 1)),
        ("zyx-fixed", {}, ("values", 1)),
        ("zyx-fixed", [10**400, 0, 0], ("values", 1, 0)),
        ("matrix", [1, 0, 0, 0, 1, 0, 0, 0, 1], ("values", 1)),
        ("matrix", EYE[:2], ("values", 1)),
        ("matrix", [*EYE[:2], [0, 0, "1"]], ("values", 1, 2, 2)),
    ],
)
def test_one_bad_row_spoils_no_other(form: str, row: object, where: tuple[str | int, ...]) -> None:
    good = EYE if form == "matrix" else [1, 2, 3]
    values, unreadable = read_orientation_rows([good, row, good], form)
    assert list(unreadable) == [1]
    assert unreadable[1].where == where
    assert unreadable[1].way_out
    assert np.isnan(values[1]).all()
    assert np.array_equal(values[0], values[2])
    assert np.array_equal(values[0], np.ravel(good))
