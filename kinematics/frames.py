"""Frames and what is known between them: any unknown pose by way of known ones, and every loop.

Relations are the edges of a graph. Each group of connected frames hangs together by as many
relations as it has frames, less one; every further relation closes a loop, and what the loop is
off by when walked around says whether the relations agree. Left out: which of them to believe
(frame_estimate).
"""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property
from itertools import chain

import numpy as np

from kinematics.arm import WORLD
from kinematics.errors import KinematicsError, NotConnected, TooLongWays, UnknownFrame
from kinematics.kernels.compiler import for_kernel
from kinematics.kernels.frame_graph import IntArray
from kinematics.kernels.frame_poses import loops_closed, ways_found
from kinematics.known_names import way_out_of_unknown
from kinematics.number_checks import FloatArray

MOST_STEPS_TOLD = 1_000_000
"""Relations along all loops, or all ways asked for: ten megabytes of names. A hundred thousand are
met in networks of thousands of frames."""

MOST_NAMES_TOLD = 12
"""Names of a group in a refusal; more are counted."""


@dataclass(frozen=True, eq=False)
class Ways:
    """Ways from frame to frame along relations, loops among them.

    Attributes
    ----------
    begins : (ways + 1,), where the steps of each way begin.
    steps : numbers of relations; ~k is relation k taken backwards.
    starts : name of the frame each way starts at.
    poses : (ways, 4, 4), of each way's last frame in its first; of a loop what it is off by.
    """

    begins: IntArray
    steps: IntArray
    starts: list[str]
    poses: FloatArray

    def __len__(self) -> int:
        return len(self.starts)

    def steps_of(self, way: int) -> list[int]:
        """Return the steps of one way."""
        steps: list[int] = self.steps[self.begins[way] : self.begins[way + 1]].tolist()
        return steps


