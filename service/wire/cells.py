"""Cells between the wire and the core: a document in, a checked cell and its digests out.

Left out: storage, and the arms that stand in a cell (arms.py).
"""

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, NamedTuple, NoReturn

from kinematics.cell import Cell, Placed
from kinematics.digests import CellDigests, cell_digests_of
from kinematics.findings import Finding
from kinematics.tolerances import MOST_PLACED, MOST_ROWS
from service.convert import UNITS, Units
from service.errors import TooLarge, UnknownArm, UnusableValue
from service.wire import models
from service.wire.poses import Where, read_pose

RESERVED = frozenset(
    {"base", "world", "flange", "tool", *(f"link-{number}" for number in range(MOST_ROWS + 1))}
)


@dataclass(frozen=True, eq=False)
class ReadCell:
    """A cell read from a document: checked, with what was repaired, and its digests."""

    cell: Cell
    units: Units
    findings: tuple[Finding, ...]
    document: dict[str, Any]
    digests: CellDigests
    stands_in: None = None


class CellAt(NamedTuple):
    """A cell and the number of its revision."""

    read: ReadCell
    revision: int


CellOf = Callable[[str], CellAt]
"""Gives the cell that an arm names."""


def no_cell(name: str) -> NoReturn:
    """Refuse whatever cell an arm names, where there are none.

    Raises
    ------
    UnknownArm
    """
    raise unknown_cell(name, "leave it out and give the frames in the arm")


def unknown_cell(name: str, way_out: str) -> UnknownArm:
    """Return the refusal of the cell that an arm names."""
    return UnknownArm(
        f"there is no cell {name[:60]!r}", where=("cell",), value=name, way_out=way_out, status=422
    )


def read_cell(document: object) -> ReadCell:
    """Return the cell a document describes.

    Raises
    ------
    pydantic.ValidationError : shapes and types.
    ServiceError, KinematicsError : values; ``where`` leads from the document's root.
    """
    _refuse_too_many(document)
    given = models.Cell.model_validate(document)
    units = UNITS[given.units]
    for name in given.frames:
        if name in RESERVED:
            raise reserved_name("frames", name)
    found: list[Finding] = []

    def placed(what: str, name: str, placement: models.Placement) -> Placed:
        pose, where = _pose_of(placement, (what, name))
        pose_in_parent, findings = read_pose(pose, units, where)
        found.extend(findings)
        return Placed(placement.in_, pose_in_parent, getattr(placement, "number", None))

    cell = Cell(
        given.name,
        {name: placed("arms", name, arm) for name, arm in given.arms.items()},
        {name: placed("frames", name, frame) for name, frame in given.frames.items()},
    )
    stored = given.model_dump(mode="json", by_alias=True, exclude_unset=True)
    return ReadCell(cell, units, tuple(found), stored, cell_digests_of(cell))


def reserved_name(kind: str, name: str) -> UnusableValue:
    """Return the refusal of a tool or frame that is called as something else is."""
    return UnusableValue(
        f"{name} is a reserved name",
        where=(kind, name),
        value=name,
        way_out="reserved: base, world, flange, tool, link-0 ... link-32",
    )


def _refuse_too_many(document: object) -> None:
    """Refuse before looking at each: a body may hold some hundred thousand."""
    for what in ("arms", "frames"):
        things = document.get(what) if isinstance(document, dict) else None
        if isinstance(things, dict) and len(things) > MOST_PLACED:
            raise TooLarge(
                f"the cell has {len(things)} {what}",
                where=(what,),
                value=len(things),
                way_out=f"at most {MOST_PLACED}; divide the cell",
                status=422,
            )


def _pose_of(placement: models.Placement, where: Where) -> tuple[models.Pose, Where]:
    """Return the pose of a placement, which stands in ``pose`` or beside ``in``."""
    if placement.pose is None:
        return placement, where
    for field in ("position", "orientation", "matrix"):
        if getattr(placement, field) is not None:
            raise UnusableValue(
                'the pose stands either in "pose" or beside "in"',
                where=(*where, field),
                way_out="leave one of them out",
            )
    return placement.pose, (*where, "pose")
