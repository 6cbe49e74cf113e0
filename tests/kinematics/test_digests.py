"""Digests against canonical text written out by hand, and what changes which of the two."""

import hashlib
import json
from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest

from kinematics.arm import Arm, CombinedTravel, NamedFrame, SingularityThresholds, Tool
from kinematics.cell import Cell, Placed
from kinematics.digests import (
    canonical_cell,
    canonical_setup,
    canonical_table,
    cell_digests_of,
    digests_of,
)
from kinematics.in_cell import InCell
from kinematics.table import Convention, Coupling, Row, Table, Travel
from kinematics.transforms import pose
from tests.kinematics.example_arms import arm_of, prismatic, revolute

# The canonical text by hand: keys in order of the alphabet, no blanks, shortest doubles.
TABLE_TEXT = (
    '{"combined_travel":[{"ratios":{"1":1.0,"2":-0.5},"travel":[-1.0,1.5]}],'
    '"convention":"modified","rows":['
    '{"a":0.1,"alpha":0.0,"couplings":[],"d":0.3,"direction":-1,"joint":"revolute",'
    '"passive":false,"theta":0.0,"top_speed":3.0,"travel":[-2.0,2.0],'
    '"working_travel":[-1.0,1.0]},'
    '{"a":0.0,"alpha":1.5707963267948966,"couplings":[{"axis":1,"ratio":-1.0}],"d":0.0,'
    '"direction":1,"joint":"revolute","passive":false,"theta":0.30000000000000004,'
    '"top_speed":null,"travel":null,"working_travel":null}]}'
)
SETUP_TEXT = (
    '{"base":[[1.0,0.0,0.0,0.0],[0.0,1.0,0.0,0.0],[0.0,0.0,1.0,1.5],[0.0,0.0,0.0,1.0]],'
    '"cell_revision":null,"characteristic_length":0.7,"default_tool":"gripper",'
    '"frames":{"table":{"in":"base","number":null,'
    '"pose":[[1.0,0.0,0.0,2.0],[0.0,1.0,0.0,0.0],[0.0,0.0,1.0,0.0],[0.0,0.0,0.0,1.0]]}},'
    '"joint_uncertainty":[1e-05,2e-05],"singularity_thresholds":{"near":0.02,"singular":1e-09},'
    '"tools":{"gripper":{"number":1,'
    '"pose":[[1.0,0.0,0.0,0.0],[0.0,1.0,0.0,0.0],[0.0,0.0,1.0,0.1],[0.0,0.0,0.0,1.0]]}}}'
)

FIRST = revolute(
    a=0.1,
    d=0.3,
    theta=-0.0,
    direction=-1,
    travel=Travel(-2.0, 2.0),
    working_travel=Travel(-1.0, 1.0),
    working_reason="dress pack",
    top_speed=3.0,
)
SECOND = revolute(alpha=np.pi / 2, theta=0.1 + 0.2, couplings=(Coupling(1, -1.0),))
ARM = arm_of(
    FIRST,
    SECOND,
    convention="modified",
    base_in_world=pose(np.eye(3), [0, -0.0, 1.5]),
    tools={"gripper": Tool(pose(np.eye(3), [0, 0, 0.1]), number=1)},
    default_tool="gripper",
    frames={"table": NamedFrame(pose(np.eye(3), [2.0, 0, 0]), parent="base")},
    combined_travel=(CombinedTravel({1: 1.0, 2: -0.5}, Travel(-1.0, 1.5)),),
    characteristic_length=0.7,
    thresholds=SingularityThresholds(near=0.02, singular=1e-9),
    joint_uncertainty=(1e-5, 2e-5),
)


def sha256(text: str) -> str:
    return hashlib.sha256(text.encode()).hexdigest()


def test_digests_by_hand() -> None:
    digests = digests_of(ARM)
    assert digests.table_digest == sha256(TABLE_TEXT)
    assert digests.setup_digest == sha256(SETUP_TEXT)
    assert digests.digest == sha256(sha256(TABLE_TEXT) + sha256(SETUP_TEXT))[:8]


