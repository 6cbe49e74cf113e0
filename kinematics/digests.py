"""Canonical form and digests of an arm and of a cell: what a logged pose leads back to.

The table's digest covers what a recalibration changes, the set-up's what a moved fixture changes,
in the arm or in its cell. Titles, notes and status are in none.
"""

import hashlib
import json
from typing import NamedTuple, TypeAlias

import numpy as np

from kinematics.arm import Arm
from kinematics.cell import Cell, Placed
from kinematics.table import FloatArray, Row, Travel

Plain: TypeAlias = "bool | int | float | str | list[Plain] | dict[str, Plain] | None"


class Digests(NamedTuple):
    """Hexadecimal SHA-256 of table and set-up, and the 8 digits that stand for both."""

    table_digest: str
    setup_digest: str
    digest: str


class CellDigests(NamedTuple):
    """Hexadecimal SHA-256 of a cell, and its first 8 digits."""

    cell_digest: str
    digest: str


def digests_of(arm: Arm) -> Digests:
    """Return the digests of an arm: SHA-256 of UTF-8 JSON, sorted keys, SI, -0 as 0.

    ``digest`` is the start of SHA-256 of both hexadecimal digests joined.

    Source
    ------
    SHA-256: FIPS 180-4; doubles as Python prints them, with the fewest digits that read back.

    Examples
    --------
    >>> from kinematics.table import Convention, Table
    >>> len(digests_of(Arm("empty", Table(Convention.STANDARD, ()))).digest)
    8
    """
    table, setup = (_sha256(part) for part in (canonical_table(arm), canonical_setup(arm)))
    joined = hashlib.sha256((table + setup).encode()).hexdigest()
    return Digests(table, setup, joined[:8])


def cell_digests_of(cell: Cell) -> CellDigests:
    """Return the digests of a cell: SHA-256 of UTF-8 JSON, sorted keys, SI, -0 as 0.

    Source
    ------
    As ``digests_of``.

    Examples
    --------
    >>> digests = cell_digests_of(Cell("empty"))
    >>> digests.cell_digest.startswith(digests.digest), len(digests.digest)
    (True, 8)
    """
    digest = _sha256(canonical_cell(cell))
    return CellDigests(digest, digest[:8])


def canonical_table(arm: Arm) -> dict[str, Plain]:
    """Return rows, drive map, travel and speeds as plain values in SI units.

    Examples
    --------
    >>> from kinematics.table import Convention, Table
    >>> canonical_table(Arm("empty", Table(Convention.STANDARD, ())))
    {'convention': 'standard', 'rows': [], 'combined_travel': []}
    """
    return {
        "convention": arm.table.convention.value,
        "rows": [_row(row) for row in arm.table.rows],
        "combined_travel": [
            {
                "ratios": {str(number): _number(r) for number, r in combined.ratios.items()},
                "travel": _travel(combined.travel),
            }
            for combined in arm.combined_travel
        ],
    }


def canonical_setup(arm: Arm) -> dict[str, Plain]:
    """Return base, tools, frames, thresholds and uncertainty as plain values in SI units.

    Frames are the arm's own. What it has of its cell is told by the cell's revision and digest.

    Examples
    --------
    >>> from kinematics.table import Convention, Table
    >>> canonical_setup(Arm("empty", Table(Convention.STANDARD, ())))["tools"]
    {}
    """
    of_cell = () if arm.cell is None else arm.cell.frames
    return {
        "base": _matrix(arm.base_in_world),
        "tools": {
            name: {"pose": _matrix(tool.tool_in_flange), "number": tool.number}
            for name, tool in arm.tools.items()
        },
        "default_tool": arm.default_tool,
        "frames": {
            name: {
                "pose": _matrix(frame.frame_in_parent),
                "in": frame.parent,
                "number": frame.number,
            }
            for name, frame in arm.frames.items()
            if name not in of_cell
        },
        "cell_revision": None if arm.cell is None else arm.cell.revision,
        # Without a cell there is no such key: arms from before there were cells keep their digest.
        **({} if arm.cell is None else {"cell_digest": arm.cell.digest}),
        "characteristic_length": _number(arm.characteristic_length),
        "singularity_thresholds": {
            "near": _number(arm.thresholds.near),
            "singular": _number(arm.thresholds.singular),
        },
        "joint_uncertainty": [_number(value) for value in arm.joint_uncertainty],
    }


def canonical_cell(cell: Cell) -> dict[str, Plain]:
    """Return placements and frames as plain values in SI units.

    Examples
    --------
    >>> canonical_cell(Cell("empty"))
    {'arms': {}, 'frames': {}}
    """
    return {
        "arms": {name: _placed(placed) for name, placed in cell.placements.items()},
        "frames": {
            name: {**_placed(placed), "number": placed.number}
            for name, placed in cell.frames.items()
        },
    }


def _placed(placed: Placed) -> dict[str, Plain]:
    return {"pose": _matrix(placed.pose_in_parent), "in": placed.parent}


def _row(row: Row) -> dict[str, Plain]:
    return {
        "joint": row.joint.value,
        "a": _number(row.a),
        "alpha": _number(row.alpha),
        "d": _number(row.d),
        "theta": _number(row.theta),
        "direction": row.direction,
        "travel": _travel(row.travel),
        "working_travel": _travel(row.working_travel),
        "top_speed": _number(row.top_speed),
        "couplings": [
            {"axis": coupling.axis, "ratio": _number(coupling.ratio)} for coupling in row.couplings
        ],
        "passive": row.passive,
    }


def _sha256(value: dict[str, Plain]) -> str:
    text = json.dumps(value, sort_keys=True, separators=(",", ":"), ensure_ascii=False)
    return hashlib.sha256(text.encode()).hexdigest()


def _number(value: float | None) -> float | None:
    # Adding 0.0 turns -0.0 into 0.0 and leaves every other double alone.
    return None if value is None else float(value) + 0.0


def _travel(travel: Travel | None) -> Plain:
    return None if travel is None else [_number(bound) for bound in travel]


def _matrix(matrix: FloatArray) -> Plain:
    return [[float(entry) for entry in row] for row in np.asarray(matrix) + 0.0]
