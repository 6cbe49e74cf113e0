"""Arms between the wire and the core: a document in, a checked arm and its digests out, and back.

Left out: storage, and which arm a request means (operations).
"""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from kinematics.arm import (
    Arm,
    NamedFrame,
    SingularityThresholds,
    Tool,
)
from kinematics.cell import Seen
from kinematics.digests import Digests, digests_of
from kinematics.findings import Finding
from kinematics.in_cell import InCell
from kinematics.table import Convention, FloatArray, Table
from kinematics.tolerances import MOST_PLACED, MOST_ROWS, SINGULAR
from service.convert import UNITS, Units
from service.errors import TooLarge, UnusableValue
from service.storage.ports import CellRevision
from service.wire import models
from service.wire.arm_rows import (
    combined_document,
    read_combined,
    read_row,
    read_uncertainty,
    row_document,
)
from service.wire.cells import RESERVED, CellAt, CellOf, no_cell, reserved_name
from service.wire.poses import pose_answer, read_pose

# What of the cell moves with an arm is seen at given joint values only.
_MOVING = "ask POST /v1/frames, or GET /v1/arms/{arm}/relation, with joint values"


@dataclass(frozen=True, eq=False)
class ReadArm:
    """An arm read from a document: checked, with what was repaired, and its digests."""

    arm: Arm
    units: Units
    findings: tuple[Finding, ...]
    document: dict[str, Any]
    digests: Digests

    @property
    def stands_in(self) -> CellRevision | None:
        """The revision of the cell it was read with, if it names one."""
        cell = self.arm.cell
        return None if cell is None else CellRevision(cell.name, cell.revision)


def read_arm(document: object, cell_of: CellOf = no_cell) -> ReadArm:
    """Return the arm a document describes; ``cell_of`` gives the cell it may name.

    Raises
    ------
    pydantic.ValidationError : shapes and types.
    ServiceError, KinematicsError : values; ``where`` leads from the document's root.
    """
    return read_arm_model(models.Arm.model_validate(document), cell_of)


def read_arm_model(given: models.Arm, cell_of: CellOf = no_cell) -> ReadArm:
    """Return the arm of a document whose shapes and types are already checked."""
    _refuse_beforehand(given)
    units = UNITS[given.units]
    found: list[Finding] = []

    def placed(pose: models.Pose, *where: str | int) -> FloatArray:
        x_in_y, findings = read_pose(pose, units, where)
        found.extend(findings)
        return x_in_y

    rows = tuple(read_row(row, given.rows, units) for row in given.rows)
    tools = {
        name: Tool(placed(tool, "tools", name), tool.number) for name, tool in given.tools.items()
    }
    frames = {
        name: NamedFrame(placed(frame, "frames", name), frame.in_, frame.number)
        for name, frame in given.frames.items()
    }
    base_in_world = np.eye(4) if given.base is None else placed(given.base, "base")
    seen, cell = Seen(None, {}, {}), None
    if given.cell is not None:
        seen, cell = _seen_cell(given, cell_of(given.cell), frames)
    thresholds = given.singularity_thresholds or models.Thresholds()
    arm = Arm(
        name=given.name,
        table=Table(Convention(given.convention), rows),
        base_in_world=base_in_world if seen.base_in_world is None else seen.base_in_world,
        tools=tools,
        default_tool=given.default_tool,
        frames=frames | seen.frames,
        combined_travel=tuple(
            read_combined(combined, rows, units) for combined in given.combined_travel
        ),
        thresholds=SingularityThresholds(
            thresholds.near,
            SINGULAR if thresholds.singular is None else thresholds.singular,
        ),
        characteristic_length=None
        if given.characteristic_length is None
        else float(units.length_in(given.characteristic_length)),
        joint_uncertainty=read_uncertainty(given.joint_uncertainty, rows, units),
        cell=cell,
    )
    document = given.model_dump(mode="json", by_alias=True, exclude_unset=True)
    return ReadArm(arm, units, tuple(found), document, digests_of(arm))