def test_canonical_values_by_hand() -> None:
    assert canonical_table(ARM) == json.loads(TABLE_TEXT)
    assert canonical_setup(ARM) == json.loads(SETUP_TEXT)


def test_digests_of_an_arm_without_rows_stay_what_they_are() -> None:
    """A record of the canonical form: if these change, digests in people's logs lead nowhere."""
    empty = '{"combined_travel":[],"convention":"standard","rows":[]}'
    assert digests_of(arm_of()).table_digest == sha256(empty)


def in_row(**changes: object) -> Callable[[Arm], Arm]:
    def change(arm: Arm) -> Arm:
        rows: tuple[Row, ...] = (replace(FIRST, **changes), SECOND)  # type: ignore[arg-type]
        return replace(arm, table=Table(arm.table.convention, rows))

    return change


def to(**changes: object) -> Callable[[Arm], Arm]:
    return lambda arm: replace(arm, **changes)  # type: ignore[arg-type]


@pytest.mark.parametrize(
    "change",
    [
        in_row(a=np.nextafter(0.1, 1.0)),
        in_row(alpha=1e-16),
        in_row(d=0.3000001),
        in_row(theta=5e-324),
        in_row(direction=1),
        in_row(travel=Travel(-2.0, 2.1)),
        in_row(working_travel=None),
        in_row(top_speed=None),
        to(combined_travel=()),
        to(table=Table(Convention.STANDARD, ARM.table.rows)),
    ],
)
def test_what_a_recalibration_changes(change: Callable[[Arm], Arm]) -> None:
    before, after = digests_of(ARM), digests_of(change(ARM))
    assert after.table_digest != before.table_digest
    assert after.setup_digest == before.setup_digest
    assert after.digest != before.digest


@pytest.mark.parametrize(
    "change",
    [
        to(base_in_world=pose(np.eye(3), [0, 0, np.nextafter(1.5, 2.0)])),
        to(tools={}, default_tool=None),
        to(tools={"gripper": Tool(pose(np.eye(3), [0, 0, 0.1]), number=2)}),
        to(default_tool="flange"),
        to(frames={}),
        to(frames={"table": NamedFrame(pose(np.eye(3), [2.0, 0, 0]), parent="world")}),
        to(frames={"table": NamedFrame(pose(np.eye(3), [2.0, 0, 0]), "base", number=1)}),
        to(characteristic_length=None),
        to(thresholds=SingularityThresholds(near=0.03)),
        to(joint_uncertainty=()),
    ],
)
def test_what_a_moved_fixture_changes(change: Callable[[Arm], Arm]) -> None:
    before, after = digests_of(ARM), digests_of(change(ARM))
    assert after.setup_digest != before.setup_digest
    assert after.table_digest == before.table_digest
    assert after.digest != before.digest


@pytest.mark.parametrize(
    "change",
    [
        to(name="renamed"),
        in_row(working_reason="hose"),
        in_row(theta=0.0),
        to(tools=dict(ARM.tools)),
        to(base_in_world=pose(np.eye(3), [0, 0.0, 1.5])),
    ],
)
def test_what_changes_neither(change: Callable[[Arm], Arm]) -> None:
    assert digests_of(change(ARM)) == digests_of(ARM)


def test_the_order_of_names_does_not_count_and_that_of_rows_does() -> None:
    tools = {"one": Tool(np.eye(4)), "two": Tool(pose(np.eye(3), [0, 0, 0.1]))}
    turned = dict(reversed(tools.items()))
    assert list(turned) != list(tools)
    assert digests_of(arm_of(tools=turned)) == digests_of(arm_of(tools=tools))
    rows = revolute(a=0.1), revolute(a=0.2)
    assert digests_of(arm_of(*rows)) != digests_of(arm_of(*rows[::-1]))


