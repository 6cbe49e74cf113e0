"""All relations that a question about frames rests on: its own, the cell's, and those of arms.

Left out: what is answered (frames.py) and stored arms and cells (questions.py, cells.py).
"""

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from kinematics.arm import BASE, FLANGE, Arm
from kinematics.arm_relations import LINK, ArmAtJoints, Relation
from kinematics.cell import Cell
from kinematics.errors import KinematicsError, NotConnected, UnknownFrame
from kinematics.frames import FrameGraph, Ways
from kinematics.table import FloatArray
from kinematics.tolerances import USUAL_ANGLE_SD, USUAL_POSITION_SD
from service.errors import MissingField
from service.wire.plain_relations import Relations

_OF_AN_ARM = frozenset({BASE, FLANGE, "tool"})
Where = tuple[str | int, ...]
NO_RELATIONS = Relations([], [], np.empty((0, 4, 4)), np.empty(0), np.empty(0))


@dataclass(frozen=True)
class Missing:
    """Where an arm's joint values would stand in the request; ``{arm}`` stands for its name."""

    where: Where
    way_out: str = 'give its joint values: {{"arm": "{arm}", "joints": [...]}} in "arms"'


@dataclass(frozen=True, eq=False)
class Network:
    """Frames and relations, those of the request first.

    Attributes
    ----------
    given : how many relations are the request's own.
    position_sd, angle_sd : (relations,), m and rad.
    arms : by name.
    still : arms whose joint values are not known, and where these should stand in the request.
    """

    graph: FrameGraph
    given: int
    position_sd: FloatArray
    angle_sd: FloatArray
    arms: Mapping[str, ArmAtJoints]
    still: Mapping[str, Missing]

    def ways(self, of: Sequence[str], within: Sequence[str]) -> Ways:
        """Return the ways between pairs of frames, named as in the request.

        Raises
        ------
        KinematicsError : ``where`` is the number of the pair, and ``"of"`` or ``"in"``.
        MissingField : joint values of an arm on the way.
        """
        nodes = [
            [whole_name(self.arms, name, (pair, side)) for pair, name in enumerate(names)]
            for side, names in (("of", of), ("in", within))
        ]
        try:
            return self.graph.ways(*nodes)
        except UnknownFrame as error:
            name = str(error.value)
            arm = name.partition(".")[0]
            if arm in self.still:
                why = f"to tell where its {name.removeprefix(arm)[1:]} is"
                raise self._joints_missing(arm, why) from None
            raise
        except NotConnected as error:
            pair = int(error.where[0])
            one, other = nodes[0][pair], nodes[1][pair]
            for arm in self._arms_between(one, other):
                raise self._joints_missing(arm, f"on the way from {other} to {one}") from None
            raise

    def _joints_missing(self, arm: str, why: str) -> MissingField:
        return MissingField(
            f"the joint values of {arm} are needed {why}",
            where=self.still[arm].where,
            way_out=self.still[arm].way_out.format(arm=arm),
        )

    def _arms_between(self, one: str, other: str) -> list[str]:
        """Return the arms on a way that their joint values would make; none if they would not."""
        graph, group = self.graph, self.graph.group
        known = set(graph.connections.known)
        arms = [arm for arm in self.still if {f"{arm}.{BASE}", f"{arm}.{FLANGE}"} <= known]
        # Groups of connected frames as frames, and the arms between them as relations.
        ends = [
            [
                str(number)
                for number in group[graph.connections.numbers_of([f"{arm}.{end}" for arm in arms])]
            ]
            for end in (FLANGE, BASE)
        ]
        between = [place for place in range(len(arms)) if ends[0][place] != ends[1][place]]
        flanges, bases = ([side[place] for place in between] for side in ends)
        first, last = (str(group[number]) for number in graph.connections.numbers_of([one, other]))
        groups = FrameGraph(flanges, bases, np.tile(np.eye(4), (len(between), 1, 1)))
        try:
            steps = groups.ways([first], [last]).walks.steps_of(0)
        except KinematicsError:
            return []
        return [arms[between[max(step, ~step)]] for step in steps]


def network_of(
    own: Relations,
    arms: Mapping[str, tuple[ArmAtJoints, Missing]],
    cell: Cell | None,
    asked: Iterable[str],
    missing: Missing,
) -> Network:
    """Return all frames and relations.

    Parameters
    ----------
    own : relations of the request itself.
    arms : by name, with where their joint values stand, or would, in the request.
    asked : names of frames that are asked for: links are told only where they are.
    missing : where those of an arm would stand that only the cell names.

    Raises
    ------
    KinematicsError : with ``where`` from the request's root.
    """
    if not arms and cell is None:
        graph = _graph(own.of, own.within, own.of_in)
        return Network(graph, len(own.of), own.position_sd, own.angle_sd, {}, {})
    at = {name: arm for name, (arm, _) in arms.items()}
    of, within = list(own.of), list(own.within)
    if at:
        for side, names in (("of", of), ("in", within)):
            names[:] = [
                whole_name(at, name, ("relations", number, side))
                for number, name in enumerate(names)
            ]
    told: list[Relation] = [] if cell is None else cell.relations()
    placed = {} if cell is None else cell.placements
    wanted = {*of, *within, *asked}
    for name, arm in at.items():
        links = [link for link in arm.links if f"{name}.{link}" in wanted]
        told += arm.relations(links, with_base=name not in placed or _has_own_base(arm.arm, cell))
    graph = _graph(
        of + [relation[0] for relation in told],
        within + [relation[1] for relation in told],
        np.concatenate([own.of_in, *(pose[None] for _, _, pose in told)]),
    )
    usual = np.ones(len(told))
    still = {name: absent for name, (arm, absent) in arms.items() if arm.joint_values is None}
    still |= {name: missing for name in placed if name not in at}
    return Network(
        graph,
        len(of),
        np.concatenate([own.position_sd, usual * USUAL_POSITION_SD]),
        np.concatenate([own.angle_sd, usual * USUAL_ANGLE_SD]),
        at,
        still,
    )


def _has_own_base(arm: Arm, cell: Cell | None) -> bool:
    """Return whether an arm that a cell places says itself where it stands: then both are known.

    Whether they agree is told by the loop they close.
    """
    same = arm.cell is not None and cell is not None and arm.cell.name == cell.name
    return not same and not np.array_equal(arm.base_in_world, np.eye(4))


def _graph(of: Sequence[str], within: Sequence[str], of_in: FloatArray) -> FrameGraph:
    try:
        return FrameGraph(of, within, of_in)
    except KinematicsError as error:
        raise error.below("relations") from None


def whole_name(arms: Mapping[str, ArmAtJoints], name: str, where: Where) -> str:
    """Return the name of a frame as the network has it.

    Raises
    ------
    UnknownFrame : an arm has no such frame, or it is not said whose it is.
    """
    arm, dot, frame = name.partition(".")
    if dot and arm in arms:
        try:
            return arms[arm].node(frame)
        except UnknownFrame as error:
            error.where, error.value = where, name
            raise
    if arms and not dot and (name in _OF_AN_ARM or name.startswith(LINK)):
        raise UnknownFrame(
            f"it is not said whose {name[:60]} is meant",
            where=where,
            value=name,
            way_out=f"say {' or '.join(f'{arm}.{name[:60]}' for arm in list(arms)[:3])}",
        )
    return name
