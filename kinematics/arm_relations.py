"""An arm at given joint values as relations between its frames: base, links, flange, tools.

Left out: frames that are the cell's; the cell tells its own relations (cell).
"""

from collections.abc import Collection
from dataclasses import dataclass

from kinematics.arm import BASE, FLANGE, WORLD, Arm
from kinematics.chain import walk
from kinematics.errors import UnknownFrame
from kinematics.known_names import way_out_of_unknown
from kinematics.number_checks import FloatArray

LINK = "link-"
Relation = tuple[str, str, FloatArray]
"""Names of frames ``of`` and ``in``, and the pose (4, 4) of the one in the other."""


@dataclass(frozen=True, eq=False)
class ArmAtJoints:
    """An arm and its joint values, (joints,), or None where these are not known.

    Its frames are called ``<arm>.base``, ``<arm>.flange``, ``<arm>.link-3``, ``<arm>.<tool>`` and
    ``<arm>.<frame>``.
    """

    arm: Arm
    joint_values: FloatArray | None

    def node(self, frame: str) -> str:
        """Return the whole name of one of the arm's frames; world and the cell's have no arm.

        Raises
        ------
        UnknownFrame : with the nearest name.

        Examples
        --------
        >>> from kinematics.table import Convention, Table
        >>> lift = ArmAtJoints(Arm("lift", Table(Convention.STANDARD, ())), None)
        >>> lift.node("link-0"), lift.node("world")
        ('lift.link-0', 'world')
        """
        if frame in self._own_frames or frame in self.links:
            return f"{self.arm.name}.{frame}"
        if frame == WORLD or frame in self._cell_frames:
            return frame
        known = [*self._own_frames, *self.links, *self._cell_frames]
        raise UnknownFrame(
            f"{self.arm.name} has no frame {frame[:60]!r}",
            value=frame,
            way_out=way_out_of_unknown(frame, known),
        )

    def relations(self, links: Collection[str] = (), *, with_base: bool = True) -> list[Relation]:
        """Return where the arm's frames are, each in the one that carries it.

        Parameters
        ----------
        links : which of ``link-0`` ... are wanted.
        with_base : whether the base's place in the world is told; not where the cell tells it.

        Examples
        --------
        >>> import numpy as np
        >>> from kinematics.table import Convention, Table
        >>> lift = ArmAtJoints(Arm("lift", Table(Convention.STANDARD, ())), np.empty(0))
        >>> [(of, within) for of, within, _ in lift.relations()]
        [('lift.base', 'world'), ('lift.flange', 'lift.base')]
        """
        arm, own = self.arm, self._own_frames
        base, flange = self.node(BASE), self.node(FLANGE)
        told: list[Relation] = [(base, WORLD, arm.base_in_world)] if with_base else []
        if self.joint_values is not None:
            walked = walk(arm, self.joint_values)
            told.append((flange, base, walked.flange_in_base))
            told += [
                (self.node(link), base, walked.link_in_base[int(link.removeprefix(LINK))])
                for link in links
            ]
        told += [(self.node(name), flange, tool.tool_in_flange) for name, tool in arm.tools.items()]
        told += [
            (self.node(name), self.node(frame.parent), frame.frame_in_parent)
            for name, frame in arm.frames.items()
            if name in own
        ]
        return told

    @property
    def links(self) -> Collection[str]:
        """Names of all link frames, without the arm's."""
        return [f"{LINK}{number}" for number in range(len(self.arm.table.rows) + 1)]

    @property
    def _own_frames(self) -> Collection[str]:
        of_cell = () if self.arm.cell is None else self.arm.cell.frames
        own = [name for name in self.arm.frames if name not in of_cell]
        return [BASE, FLANGE, *self.arm.tools, *own]

    @property
    def _cell_frames(self) -> Collection[str]:
        """Names of the cell's frames, also of those that the arm does not see: they move."""
        cell = self.arm.cell
        if cell is None:
            return ()
        return [*cell.frames, *(name for name in cell.unseen if isinstance(name, str))]
