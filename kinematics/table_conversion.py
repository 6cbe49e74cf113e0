"""The same arm in the other convention: regrouping one chain, with the base or tool it needs.

``X0 Z1 X1 ... Zn Xn`` is cut before each Z (standard) or before each X (modified). What is left
over at one end goes into the base or the tools, so nothing is approximated.
"""

from dataclasses import replace

import numpy as np

from kinematics.arm import BASE, FLANGE, Arm, NamedFrame, Tool
from kinematics.table import Convention, FloatArray, Row, Table
from kinematics.transforms import inverse


def converted(arm: Arm, to: Convention) -> Arm:
    """Return an arm in convention ``to`` whose tools take the same poses in the world.

    To modified, the flange moves back over the last row's a and alpha and every tool takes them
    in, and the former flange stays reachable as a tool; to standard, the base moves over the
    first row's, so poses in the base change and poses in the world do not.

    Examples
    --------
    >>> from kinematics.table import JointKind
    >>> row = Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0)
    >>> other = converted(Arm("one", Table(Convention.STANDARD, (row,))), Convention.MODIFIED)
    >>> other.table.rows[0].a, float(other.tools["former-flange"].tool_in_flange[0, 3])
    (0.0, 0.4)
    """
    if arm.table.convention is to or not arm.table.rows:
        return replace(arm, table=Table(to, arm.table.rows))
    rows = arm.table.rows
    if to is Convention.MODIFIED:
        shifted = _with_links(rows, [(0.0, 0.0), *[(row.a, row.alpha) for row in rows[:-1]]])
        former_flange_in_flange = arm.table.chain.link[-1]
        return _with_moved_flange(arm, Table(to, shifted), former_flange_in_flange)
    shifted = _with_links(rows, [*[(row.a, row.alpha) for row in rows[1:]], (0.0, 0.0)])
    base_in_former_base = arm.table.chain.first
    return replace(
        arm,
        table=Table(to, shifted),
        base_in_world=arm.base_in_world @ base_in_former_base,
        frames={
            name: _in_moved_base(frame, base_in_former_base) for name, frame in arm.frames.items()
        },
    )


def _with_links(rows: tuple[Row, ...], links: list[tuple[float, float]]) -> tuple[Row, ...]:
    return tuple(
        replace(row, a=a, alpha=alpha) for row, (a, alpha) in zip(rows, links, strict=True)
    )


def _with_moved_flange(arm: Arm, table: Table, former_in_flange: FloatArray) -> Arm:
    if np.array_equal(former_in_flange, np.eye(4)):
        return replace(arm, table=table)
    tools = {
        name: replace(tool, tool_in_flange=former_in_flange @ tool.tool_in_flange)
        for name, tool in arm.tools.items()
    }
    former = _free_name(arm)
    tools[former] = Tool(former_in_flange)
    was_default = arm.default_tool == FLANGE or not arm.tools
    default_tool = former if was_default else arm.default_tool
    return replace(arm, table=table, tools=tools, default_tool=default_tool)


def _free_name(arm: Arm) -> str:
    taken = arm.tools.keys() | arm.frames.keys()
    names = (f"former-flange{suffix}" for suffix in ("", *(f"-{n}" for n in range(2, 99))))
    return next(name for name in names if name not in taken)


def _in_moved_base(frame: NamedFrame, base_in_former_base: FloatArray) -> NamedFrame:
    if frame.parent != BASE:
        return frame
    return replace(frame, frame_in_parent=inverse(base_in_former_base) @ frame.frame_in_parent)