def arm_document(arm: Arm, units: Units, texts: Mapping[str, Any]) -> dict[str, Any]:
    """Return an arm as a document in ``units``; ``texts`` holds title, status and notes."""
    document: dict[str, Any] = {
        "name": arm.name,
        "convention": arm.table.convention.value,
        "units": units.name,
        "rows": [row_document(row, arm.table.rows, units) for row in arm.table.rows],
        **texts,
    }
    if arm.combined_travel:
        document["combined_travel"] = [
            combined_document(combined, arm.table.rows, units) for combined in arm.combined_travel
        ]
    document |= _setup_document(arm, units)
    if arm.joint_uncertainty:
        document["joint_uncertainty"] = [
            units.shortest_out(value, unit)
            for value, unit in zip(arm.joint_uncertainty, arm.joint_units, strict=True)
        ]
    if arm.characteristic_length is not None:
        document["characteristic_length"] = units.shortest_out(arm.characteristic_length, "m")
    if arm.thresholds != SingularityThresholds():
        document["singularity_thresholds"] = {"singular": arm.thresholds.singular} | (
            {} if arm.thresholds.near is None else {"near": arm.thresholds.near}
        )
    return document


def _setup_document(arm: Arm, units: Units) -> dict[str, Any]:
    """Return base, tools and frames, and the cell in place of what is the cell's."""

    def pose(x_in_y: FloatArray) -> dict[str, Any]:
        return pose_answer(x_in_y, "matrix", units)

    document: dict[str, Any] = {}
    of_cell = frozenset() if arm.cell is None else arm.cell.frames
    if arm.cell is not None:
        document["cell"] = arm.cell.name
    is_placed = arm.cell is not None and arm.cell.places_arm
    if not is_placed and not np.array_equal(arm.base_in_world, np.eye(4)):
        document["base"] = pose(arm.base_in_world)
    if arm.tools:
        document["tools"] = {
            name: pose(tool.tool_in_flange) | _numbered(tool.number)
            for name, tool in arm.tools.items()
        }
    if arm.default_tool is not None:
        document["default_tool"] = arm.default_tool
    if arm.frames.keys() - of_cell:
        document["frames"] = {
            name: pose(frame.frame_in_parent) | {"in": frame.parent} | _numbered(frame.number)
            for name, frame in arm.frames.items()
            if name not in of_cell
        }
    return document


def _refuse_beforehand(given: models.Arm) -> None:
    most = {"rows": MOST_ROWS} | dict.fromkeys(("tools", "frames", "combined_travel"), MOST_PLACED)
    for field, limit in most.items():
        count = len(getattr(given, field))
        if count > limit:
            raise TooLarge(
                f"the table has {count} rows" if field == "rows" else f"{count} entries in {field}",
                where=(field,),
                value=count,
                way_out=f"at most {limit} {'rows' if field == 'rows' else 'entries'}",
                status=422,
            )
    for kind, names in (("tools", given.tools), ("frames", given.frames)):
        for name in names:
            if name in RESERVED:
                raise reserved_name(kind, name)


def _seen_cell(
    given: models.Arm, at: CellAt, frames: Mapping[str, NamedFrame]
) -> tuple[Seen, InCell]:
    """Return what an arm has of the cell it names.

    Raises
    ------
    UnusableValue : it has a base of its own, and one from the cell.
    InvalidCell : another arm carries it.
    """
    cell = at.read.cell
    if given.base is not None and given.name in cell.placements:
        raise UnusableValue(
            f"the base of {given.name} is given here and by cell {cell.name}",
            where=("base",),
            way_out='leave "base" out of the arm, or the arm out of the cell',
        )
    numbers = [frame.number for frame in frames.values() if frame.number is not None]
    seen = cell.seen_by(given.name, {*given.tools, *frames}, numbers)
    return seen, InCell(
        name=cell.name,
        revision=at.revision,
        digest=at.read.digests.cell_digest,
        places_arm=seen.base_in_world is not None,
        frames=frozenset(seen.frames),
        unseen=seen.unseen,
        way_out=_MOVING.format(arm=given.name),
    )


def _numbered(number: int | None) -> dict[str, int]:
    return {} if number is None else {"number": number}
