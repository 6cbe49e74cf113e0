"""Documents of cells read: units, both places of a pose, what is kept as it was given."""

from typing import Any

import numpy as np
import pytest

from service.errors import UnusableValue
from service.wire.arms import read_arm
from service.wire.cells import RESERVED, CellAt, read_cell

STRAIGHT = {"form": "xyz-fixed", "values": [0, 0, 0]}
AT = {"position": [1000.0, 200.0, 0.0], "orientation": STRAIGHT}


def document(**changes: Any) -> dict[str, Any]:
    return {"name": "press-cell", "units": "mm-deg", **changes}


@pytest.mark.parametrize(
    ("units", "position"),
    [("mm-deg", [1000, 200, 0]), ("m-rad", [1, 0.2, 0]), ("in-deg", [1 / 0.0254, 0.2 / 0.0254, 0])],
)
def test_units_are_those_that_were_said(units: str, position: list[float]) -> None:
    given = {"position": position, "orientation": STRAIGHT}
    cell = read_cell(document(units=units, frames={"pin": given})).cell
    np.testing.assert_allclose(cell.frames["pin"].pose_in_parent[:3, 3], [1, 0.2, 0], atol=1e-15)


def test_a_pose_stands_beside_in_or_in_a_field_of_its_own() -> None:
    flat = {"in": "pin", **AT}
    own = {"in": "pin", "pose": AT}
    pin = {"pin": {"pose": AT, "number": 3}}
    one = read_cell(document(frames={**pin, "jig": flat}, arms={"press-arm": own}))
    two = read_cell(document(frames={**pin, "jig": own}, arms={"press-arm": flat}))
    assert one.digests == two.digests
    assert one.cell.frames["pin"].parent == "world"
    assert (one.cell.frames["pin"].number, one.cell.placements["press-arm"].number) == (3, None)


def test_the_document_is_kept_as_it_was_given() -> None:
    given = document(
        title="One press",
        arms={"press-arm": {"in": "world", "pose": AT}},
        frames={"pin": {**AT, "in": "press-arm.base", "number": 3}},
        notes="made up",
    )
    read = read_cell(given)
    assert read.document == given
    assert (read.units.name, read.findings, read.stands_in) == ("mm-deg", (), None)


@pytest.mark.parametrize("name", sorted(RESERVED))
def test_reserved_names(name: str) -> None:
    with pytest.raises(UnusableValue) as caught:
        read_cell(document(frames={name: AT}))
    assert caught.value.where == ("frames", name)


def test_an_arm_is_read_in_its_cell_and_says_in_which() -> None:
    given = document(
        arms={"press-arm": {"pose": AT}}, frames={"pin": {**AT, "in": "press-arm.base"}}
    )
    asked = []

    def cell_of(name: str) -> CellAt:
        asked.append(name)
        return CellAt(read_cell(given), 7)

    row = {"joint": "revolute", "a": 0, "alpha": 0, "d": 0, "theta": 0}
    arm = {"name": "press-arm", "convention": "standard", "units": "m-rad", "rows": [row]}
    read = read_arm({**arm, "cell": "press-cell"}, cell_of)
    assert asked == ["press-cell"]
    assert read.stands_in == ("press-cell", 7)
    assert read.document["cell"] == "press-cell"
    assert "base" not in read.document
    np.testing.assert_allclose(read.arm.base_in_world[:3, 3], [1, 0.2, 0])
    np.testing.assert_allclose(read.arm.frame_in_world("pin")[:3, 3], [2, 0.4, 0])
    without = read_arm(arm, cell_of)
    assert asked == ["press-cell"]
    assert without.stands_in is None
