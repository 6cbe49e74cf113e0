"""What is said last of targets that nothing was found for: proved out of reach, met, or neither.

Idea: whatever the arm, travel can be cut into boxes of postures that miss the target, if there is
time (inverse/branch_and_bound.py). The boxes of one question are shared among the targets that are
left: those that need few leave theirs to the others. What is proved so is proved numerically.

Source: as of branch_and_bound.py. Not covered: which targets are worth it (answers.py).
"""

from dataclasses import replace
from functools import cached_property
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.inverse.branch_and_bound import BranchAndBound
from kinematics.inverse.found import TRAVEL, Found, none_found
from kinematics.inverse.measured import errors_of, wrapped
from kinematics.inverse.several import joined
from kinematics.inverse.solve import Method
from kinematics.inverse.tolerances import BOX_BUDGET, BOX_BUDGET_OF_MANY, BOXES_TO_CONFIRM
from kinematics.reach.targets import Targets
from kinematics.reach.tolerances import EXACT_REACH
from kinematics.reach.verdicts import Ranking
from kinematics.table import FloatArray

_SELDOM_BEYOND = 6
"""Joints beyond which even a million boxes seldom prove anything, so that a second is not spent."""


class Proofs(NamedTuple):
    """What cutting travel into boxes came to, for m targets.

    Attributes
    ----------
    proved : (m,), no posture within travel gets there. boxes : (m,), looked at for each; 0 where
        it was not asked, or does not apply.
    met : the postures that were met instead; and of what is proved, one beyond travel where it is
        known.
    """

    proved: NDArray[np.bool_]
    boxes: NDArray[np.int64]
    met: Found

    def added_to(self, found: Found) -> Found:
        """Return what was found with the postures that were met."""
        if not len(self.met.target):
            return found
        unchanged = replace(
            self.met,
            open=found.open,
            stage=found.stage,
            shortfall=found.shortfall,
            nearest=found.nearest,
        )
        return joined(found, unchanged, np.arange(len(found.open)))


class LastProof:
    """Asks by boxes whether one arm with one tool gets to targets of one task."""

    def __init__(self, ranking: Ranking, method: Method) -> None:
        self._ranking, self._method = ranking, method

    @cached_property
    def _boxes(self) -> BranchAndBound:
        method = self._method
        return BranchAndBound(method.arm, method.tool_in_flange, method.task)

    @property
    def applies(self) -> bool:
        """Whether the arm's travel can be cut into boxes."""
        return self._boxes.applies

    def of(
        self, targets: Targets, left: NDArray[np.intp], known: Found, refused: NDArray[np.bool_]
    ) -> Proofs:
        """Return what is proved of the targets ``left``.

        Parameters
        ----------
        known : what a solver told of all. refused : (m,), targets that a complete one refuses,
            which are looked at for ``BOXES_TO_CONFIRM`` at most.
        """
        alone = len(left) == 1 and self._ranking.arm.joint_count <= _SELDOM_BEYOND
        count, budget = len(targets), BOX_BUDGET if alone else BOX_BUDGET_OF_MANY
        proved, boxes = np.zeros(count, np.bool_), np.zeros(count, np.int64)
        met: dict[int, FloatArray] = {}
        allowed = self._allowed(targets)
        for place, index in enumerate(left.tolist() if self.applies else []):
            share = budget // (len(left) - place)
            share = min(share, BOXES_TO_CONFIRM) if refused[index] else share
            outcome = self._boxes.ask(targets.tool_in_base[index], allowed[index], share)
            proved[index], boxes[index] = outcome.proved, outcome.boxes
            budget -= outcome.boxes
            if outcome.witness is not None:
                met[index] = self._ranking.arm.drive_map.motions(outcome.witness)
            elif outcome.proved and known.stage[index] == TRAVEL:
                met[index] = known.nearest[index]
        return Proofs(proved, boxes, self._found(targets, met))

    def _allowed(self, targets: Targets) -> FloatArray:
        """Return by how much each target may be missed, (m, 2), metres and rad."""
        if not self._ranking.exact:
            return self._ranking.allowed(targets)
        exact = EXACT_REACH * np.array([self._ranking.screws.length, 1.0])
        return np.tile(exact, (len(targets), 1))

    def _found(self, targets: Targets, met: dict[int, FloatArray]) -> Found:
        screws, none = self._ranking.screws, none_found(len(targets), self._ranking.screws.rows)
        if not met:
            return none
        motions = wrapped(np.array(list(met.values())), screws.prismatic)
        target = np.array(list(met), np.intp)
        errors = errors_of(screws, motions, targets.tool_in_base, target, self._method.task)
        return replace(
            none, motions=motions, target=target, position_error=errors[0], angle_error=errors[1]
        )