def test_the_kind_of_a_joint_counts() -> None:
    assert digests_of(arm_of(revolute())).table_digest != digests_of(arm_of(prismatic()))[0]


def test_whole_numbers_and_numpy_numbers_are_doubles() -> None:
    whole = arm_of(revolute(a=1, d=2, travel=Travel(-1, 1)))
    doubles = arm_of(revolute(a=np.float64(1.0), d=2.0, travel=Travel(-1.0, 1.0)))
    assert digests_of(whole) == digests_of(doubles)


# --- cells ---------------------------------------------------------------------------------

SHIFTED = "[[1.0,0.0,0.0,2.0],[0.0,1.0,0.0,0.0],[0.0,0.0,1.0,0.0],[0.0,0.0,0.0,1.0]]"
CELL_TEXT = (
    f'{{"arms":{{"press-arm":{{"in":"plate","pose":{SHIFTED}}}}},'
    f'"frames":{{"plate":{{"in":"world","number":3,"pose":{SHIFTED}}}}}}}'
)
PLACED = Placed("plate", pose(np.eye(3), [2.0, -0.0, 0]))
CELL = Cell(
    "press-cell",
    {"press-arm": PLACED},
    {"plate": Placed("world", pose(np.eye(3), [2.0, 0, 0]), number=3)},
)


def in_cell(**changes: object) -> Arm:
    cell = InCell("press-cell", 4, sha256(CELL_TEXT), places_arm=True, frames=frozenset({"plate"}))
    seen = {"plate": NamedFrame(pose(np.eye(3), [2.0, 0, 0]), number=3)}
    placed = replace(ARM, frames={**ARM.frames, **seen}, cell=cell)
    return replace(placed, **changes)  # type: ignore[arg-type]


def test_the_digest_of_a_cell_by_hand() -> None:
    assert canonical_cell(CELL) == json.loads(CELL_TEXT)
    digests = cell_digests_of(CELL)
    assert digests.cell_digest == sha256(CELL_TEXT)
    assert digests.digest == sha256(CELL_TEXT)[:8]


def test_the_setup_of_an_arm_in_a_cell_by_hand() -> None:
    """Its own frames, the cell's revision, and the digest of all that is in the cell."""
    text = SETUP_TEXT.replace(
        '"cell_revision":null',
        f'"cell_digest":"{sha256(CELL_TEXT)}","cell_revision":4',
    )
    digests = digests_of(in_cell())
    assert digests.setup_digest == sha256(text)
    assert digests.table_digest == sha256(TABLE_TEXT)


@pytest.mark.parametrize("change", [{"revision": 5}, {"digest": "0" * 64}])
def test_the_setup_follows_revision_and_content_of_the_cell(change: dict[str, object]) -> None:
    before = in_cell()
    assert before.cell is not None
    after = replace(before, cell=replace(before.cell, **change))  # type: ignore[arg-type]
    assert digests_of(before).setup_digest != digests_of(after).setup_digest
    assert digests_of(before).table_digest == digests_of(after).table_digest


@pytest.mark.parametrize(
    "other",
    [
        Cell(
            "c", {"press-arm": replace(CELL.placements["press-arm"], parent="world")}, CELL.frames
        ),
        Cell("c", {"other": PLACED}, CELL.frames),
        Cell("c", CELL.placements, {"plate": replace(CELL.frames["plate"], number=4)}),
        Cell("c", CELL.placements, {**CELL.frames, "pin": Placed("plate", np.eye(4))}),
    ],
    ids=["parent", "arm", "number", "frame"],
)
def test_whatever_is_in_the_cell_is_in_its_digest(other: Cell) -> None:
    assert cell_digests_of(other).cell_digest != cell_digests_of(CELL).cell_digest


def test_the_name_of_a_cell_is_not_in_its_digest() -> None:
    renamed = Cell("other-cell", CELL.placements, CELL.frames)
    assert cell_digests_of(renamed) == cell_digests_of(CELL)
