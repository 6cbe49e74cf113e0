"""An arm as it stands in its cell: table and drive map, base, tools and frames.

Left out: anything that depends on joint values (chain.py onwards).
"""

from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from kinematics.drive_map import DriveMap
from kinematics.errors import InvalidArm, ToolNotSaid, UnknownFrame, UnknownTool
from kinematics.in_cell import InCell
from kinematics.known_names import one_of
from kinematics.number_checks import refuse_shared_numbers
from kinematics.table import FloatArray, Table, Travel, check_number, check_travel
from kinematics.tolerances import SHORTEST_LENGTH, SINGULAR
from kinematics.transforms import inverse

FLANGE = "flange"
BASE = "base"
WORLD = "world"


@dataclass(frozen=True)
class Tool:
    """A tool: its pose in the flange (mechanical interface), and the number a controller knows."""

    tool_in_flange: FloatArray
    number: int | None = None


@dataclass(frozen=True)
class NamedFrame:
    """A frame of the cell: its pose in ``parent``, which is world, base or another frame."""

    frame_in_parent: FloatArray
    parent: str = WORLD
    number: int | None = None


@dataclass(frozen=True)
class CombinedTravel:
    """Bounds of a sum of joint values, as linkages have them.

    ``ratios`` maps 1-based numbers of driven rows to their share; bounds in the rows' SI unit.
    """

    ratios: Mapping[int, float]
    travel: Travel


@dataclass(frozen=True)
class SingularityThresholds:
    """Pure numbers the smallest scaled singular value is held against.

    ``near`` None takes a share of what the arm reaches in its best postures (task_space.py).
    """

    near: float | None = None
    singular: float = SINGULAR


@dataclass(frozen=True, eq=False)
class Arm:
    """A checked arm; SI units throughout. Two arms are the same only if they are one object.

    Attributes
    ----------
    table, combined_travel : what changes when the arm is recalibrated.
    base_in_world : (4, 4).
    tools, default_tool, frames : what changes when the cell is set up anew.
    characteristic_length : metres; None takes the one the table gives.
    joint_uncertainty : standard uncertainty of each joint value, or empty.
    cell : what is the cell's of base and frames; None for an arm that names none.

    Raises
    ------
    InvalidCoupling, SingularDriveMap, InvalidArm, UnknownTool, UnknownFrame

    Examples
    --------
    >>> from kinematics.table import Convention
    >>> Arm("empty", Table(Convention.STANDARD, ())).joint_count
    0
    """

    name: str
    table: Table
    base_in_world: FloatArray = field(default_factory=lambda: np.eye(4))
    tools: Mapping[str, Tool] = field(default_factory=dict)
    default_tool: str | None = None
    frames: Mapping[str, NamedFrame] = field(default_factory=dict)
    combined_travel: tuple[CombinedTravel, ...] = ()
    thresholds: SingularityThresholds = field(default_factory=SingularityThresholds)
    characteristic_length: float | None = None
    joint_uncertainty: tuple[float, ...] = ()
    cell: InCell | None = None
    drive_map: DriveMap = field(init=False, repr=False, compare=False)

    def __post_init__(self) -> None:
        object.__setattr__(self, "drive_map", DriveMap(self.table.rows))
        for index, combined in enumerate(self.combined_travel):
            _check_combined(self, index, combined)
        if self.default_tool is not None:
            self.tool_in_flange(self.default_tool, where=("default_tool",))
        for what, things in (("tools", self.tools), ("frames", self.frames)):
            numbers = {name: thing.number for name, thing in things.items()}
            refuse_shared_numbers(what, numbers, InvalidArm)
        for shared in self.tools.keys() & self.frames.keys():
            raise InvalidArm(
                f"{shared} is the name of a tool and of a frame",
                where=("frames", shared),
                value=shared,
                way_out="tools and frames share one namespace: rename one",
            )
        for name in self.frames:
            self.frame_in_world(name)
        _check_scalars(self)

    @property
    def joint_count(self) -> int:
        """Number of joint values: one for each driven row."""
        return self.drive_map.joint_count

    @cached_property
    def joint_units(self) -> tuple[str, ...]:
        """SI unit, ``rad`` or ``m``, of each joint value."""
        return tuple(self.table.rows[index].unit for index in self.drive_map.driven)

    @cached_property
    def revolute_joints(self) -> NDArray[np.bool_]:
        """Whether each joint value is an angle, (joints,)."""
        return np.array([unit == "rad" for unit in self.joint_units], dtype=bool)

    @cached_property
    def top_speeds(self) -> FloatArray | None:
        """Top speed of each joint value, (joints,), rad/s or m/s; None where one is not known."""
        rows = [self.table.rows[index] for index in self.drive_map.driven]
        known = [row.top_speed for row in rows if row.top_speed is not None]
        return np.array(known) if rows and len(known) == len(rows) else None

    def tool_name(self, tool: str | int | None, where: tuple[str | int, ...] = ("tool",)) -> str:
        """Return the name of the tool meant by a name, a controller's number, or nothing.

        Raises
        ------
        ToolNotSaid : nothing was said and the arm has tools but no default.
        UnknownTool : the error says which there are.
        """
        if tool is None:
            if self.default_tool is not None or not self.tools:
                return self.default_tool or FLANGE
            raise ToolNotSaid(
                "the arm has tools but no default tool",
                where=where,
                way_out=f"say one of: {', '.join([*self.tools, FLANGE])}",
            )
        for name, candidate in self.tools.items():
            if tool in (name, candidate.number):
                return name
        if tool == FLANGE:
            return FLANGE
        raise UnknownTool(
            f"the arm has no tool {tool!r}",
            where=where,
            value=tool,
            way_out=f"one of: {', '.join([*map(_with_number, self.tools.items()), FLANGE])}",
        )

    def tool_in_flange(
        self, tool: str | int | None, where: tuple[str | int, ...] = ("tool",)
    ) -> FloatArray:
        """Return the pose of a tool in the flange, (4, 4); raises as ``tool_name``."""
        name = self.tool_name(tool, where)
        return self.tools[name].tool_in_flange if name in self.tools else np.eye(4)

    @cached_property
    def _numbered_frames(self) -> dict[str | int, str]:
        numbered = {frame.number: name for name, frame in self.frames.items()}
        return {number: name for number, name in numbered.items() if number is not None}

    def frame_name(self, frame: str | int | None) -> str:
        """Return the name of the frame meant by a name, a number, or nothing (``base``).

        Raises
        ------
        UnknownFrame : the error says which there are.
        """
        if frame is None:
            return BASE
        if frame in (BASE, WORLD):
            return str(frame)
        name = self._numbered_frames.get(frame, frame)
        if name in self.frames:
            return str(name)
        if self.cell is not None:
            self.cell.refuse_unseen(frame)
        raise UnknownFrame(
            f"the arm has no frame {frame!r}",
            where=("frame",),
            value=frame,
            way_out=one_of(str(frame), [BASE, WORLD, *map(_with_number, self.frames.items())]),
        )

    def frame_in_world(self, name: str) -> FloatArray:
        """Return the pose of ``world``, ``base`` or a named frame in the world, (4, 4).

        Raises
        ------
        UnknownFrame : the name, or a parent on the way, is missing.
        InvalidArm : the frames stand in each other in a circle.
        """
        frame_in_world = np.eye(4)
        seen: list[str] = []
        while name not in (WORLD, BASE):
            if name in seen:
                raise InvalidArm(
                    f"frames stand in each other in a circle: {' in '.join([*seen, name])}",
                    where=("frames", seen[0], "in"),
                    value=self.frames[seen[0]].parent,
                    way_out="let one of them stand in world or base",
                )
            if name not in self.frames:
                where = ("frames", seen[-1], "in") if seen else ("frame",)
                if self.cell is not None:
                    self.cell.refuse_unseen(name, where)
                raise UnknownFrame(
                    f"there is no frame {name!r}",
                    where=where,
                    value=name,
                    way_out=one_of(name, [WORLD, BASE, *self.frames]),
                )
            seen.append(name)
            frame_in_world = self.frames[name].frame_in_parent @ frame_in_world
            name = self.frames[name].parent
        return self.base_in_world @ frame_in_world if name == BASE else frame_in_world

    def base_in_frame(self, name: str) -> FloatArray:
        """Return the pose of the base in a frame that does not move with the joints, (4, 4)."""
        if name == BASE:
            return np.eye(4)
        return inverse(self.frame_in_world(name)) @ self.base_in_world


