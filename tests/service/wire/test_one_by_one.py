"""Items of a list: who is told what is wrong, and what is a mistake of the whole request."""

import pytest

from kinematics.errors import OutOfRange
from service.errors import UnknownField, UnusableValue
from service.wire.models import Strict
from service.wire.one_by_one import read_one_by_one


class Item(Strict):
    size: float


def read(row: object) -> float:
    size = Item.model_validate(row).size
    if size > 100:
        raise OutOfRange("too large", where=("size",), value=size / 1000, way_out="less")
    if size < 0:
        raise UnusableValue("too small", where=("size",), value=size)
    return size


def test_each_is_told_at_its_place() -> None:
    rows = [{"size": 1}, {"size": "x"}, {"size": 500}, {"size": -1}, 7, {"size": 2}]
    found, refused = read_one_by_one("items", rows, [0, 1, 2, 3, 4], read)
    assert found == {0: 1.0}
    told = {place: (detail.code, detail.where) for place, detail in refused.items()}
    assert told == {
        1: ("unusable-value", ("items", 1, "size")),
        2: ("out-of-range", ("items", 2, "size")),
        3: ("unusable-value", ("items", 3, "size")),
        4: ("unusable-value", ("items", 4)),
    }
    # As it was given, whatever the core saw of it.
    assert refused[2].value == 500


def test_an_unknown_field_refuses_all() -> None:
    with pytest.raises(UnknownField) as caught:
        read_one_by_one("items", [{"size": 1}, {"size": 2, "colour": 3}], [0, 1], read)
    assert caught.value.details()[0].where == ("items", 1, "colour")
