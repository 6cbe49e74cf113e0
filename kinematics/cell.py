"""A cell: what several arms share. Arms placed in it, frames in the world, in each other, on arms.

Left out: joint values. What hangs on the flange of an arm moves with it, and is told apart from
what stands still; where it is at given joint values is a matter of relations (frames).
"""

from collections.abc import Collection, Iterable, Mapping
from dataclasses import dataclass, field
from typing import NamedTuple

import numpy as np

from kinematics.arm import BASE, FLANGE, WORLD, NamedFrame
from kinematics.errors import InvalidCell, TooManyPlaced, UnknownFrame
from kinematics.known_names import way_out_of_unknown
from kinematics.number_checks import refuse_shared_numbers
from kinematics.table import FloatArray
from kinematics.tolerances import MOST_PLACED

MOST_TOLD = 12
"""Names of a circle that a refusal says: more are not read."""


@dataclass(frozen=True, eq=False)
class Placed:
    """Where an arm's base or a frame is: its pose in ``parent``.

    Attributes
    ----------
    parent : ``world``, a frame of the cell, ``<arm>.base`` or ``<arm>.flange``.
    pose_in_parent : (4, 4), m.
    number : what a controller knows a frame by; None for an arm.
    """

    parent: str
    pose_in_parent: FloatArray
    number: int | None = None


@dataclass(frozen=True, eq=False)
class Anchored:
    """Where a frame or base is fixed: its pose in what it never moves against.

    Attributes
    ----------
    anchor : ``world``, or the ``<arm>.flange`` that carries it.
    pose_in_anchor : (4, 4), m.
    """

    anchor: str
    pose_in_anchor: FloatArray


class Seen(NamedTuple):
    """A cell as one arm sees it: its base, or None, frames that stand still, and what moves."""

    base_in_world: FloatArray | None
    frames: dict[str, NamedFrame]
    unseen: dict[str | int, str]


@dataclass(frozen=True, eq=False)
class Cell:
    """A checked cell; SI units throughout. Two cells are the same only if they are one object.

    Attributes
    ----------
    placements : where the base of each arm is, by the arm's name; the arm need not be stored.
    frames : by name.

    Raises
    ------
    InvalidCell : things stand in each other in a circle, or two frames have one number.
    TooManyPlaced : more than MOST_PLACED arms or frames.
    UnknownFrame : a parent that is not in the cell.
        ``where`` leads to ``in`` or ``number`` of the arm or frame.

    Examples
    --------
    >>> shelf = Placed("world", np.eye(4))
    >>> store = Cell("store", {}, {"shelf": shelf, "bin": Placed("shelf", np.eye(4))})
    >>> store.anchored("bin").anchor
    'world'
    """

    name: str
    placements: Mapping[str, Placed] = field(default_factory=dict)
    frames: Mapping[str, Placed] = field(default_factory=dict)
    _anchored: dict[str, Anchored] = field(init=False, repr=False, default_factory=dict)

    def __post_init__(self) -> None:
        _refuse_too_many(self)
        numbers = {name: frame.number for name, frame in self.frames.items()}
        refuse_shared_numbers("frames", numbers, InvalidCell)
        nodes = self._nodes()
        known = {WORLD, *nodes, *self._flanges()}
        for node, placed in nodes.items():
            if placed.parent not in known:
                raise _unknown_parent(node, placed.parent, known)
        for node in _parents_first(nodes, self._flanges()):
            if node == WORLD or node not in nodes:
                self._anchored[node] = Anchored(node, np.eye(4))
            else:
                below = self._anchored[nodes[node].parent]
                pose_in_anchor = below.pose_in_anchor @ nodes[node].pose_in_parent
                self._anchored[node] = Anchored(below.anchor, pose_in_anchor)

    def relations(self) -> list[tuple[str, str, FloatArray]]:
        """Return what the cell says as (of, in, pose of the one in the other), poses (4, 4).

        Nodes are ``world``, names of frames, ``<arm>.base`` and ``<arm>.flange``.

        Examples
        --------
        >>> press = Cell("press-cell", {"press-arm": Placed("world", np.eye(4))})
        >>> [(of, within) for of, within, _ in press.relations()]
        [('press-arm.base', 'world')]
        """
        return [
            (node, placed.parent, placed.pose_in_parent) for node, placed in self._nodes().items()
        ]

    def anchored(self, node: str) -> Anchored:
        """Return where a node is fixed: the world, or the flange that carries it.

        Parameters
        ----------
        node : ``world``, the name of a frame, ``<arm>.base`` or ``<arm>.flange``.

        Raises
        ------
        UnknownFrame
        """
        if node not in self._anchored:
            raise UnknownFrame(
                f"cell {self.name} has no frame {node!r}",
                where=("frame",),
                value=node,
                way_out=way_out_of_unknown(node, self._anchored),
            )
        return self._anchored[node]

    def seen_by(self, arm: str, taken: Collection[str], numbers: Collection[int]) -> Seen:
        """Return base and frames as an arm sees them that says it stands in this cell.

        A frame of the arm's own goes before one of the cell with the same name, and so does its
        number. What moves on a flange has no pose that holds at all joint values: it is unseen.

        Parameters
        ----------
        arm : its name; it need not be placed.
        taken : names of the arm's own tools and frames.
        numbers : of the arm's own frames.

        Raises
        ------
        InvalidCell : the arm is carried by another one, so that its base has no fixed place.

        Examples
        --------
        >>> press = Cell("press-cell", frames={"bin": Placed("world", np.eye(4), number=3)})
        >>> press.seen_by("press-arm", [], []).frames["bin"].number
        3
        """
        base_in_world = None
        if arm in self.placements:
            base = self._anchored[f"{arm}.{BASE}"]
            if base.anchor != WORLD:
                raise InvalidCell(
                    f"cell {self.name} has {arm} carried by {base.anchor}: its base has no place "
                    "in the world that holds at all joint values",
                    where=("cell",),
                    value=self.name,
                    way_out="leave the cell out of the arm",
                )
            base_in_world = base.pose_in_anchor
        frames: dict[str, NamedFrame] = {}
        unseen: dict[str | int, str] = {}
        for name, placed in self.frames.items():
            if name in taken:
                continue
            at = self._anchored[name]
            number = None if placed.number in numbers else placed.number
            if at.anchor == WORLD:
                frames[name] = NamedFrame(at.pose_in_anchor, WORLD, number)
            else:
                say = f"frame {name} of cell {self.name} moves with {at.anchor}"
                unseen.update(dict.fromkeys([name] if number is None else [name, number], say))
        return Seen(base_in_world, frames, unseen)

    def _nodes(self) -> dict[str, Placed]:
        bases = {f"{arm}.{BASE}": placed for arm, placed in self.placements.items()}
        return {**self.frames, **bases}

    def _flanges(self) -> list[str]:
        return [f"{arm}.{FLANGE}" for arm in self.placements]