class FrameGraph:
    """Frames by name, the relations known between them, and the loops that these close.

    Parameters
    ----------
    of, within : names of the frames of each relation.
    of_in : (relations, 4, 4), rigid, m: the pose of frame ``of`` in frame ``within``.

    Attributes
    ----------
    names : of the frames by number: the world, then as first named. A world that no relation
        names is there and connected with nothing.
    inner, outer : (relations,), numbers of the frames ``within`` and ``of``.
    group : (frames,), lowest number that each frame is connected with.
    closures : (loops,) each, m and rad: what each loop is off by, a distance at the frame it
        starts at, and an angle of 0 to pi.

    Raises
    ------
    KinematicsError : a frame is given in itself; ``where`` is the relation's number.
    TooLongWays : loops of more than MOST_STEPS_TOLD relations in all.

    Examples
    --------
    >>> from kinematics.transforms import pose
    >>> raised = pose(np.eye(3), [[0, 0, 0.5], [0, 0, 0.25]])
    >>> graph = FrameGraph(["table", "lamp"], ["world", "world"], raised)
    >>> ways = graph.ways(["lamp"], ["table"])
    >>> graph.frames_of(ways)[0], ways.poses[0, :3, 3].tolist()
    (['table', 'world', 'lamp'], [0.0, 0.0, -0.25])
    """

    def __init__(self, of: Sequence[str], within: Sequence[str], of_in: FloatArray) -> None:
        if any(one == other for one, other in zip(of, within, strict=True)):
            raise _in_itself(next(k for k, name in enumerate(of) if name == within[k]), of)
        named = dict.fromkeys(chain.from_iterable(zip(within, of, strict=True)))
        self._is_world_named = WORLD in named
        self.names = [WORLD, *(name for name in named if name != WORLD)]
        self._number = {name: number for number, name in enumerate(self.names)}
        self.inner: IntArray = np.array([self._number[name] for name in within], dtype=np.int64)
        self.outer: IntArray = np.array([self._number[name] for name in of], dtype=np.int64)
        self._of, self._within = of, within
        self.of_in = for_kernel(of_in)
        closed = loops_closed(self.inner, self.outer, len(self.names), self.of_in)
        self.group: IntArray = closed[2]
        self._arcs = closed[3], closed[4]
        self._loops = closed[0], closed[1], closed[5]
        _refuse_too_long(len(closed[1]), "loops")
        self.closures: tuple[FloatArray, FloatArray] = closed[6], closed[7]

    @property
    def known(self) -> list[str]:
        """Names of all frames that a relation names."""
        return self.names if self._is_world_named else self.names[1:]

    @cached_property
    def loops(self) -> Ways:
        """All independent loops: relations - frames + groups of connected frames.

        Each is closed by one relation, through the fewest of the relations before it, and starts
        at the world, or else at the frame that was named first. Where a loop is turned by what it
        is off by, the distance it is off by depends on where it starts.

        Source
        ------
        Cycle space of a graph; Diestel, Graph Theory, 1.9.
        """
        begins, steps, poses = self._loops
        first = steps[begins[:-1]].tolist()
        starts = [self._within[step] if step >= 0 else self._of[~step] for step in first]
        return Ways(begins, steps, starts, poses)

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
        starts, ends = self.numbers_of(within, "in"), self.numbers_of(of, "of")
        group = self.group
        for pair, (start, end) in enumerate(zip(starts, ends, strict=True)):
            if group[start] != group[end]:
                raise self.not_connected(of[pair], within[pair]).below(pair)
        first_arc, next_arc = self._arcs
        ends_of = np.array([starts, ends], dtype=np.int64)
        begins, steps, poses = ways_found(
            *(self.inner, self.outer, first_arc, next_arc),
            *(ends_of[0], ends_of[1], self.of_in, MOST_STEPS_TOLD),
        )
        _refuse_too_long(len(steps), "ways asked for")
        return Ways(begins, steps, list(within), poses)

    def frames_of(self, ways: Ways) -> list[list[str]]:
        """Return the names of the frames along each way, first and last among them."""
        of, within, begins = self._of, self._within, ways.begins.tolist()
        arrived = [of[step] if step >= 0 else within[~step] for step in ways.steps.tolist()]
        return [
            [start, *arrived[begin:end]]
            for start, begin, end in zip(ways.starts, begins[:-1], begins[1:], strict=True)
        ]

    def numbers_of(self, names: Sequence[str], side: str = "of") -> list[int]:
        """Return the numbers of frames.

        Raises
        ------
        UnknownFrame : with the nearest name; ``where`` is the place in ``names`` and ``side``.
        """
        numbers = [self._number.get(name, -1) for name in names]
        for place, number in enumerate(numbers):
            if number < 0 or (number == 0 and not self._is_world_named):
                raise UnknownFrame(
                    f"no relation names a frame {names[place]!r}",
                    where=(place, side),
                    value=names[place],
                    way_out=way_out_of_unknown(names[place], self.known),
                )
        return numbers

    def not_connected(self, of: str, within: str) -> NotConnected:
        """Return the refusal that says which group each of two frames belongs to."""
        groups = [self.group[self._number[name]] for name in (of, within)]
        told = [
            self._group_in_words(name, group)
            for name, group in zip((of, within), groups, strict=True)
        ]
        return NotConnected(
            f"no relations lead from {within} to {of}: {told[0]}; {told[1]}",
            value=[of, within],
            way_out="give a relation between a frame of the one group and one of the other",
        )

    def _group_in_words(self, name: str, group: int) -> str:
        others = [self.names[number] for number in np.flatnonzero(self.group == group).tolist()]
        others.remove(name)
        if not others:
            return f"{name} is connected with nothing"
        more = len(others) - MOST_NAMES_TOLD
        told = others[:MOST_NAMES_TOLD] + ([f"{more} more"] if more > 0 else [])
        return f"{name} is connected with {', '.join(told)}"


def _refuse_too_long(steps: int, what: str) -> None:
    if steps >= MOST_STEPS_TOLD:
        raise TooLongWays(
            f"the {what} take {steps} relations or more in all",
            value=steps,
            way_out=f"below {MOST_STEPS_TOLD}: ask in several requests, or leave out relations "
            "that only link one frame to the next",
        )


def _in_itself(relation: int, of: Sequence[str]) -> KinematicsError:
    return KinematicsError(
        f"{of[relation]} is given in itself",
        where=(relation,),
        value=of[relation],
        way_out="a frame in itself is always the identity: name the other frame, or leave the "
        "relation out",
    )
