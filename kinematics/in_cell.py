"""What an arm keeps of the cell it stands in: which one, and which of its frames are the cell's.

Left out: the cell itself (cell.py).
"""

from collections.abc import Mapping
from dataclasses import dataclass, field

from kinematics.errors import UnknownFrame


@dataclass(frozen=True)
class InCell:
    """The cell of an arm.

    Attributes
    ----------
    name, revision, digest : which cell, and which state of it; the digest tells all of it.
    places_arm : whether the arm has its base from the cell.
    frames : names of the arm's frames that are the cell's.
    unseen : names, and numbers, of the cell's frames that the arm does not see, and why not.
    way_out : what to do about those.
    """

    name: str
    revision: int
    digest: str
    places_arm: bool = False
    frames: frozenset[str] = frozenset()
    unseen: Mapping[str | int, str] = field(default_factory=dict)
    way_out: str = ""

    def refuse_unseen(self, frame: str | int, where: tuple[str, ...] = ("frame",)) -> None:
        """Refuse a frame of the cell that the arm does not see, saying why; pass over all others.

        Raises
        ------
        UnknownFrame

        Examples
        --------
        >>> InCell("press-cell", 1, "", unseen={"eye": "eye moves"}).refuse_unseen("eye")
        Traceback (most recent call last):
        kinematics.errors.UnknownFrame: eye moves
        """
        if frame in self.unseen:
            raise UnknownFrame(self.unseen[frame], where=where, value=frame, way_out=self.way_out)
