"""Part locations as tables: which columns, which lines are positions, who is told what is wrong."""

from typing import Any

import numpy as np
import pytest

from kinematics.reach.targets import CONE, NONE, ORIENTATION, SPIN
from service.convert import UNITS
from service.errors import ServiceError
from service.wire.reach_csv import read_part_locations
from service.wire.reach_gathered import ReadTargets

MM = UNITS["mm-deg"]


def read(text: str, form: str = "xyz-fixed") -> ReadTargets:
    return read_part_locations(text.encode(), form, MM)


def test_poses_in_any_order_of_columns() -> None:
    found = read(
        "x,y,z,r1,r2,r3,name\r\n100,200,300,0,0,90,lug-1\r\n+1.5E+02,0,007,0,0,0,lug-2\r\n"
    )
    assert found.names == ["lug-1", "lug-2"]
    expected = [[0, -1, 0, 0.1], [1, 0, 0, 0.2], [0, 0, 1, 0.3], [0, 0, 0, 1]]
    np.testing.assert_allclose(found.tool_in_frame[0], expected, atol=1e-15)
    np.testing.assert_allclose(found.tool_in_frame[1, :3, 3], [0.15, 0, 0.007])
    assert found.freedom.tolist() == [NONE, NONE]
    assert list(found.forms) == ["xyz-fixed"] * 2
    turned = read("name,r3,r2,r1,z,y,x\r\nlug-1,90,0,0,300,200,100\r\n")
    np.testing.assert_allclose(turned.tool_in_frame[0], expected, atol=1e-15)


def test_angles_are_those_of_the_form() -> None:
    found = read("x,y,z,r1,r2,r3\n0,0,0,90,0,0\n", "zyx-current")
    np.testing.assert_allclose(found.tool_in_frame[0, :2, :2], [[0, -1], [1, 0]], atol=1e-15)


def test_lines_without_angles_are_positions() -> None:
    found = read("name,x,y,z\na,1,2,3\nb,4,5,6\n")
    assert found.freedom.tolist() == [ORIENTATION] * 2
    np.testing.assert_allclose(found.tool_in_frame[1, :3, 3], [0.004, 0.005, 0.006])
    mixed = read("x,y,z,r1,r2,r3\n1,2,3,,,\n1,2,3,0,0,0\n")
    assert mixed.freedom.tolist() == [ORIENTATION, NONE]
    assert mixed.names == [None, None]


def test_each_line_may_say_what_is_free() -> None:
    lines = ["1,2,3,0,0,0,spin", "1,2,3,0,0,0,cone:30", "1,2,3,0,0,0,", "1,2,3,,,,orientation"]
    found = read("\n".join(["x,y,z,r1,r2,r3,freedom", *lines]))
    assert found.freedom.tolist() == [SPIN, CONE, NONE, ORIENTATION]
    np.testing.assert_allclose(found.cone, [0, np.pi / 6, 0, 0])


BAD = [
    ("a,0,0,0,0,0,", "unparseable", "x"),
    ("1,5,0,0,,0,", "unparseable", "r2"),
    ('1,"0,5",0,0,0,0,', "unparseable", "y"),
    ("1,nan,0,0,0,0,", "not-finite", "y"),
    ("1,2,1e13,0,0,0,", "out-of-range", "z"),
    ("1,2,3,1e12,0,0,", "out-of-range", "r1"),
    ("1,2,3,0,0,0,free", "unusable-value", "freedom"),
    ("1,2,3,0,0,0,cone:200", "unusable-value", "freedom"),
    ("1,2,3,0,0,0,cone:x", "unparseable", "freedom"),
    ("1,2,3,,,,spin", "unusable-value", "freedom"),
]


def test_each_line_may_have_an_approach() -> None:
    found = read("x,y,z,r1,r2,r3,approach\n1,2,3,0,0,0,\n1,2,3,0,0,0,50\n1,2,3,0,0,0,0\n")
    assert found.places.tolist() == [0, 1]
    assert {index: one.distance for index, one in found.approaches.items()} == {1: 0.05}
    assert (found.refused[2].code, found.refused[2].where) == ("unusable-value", (4, "approach"))
    (far,) = read("x,y,z,approach\n1,2,3,4\n1,2,3,1e300\n").refused.values()
    assert far.where == (3, "approach")


@pytest.mark.parametrize(("line", "code", "column"), BAD)
def test_one_bad_line_spoils_no_other(line: str, code: str, column: str) -> None:
    found = read(f"x,y,z,r1,r2,r3,freedom\n1,2,3,0,0,0,\n{line}\n4,5,6,0,0,0,spin\n")
    assert found.places.tolist() == [0, 2]
    ((place, detail),) = found.refused.items()
    assert (place, detail.code, detail.where) == (1, code, (3, column))
    assert detail.way_out


@pytest.mark.parametrize(
    ("text", "code", "where"),
    [
        ("", "unparseable", ()),
        ("x,y\n1,2\n", "missing-field", (1,)),
        ("x,y,z,r1\n1,2,3,4\n", "missing-field", (1,)),
        ("x,y,z,x\n1,2,3,4\n", "unusable-value", (1, 4)),
        ("x,y,z,weight\n1,2,3,4\n", "unknown-field", (1, 4)),
        ("x,y,z\n1,2,3\n1,2\n", "unusable-value", (3,)),
        ("x,y,z\n1,2,3\n\n1,2,3\n", "unusable-value", (3,)),
        ('x,y,z\n1,2,"3\n', "unparseable", (2,)),
        ("x,y,z\n", "unusable-value", ("targets",)),
        ("name,x,y,z\na,1,2,3\na,4,5,6\n", "unusable-value", (3, "name")),
        (f"name,x,y,z\n{'n' * 201},1,2,3\n", "unusable-value", (2, "name")),
        ("x,y,z\n" + "1,2,3\n" * 10_001, "too-large", ("targets",)),
        ("x,y,z\n1,2,a\n", "unparseable", (2, "z")),
    ],
)
def test_what_refuses_all(text: str, code: str, where: tuple[Any, ...]) -> None:
    with pytest.raises(ServiceError) as caught:
        read(text)
    detail = caught.value.details()[0]
    assert (detail.code, detail.where) == (code, where)
    assert detail.way_out


def test_a_byte_order_mark_and_blanks_are_passed_over() -> None:
    found = read("\ufeffname, x, y, z\na, 1, 2, 3\n")
    assert found.names == ["a"]
    np.testing.assert_allclose(found.tool_in_frame[0, :3, 3], [0.001, 0.002, 0.003])
    with pytest.raises(ServiceError, match="not UTF-8"):
        read_part_locations(b"name,x,y,z\n\xff,1,2,3\n", "xyz-fixed", MM)
