"""How frames hang together, whatever the poses: names, groups, loops, and ways from one to another.

Whoever measures a hall again asks about the same frames again, so what follows from the names of a
few relations is kept. Left out: poses (frames.py).
"""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property, lru_cache
from itertools import chain

import numpy as np

from kinematics.arm import WORLD
from kinematics.errors import KinematicsError, NotConnected, TooLongWays, UnknownFrame
from kinematics.kernels.frame_graph import IntArray, close_loops, shortest_ways
from kinematics.known_names import way_out_of_unknown

MOST_STEPS_TOLD = 1_000_000
"""Relations along all loops, or all ways asked for: ten megabytes of names. A hundred thousand are
met in networks of thousands of frames."""

MOST_NAMES_TOLD = 12
"""Names of a group in a refusal; more are counted."""

MOST_STEPS_SAID = 12
"""Poses of a product that is said; of longer ones the number is."""

MOST_RELATIONS_KEPT = 100
NETWORKS_KEPT = 64
"""Networks that are kept, those asked for last, of so many relations at most: 20 kB each as met,
some 200 kB where loops and ways asked for are as many and as long as they can be."""


@dataclass(frozen=True, eq=False)
class Walks:
    """Walks from frame to frame along relations.

    Attributes
    ----------
    begins : (walks + 1,), where the steps of each begin.
    steps : numbers of relations; ~k is relation k taken backwards.
    starts : name of the frame each one starts at.
    of, within : names of the frames of each relation.
    """

    begins: IntArray
    steps: IntArray
    starts: Sequence[str]
    of: Sequence[str]
    within: Sequence[str]

    def __len__(self) -> int:
        return len(self.starts)

    def steps_of(self, walk: int) -> list[int]:
        """Return the steps of one walk."""
        steps: list[int] = self.steps[self.begins[walk] : self.begins[walk + 1]].tolist()
        return steps

    @cached_property
    def frames(self) -> list[list[str]]:
        """Names of the frames along each walk, first and last among them."""
        of, within, begins = self.of, self.within, self.begins.tolist()
        arrived = [of[step] if step >= 0 else within[~step] for step in self.steps.tolist()]
        return [
            [start, *arrived[begin:end]]
            for start, begin, end in zip(self.starts, begins[:-1], begins[1:], strict=True)
        ]

    @cached_property
    def products(self) -> list[str]:
        """What each walk's pose is the product of, in words; of long ones how many poses."""
        return [_product(self.steps_of(walk), frames) for walk, frames in enumerate(self.frames)]


class Connections:
    """Frames by name, which of them are connected, and the loops that relations close.

    Parameters
    ----------
    of, within : names of the frames of each relation.

    Attributes
    ----------
    names : of the frames by number: the world, then as first named. A world that no relation
        names is there and connected with nothing.
    inner, outer : (relations,), numbers of the frames ``within`` and ``of``.
    group : (frames,), lowest number that each frame is connected with.
    loops : all independent loops.

    Raises
    ------
    KinematicsError : a frame is given in itself; ``where`` is the relation's number.
    TooLongWays : loops of more than MOST_STEPS_TOLD relations in all.

    Examples
    --------
    >>> connections = Connections(["table", "lamp"], ["world", "world"])
    >>> connections.walks(["lamp"], ["table"]).frames
    [['table', 'world', 'lamp']]
    """

    def __init__(self, of: Sequence[str], within: Sequence[str]) -> None:
        if any(map(str.__eq__, of, within)):
            raise _in_itself(next(k for k, name in enumerate(of) if name == within[k]), of)
        named = dict.fromkeys(chain.from_iterable(zip(within, of, strict=True)))
        self._is_world_named = WORLD in named
        self.names = [WORLD, *(name for name in named if name != WORLD)]
        self._number = {name: number for number, name in enumerate(self.names)}
        self.inner: IntArray = np.array([self._number[name] for name in within], dtype=np.int64)
        self.outer: IntArray = np.array([self._number[name] for name in of], dtype=np.int64)
        self._of, self._within = of, within
        begins, steps, group, *self._arcs = close_loops(self.inner, self.outer, len(self.names))
        _refuse_too_long(len(steps), "loops")
        self.group: IntArray = group
        first = steps[begins[:-1]].tolist()
        starts = [within[step] if step >= 0 else of[~step] for step in first]
        self.loops = Walks(begins, steps, starts, of, within)
        self._asked_last: tuple[tuple[Sequence[str], Sequence[str]], Walks] | None = None

    @property
    def known(self) -> list[str]:
        """Names of all frames that a relation names."""
        return self.names if self._is_world_named else self.names[1:]

    def walks(self, of: Sequence[str], within: Sequence[str]) -> Walks:
        """Return the way from each frame ``within`` to frame ``of`` by the fewest relations.

        Raises
        ------
        UnknownFrame, NotConnected, TooLongWays : as FrameGraph.ways.
        """
        last, pairs = self._asked_last, (of, within)
        if last is not None and last[0] == pairs:
            return last[1]
        starts, ends = self.numbers_of(within, "in"), self.numbers_of(of, "of")
        group = self.group
        for pair, (start, end) in enumerate(zip(starts, ends, strict=True)):
            if group[start] != group[end]:
                raise self.not_connected(of[pair], within[pair]).below(pair)
        ends_of = np.array([starts, ends], dtype=np.int64)
        first_arc, next_arc = self._arcs
        begins, steps = shortest_ways(
            *(self.inner, self.outer, first_arc, next_arc, ends_of[0], ends_of[1]), MOST_STEPS_TOLD
        )
        _refuse_too_long(len(steps), "ways asked for")
        found = Walks(begins, steps, list(within), self._of, self._within)
        if len(starts) <= MOST_RELATIONS_KEPT:
            self._asked_last = (list(of), list(within)), found
        return found

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


def connections_of(of: Sequence[str], within: Sequence[str]) -> Connections:
    """Return how frames hang together, what was found before where the same names come again.

    Raises
    ------
    KinematicsError, TooLongWays : see Connections.

    Examples
    --------
    >>> connections_of(["lamp"], ["table"]) is connections_of(["lamp"], ["table"])
    True
    """
    if len(of) > MOST_RELATIONS_KEPT:
        return Connections(of, within)
    return _kept(tuple(of), tuple(within))


@lru_cache(maxsize=NETWORKS_KEPT)
def _kept(of: tuple[str, ...], within: tuple[str, ...]) -> Connections:
    return Connections(of, within)


def _product(steps: Sequence[int], frames: Sequence[str]) -> str:
    whole = f"{frames[-1]} in {frames[0]}"
    if not steps:
        return f"{whole} is the identity"
    if len(steps) > MOST_STEPS_SAID:
        return f"{whole} by {len(steps)} relations"
    factors = [
        f"({there} in {here})" if step >= 0 else f"({here} in {there})^-1"
        for step, here, there in zip(steps, frames[:-1], frames[1:], strict=True)
    ]
    return f"{whole} = {' '.join(factors)}"


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