def _with_number(item: tuple[str, Tool | NamedFrame]) -> str:
    name, thing = item
    return name if thing.number is None else f"{name} ({thing.number})"


def _check_combined(arm: Arm, index: int, combined: CombinedTravel) -> None:
    where = ("combined_travel", index)
    rows = arm.table.rows
    for number, ratio in combined.ratios.items():
        if not 1 <= number <= len(rows) or rows[number - 1].passive:
            driven = ", ".join(str(row + 1) for row in arm.drive_map.driven)
            raise InvalidArm(
                f"row {number} has no joint value to be bounded",
                where=(*where, "ratios", str(number)),
                value=number,
                way_out=f"use numbers of driven rows: {driven or 'there is none'}",
            )
        check_number(ratio, (*where, "ratios", str(number)))
    if not combined.ratios or len({rows[number - 1].unit for number in combined.ratios}) > 1:
        raise InvalidArm(
            "a combined travel needs joint values of one kind, all angles or all lengths",
            where=(*where, "ratios"),
            value=list(combined.ratios),
            way_out="name rows of one kind",
        )
    if not any(combined.ratios.values()):
        raise InvalidArm(
            "a combined travel with ratios of 0 alone bounds nothing",
            where=(*where, "ratios"),
            value=dict(combined.ratios),
            way_out="give at least one ratio other than 0",
        )
    check_travel(combined.travel, (*where, "travel"), f"combined travel {index + 1}")


def _check_scalars(arm: Arm) -> None:
    if arm.characteristic_length is not None:
        check_number(arm.characteristic_length, ("characteristic_length",))
        if arm.characteristic_length < SHORTEST_LENGTH:
            raise InvalidArm(
                f"the characteristic length is not positive, or below {SHORTEST_LENGTH:g} m",
                where=("characteristic_length",),
                value=arm.characteristic_length,
                way_out="give a length above 0, or leave it out",
            )
    if arm.joint_uncertainty and len(arm.joint_uncertainty) != arm.joint_count:
        raise InvalidArm(
            f"{len(arm.joint_uncertainty)} joint uncertainties for {arm.joint_count} joint values",
            where=("joint_uncertainty",),
            value=list(arm.joint_uncertainty),
            way_out="give one for each driven row",
        )
    for index, uncertainty in enumerate(arm.joint_uncertainty):
        check_number(uncertainty, ("joint_uncertainty", index))
        if uncertainty < 0:
            raise InvalidArm(
                "a standard uncertainty cannot be negative",
                where=("joint_uncertainty", index),
                value=uncertainty,
                way_out="give 0 or more",
            )
    near, singular = arm.thresholds.near, arm.thresholds.singular
    if not 0 < singular <= (singular if near is None else near) < 1:
        raise InvalidArm(
            "singularity thresholds must rise: 0 < singular <= near < 1",
            where=("singularity_thresholds",),
            value={"near": near, "singular": singular},
            way_out=f"leave them out for the defaults; singular is {SINGULAR} unless stated",
        )
