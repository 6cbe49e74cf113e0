"""Part locations told as a body has targets: the same answers, and cells that are no numbers."""

import numpy as np
import pytest

from service.convert import UNITS
from service.errors import ServiceError
from service.wire.reach_csv import read_part_locations
from service.wire.reach_csv_rows import csv_rows
from service.wire.reach_targets import read_targets

FORM, MM = "zyx-current", UNITS["mm-deg"]
TABLE = b"""name,x,y,z,r1,r2,r3,freedom,approach
lug-1,0,250,1000,0,0,90,,
,1.5,2e1,-3,,,,,
lug-3,0,0,1,0,0,0,spin,25
lug-4,0,0,1,0,0,0,cone:30,
"""


def test_lines_mean_what_they_do_in_reach_checks() -> None:
    rows = csv_rows(TABLE, FORM, 99)
    turned = {"form": FORM, "values": [0.0, 0.0, 90.0]}
    place = {"position": [0.0, 250.0, 1000.0], "orientation": turned}
    assert rows[:2] == [{"name": "lug-1", "pose": place}, {"position": [1.5, 20.0, -3.0]}]
    found, expected = read_targets(rows, MM), read_part_locations(TABLE, FORM, MM)
    for field in ("tool_in_frame", "freedom", "cone", "position_tolerance", "angle_tolerance"):
        np.testing.assert_allclose(getattr(found, field), getattr(expected, field), atol=1e-15)
    assert found.names == expected.names
    assert found.approaches.keys() == expected.approaches.keys() == {2}
    assert not found.refused


@pytest.mark.parametrize(
    "line",
    ["1,two,3,0,0,0,,", "1,2,3,0,,0,,", "1,2,3,0,0,0,round,", "1,2,3,0,0,0,cone:wide,"],
)
def test_a_cell_that_cannot_be_used_spoils_its_own_line(line: str) -> None:
    table = TABLE + f"lug-5,{line}\nlug-6,{line[:-1]},-4\n".replace(",,,", ",,").encode()
    header, *lines = table.decode().splitlines()
    table = "\n".join([header, *(each for each in lines if each.count(",") == 8)]).encode()
    found, expected = (
        read_targets(csv_rows(table, FORM, 99), MM),
        read_part_locations(table, FORM, MM),
    )
    assert found.refused.keys() == expected.refused.keys()
    assert 4 in found.refused


def test_more_lines_than_may_be_are_not_read_to_the_end() -> None:
    table = b"x,y,z\n" + b"1,2,3\n" * 50_000
    assert 10 < len(csv_rows(table, FORM, 10)) < 50_000


@pytest.mark.parametrize("table", [b"", b"x,y\n1,2", b"x,y,z,w\n1,2,3,4", b"x,y,z\n1,2", b"\xff"])
def test_what_is_no_such_table_is_refused(table: bytes) -> None:
    with pytest.raises(ServiceError):
        csv_rows(table, FORM, 99)
