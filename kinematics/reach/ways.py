"""What is asked beside the targets, and what whoever answers for one freedom has to tell.

Left out: who answers (answers.py, spins.py, cones.py).
"""

from typing import NamedTuple, Protocol

from kinematics.reach.targets import Checks, TakesLonger, Targets
from kinematics.table import FloatArray


class Asked(NamedTuple):
    """What is asked beside the targets: the best posture alone, and near which joint values.

    Of a target beyond travel all postures are told. ``at_once`` asks to give up, by TakesLonger,
    before anything that takes milliseconds.
    """

    best_only: bool = False
    near: FloatArray | None = None
    at_once: bool = False

    def go_on(self) -> None:
        """Give up if what comes next is not done at once.

        Raises
        ------
        TakesLonger
        """
        if self.at_once:
            raise TakesLonger


class Basis(NamedTuple):
    """What answers rest on: an index into PROOFS, what a no is worth at best, and a sentence."""

    proof: int
    say: str


class Way(Protocol):
    """Answers targets of one freedom."""

    @property
    def basis(self) -> Basis: ...

    @property
    def seconds(self) -> float:
        """About how long a target takes."""

    def answer(self, targets: Targets, asked: Asked) -> Checks: ...