def _parents_first(nodes: Mapping[str, Placed], flanges: Iterable[str]) -> list[str]:
    """Return world, nodes and flanges in an order in which each comes after what it stands on.

    Raises
    ------
    InvalidCell : there is none, since some stand in each other in a circle.
    """
    ordered = {WORLD: None}
    for node in (*nodes, *flanges):
        walked: dict[str, None] = {}
        at = node
        while at not in ordered:
            if at in walked:
                circle = list(walked)
                raise _circle(circle[circle.index(at) :], nodes)
            walked[at] = None
            at = nodes[at].parent if at in nodes else f"{at.removesuffix(FLANGE)}{BASE}"
        ordered.update(dict.fromkeys(reversed(walked)))
    return list(ordered)


def _circle(circle: list[str], nodes: Mapping[str, Placed]) -> InvalidCell:
    first = next(node for node in circle if node in nodes)
    itself = circle == [first]
    told = circle if len(circle) <= MOST_TOLD else [*circle[: MOST_TOLD - 1], "..."]
    return InvalidCell(
        f"{first} stands in itself"
        if itself
        else f"these stand in each other in a circle: {' in '.join([*told, circle[0]])}",
        where=(*_where(first), "in"),
        value=nodes[first].parent,
        way_out="let it stand in something else" if itself else "let one of them stand in world",
    )


def _unknown_parent(node: str, parent: str, known: Collection[str]) -> UnknownFrame:
    if parent in (BASE, FLANGE):
        whose = [name for name in known if name.endswith(f".{parent}")]
        way_out = f"say whose {parent}: {', '.join(sorted(whose)[:MOST_TOLD]) or 'place an arm'}"
    else:
        way_out = way_out_of_unknown(parent, known)
    return UnknownFrame(
        f"the cell has no {parent!r} for {node} to stand in",
        where=(*_where(node), "in"),
        value=parent,
        way_out=way_out,
    )


def _where(node: str) -> tuple[str, str]:
    # Names have no dot, so this tells the base of an arm from a frame.
    arm, dot, _ = node.partition(".")
    return ("arms", arm) if dot else ("frames", node)


def _refuse_too_many(cell: Cell) -> None:
    for what, things in (("arms", cell.placements), ("frames", cell.frames)):
        if len(things) > MOST_PLACED:
            raise TooManyPlaced(
                f"the cell has {len(things)} {what}",
                where=(what,),
                value=len(things),
                way_out=f"at most {MOST_PLACED}; divide the cell",
            )
