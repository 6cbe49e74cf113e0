"""Frames and what is known between them: any unknown pose by way of known ones, and every loop.

Relations are the edges of a graph. Each group of connected frames hangs together by as many
relations as it has frames, less one; every further relation closes a loop, and what the loop is
off by when walked around says whether the relations agree. Left out: what follows from the names
alone (connections), and which relations to believe (frame_estimate).
"""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

from kinematics.connections import Walks, connections_of
from kinematics.kernels.compiler import for_kernel
from kinematics.kernels.frame_poses import loops_walked, poses_along
from kinematics.number_checks import FloatArray


@dataclass(frozen=True, eq=False)
class Ways:
    """Ways from frame to frame along relations, loops among them.

    Attributes
    ----------
    walks : the relations and frames along each.
    poses : (ways, 4, 4), of each way's last frame in its first; of a loop what it is off by.
    """

    walks: Walks
    poses: FloatArray

    def __len__(self) -> int:
        return len(self.walks)


class FrameGraph:
    """Frames by name, the relations known between them, and the loops that these close.

    Parameters
    ----------
    of, within : names of the frames of each relation.
    of_in : (relations, 4, 4), rigid, m: the pose of frame ``of`` in frame ``within``.

    Attributes
    ----------
    connections : what follows from the names alone.
    names, inner, outer, group : its own, by their short names.

    Raises
    ------
    KinematicsError, TooLongWays : see Connections.

    Examples
    --------
    >>> import numpy as np
    >>> from kinematics.transforms import pose
    >>> raised = pose(np.eye(3), [[0, 0, 0.5], [0, 0, 0.25]])
    >>> graph = FrameGraph(["table", "lamp"], ["world", "world"], raised)
    >>> ways = graph.ways(["lamp"], ["table"])
    >>> ways.walks.frames[0], ways.poses[0, :3, 3].tolist()
    (['table', 'world', 'lamp'], [0.0, 0.0, -0.25])
    """

    def __init__(self, of: Sequence[str], within: Sequence[str], of_in: FloatArray) -> None:
        self.connections = connections_of(of, within)
        self.names, self.group = self.connections.names, self.connections.group
        self.inner, self.outer = self.connections.inner, self.connections.outer
        self.of_in = for_kernel(of_in)

    @property
    def loops(self) -> Ways:
        """All independent loops: relations - frames + groups of connected frames.

        Each is closed by one relation, through the fewest of the relations before it, and starts
        at the world, or else at the frame that was named first. Where a loop is turned by what it
        is off by, the distance it is off by depends on where it starts.

        Source
        ------
        Cycle space of a graph; Diestel, Graph Theory, 1.9.
        """
        return self._walked[0]

    @property
    def closures(self) -> tuple[FloatArray, FloatArray]:
        """What each loop is off by, (loops,) each.

        In m, a distance at the frame it starts at; and in rad, an angle of 0 to pi.
        """
        return self._walked[1:]

    def ways(self, of: Sequence[str], within: Sequence[str]) -> Ways:
        """Return the pose of each frame ``of`` in frame ``within``, by the fewest relations.

        Among ways of one length the relations given first win. A frame in itself is the identity.

        Raises
        ------
        UnknownFrame, NotConnected : ``where`` is the number of the pair, of UnknownFrame with
            ``"of"`` or ``"in"`` behind it.
        TooLongWays : ways of more than MOST_STEPS_TOLD relations in all.

        Source
        ------
        Composition of poses along a path: Craig, Introduction to Robotics, chapter 2.
        """
        walks = self.connections.walks(of, within)
        return Ways(walks, poses_along(self.of_in, walks.begins, walks.steps))

    @cached_property
    def _walked(self) -> tuple[Ways, FloatArray, FloatArray]:
        loops = self.connections.loops
        poses, position, angle = loops_walked(self.of_in, loops.begins, loops.steps)
        return Ways(loops, poses), position, angle
