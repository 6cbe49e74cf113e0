"""The branch of a posture in plain words: on which side that which bends is bent.

"Wrist centre ahead of axis 1, elbow above, wrist turned over": each of these is a sign, and the
signs of a posture are the bits of a number that stands for the sentence, so that many postures cost
no words. Which side is called ahead, or the wrist turned over, is settled once for an arm: ahead is
where axis 2 is offset to, or else where the arm reaches in the middle of its travel; not turned
over is the wrist with its middle joint at +90 deg. Ways that share all words are numbered.

Source: none, plain geometry. Not covered: which features an arm has (arm_parts.py).
"""

from itertools import product
from typing import Any

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.inverse.screws import Screws
from kinematics.kernels.branch_signs import branch_codes, branch_signs
from kinematics.kernels.compiler import for_kernel
from kinematics.reach.arm_parts import BY_OFFSET, parts_of
from kinematics.reach.tolerances import BRANCH_LEVEL, BRANCH_SETTLED
from kinematics.table import FloatArray

_NUMBERS = ("", "second", "third", "fourth", "fifth", "sixth", "seventh", "eighth")


class Branches:
    """The branches of one arm with one tool.

    Attributes
    ----------
    sentences : what each number stands for.

    Examples
    --------
    >>> from kinematics.inverse.screws import screws_of
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = (Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0),) * 2
    >>> arm = Arm("planar", Table(Convention.STANDARD, rows))
    >>> branches = Branches(arm, screws_of(arm, np.eye(4)))
    >>> found = branches.of(np.array([[0.0, 1.0], [1.0, -1.0]]), np.array([0, 0]))
    >>> branches.sentences[found[0]]
    'elbow to the right, seen from above'
    """

    def __init__(self, arm: Arm, screws: Screws) -> None:
        parts = parts_of(screws, arm.base_in_world[2, :3])
        self._scale = np.where(screws.prismatic, 1.0 / screws.length, 1.0)
        self._lines = for_kernel(screws.axis), for_kernel(screws.point), screws.prismatic
        self._places, self._features = parts.for_kernel()
        reverse = [self._is_reversed(arm, *told) for told in enumerate(parts.by_posture)]
        self._turned = np.where(reverse, -1.0, 1.0)
        # The first feature is the lowest bit, and a set bit the second of its words.
        told = [", ".join(said[::-1]) for said in product(*parts.words[::-1])]
        self.sentences: tuple[str, ...] = tuple(
            _numbered(sentence, number) for number in _NUMBERS for sentence in told
        )

    def of(self, motions: FloatArray, target: NDArray[np.intp]) -> NDArray[np.int64]:
        """Return the branch of postures given by row motions (k, rows), rad and m, (k,).

        ``target`` (k,), ascending: which target each leads to.
        """
        codes = np.empty(len(motions), np.int64)
        signs = self._signs(motions)
        branch_codes(signs, self._turned, BRANCH_LEVEL, target, len(_NUMBERS), codes)
        return codes

    def for_kernel(self) -> tuple[Any, ...]:
        """Return what ``branch_signs`` and ``branch_codes`` take beside motions over the length."""
        parts = (*self._lines, self._places, self._features)
        return (*parts, self._turned, BRANCH_LEVEL, len(_NUMBERS))

    def _signs(self, motions: FloatArray) -> FloatArray:
        signs = np.empty((len(motions), len(self._features)))
        scaled = motions * self._scale
        branch_signs(scaled, *self._lines, self._places, self._features, signs)
        return signs

    def _is_reversed(self, arm: Arm, feature: int, quarter: int | None) -> bool:
        """Tell whether a feature's sign is to be turned about to mean what its words say."""
        if quarter is None:
            return False
        ahead = self._features[feature]
        if quarter == BY_OFFSET:
            offset = self._places[ahead[4], :3] @ self._offset_of(ahead)
            if abs(offset) > BRANCH_SETTLED:
                return bool(offset < 0.0)
        for motions in _postures(arm, quarter):
            sign = float(self._signs(motions[None])[0, feature])
            if abs(sign) > BRANCH_SETTLED:
                return sign < 0.0
        return False

    def _offset_of(self, ahead: NDArray[np.int64]) -> FloatArray:
        """Return the way from the axis of an AHEAD feature to the next one's, over the length."""
        row = int(self._places[ahead[1], 4])
        points = self._lines[1]
        return points[row + 1] - points[row] if row + 1 < len(points) else np.zeros(3)


def _postures(arm: Arm, quarter: int) -> list[FloatArray]:
    """Return row motions that settle which side is which: mid travel, and zero; or a quarter."""
    zero = np.zeros(arm.joint_count)
    if quarter >= 0:
        rows = arm.drive_map.driven
        joint = rows.index(quarter) if quarter in rows else len(rows) - 1
        zero[joint] = np.pi / 2
        return [arm.drive_map.motions(zero)]
    middle = zero.copy()
    for joint, row in enumerate(arm.drive_map.driven):
        travel = arm.table.rows[row].travel
        if travel is not None:
            middle[joint] = 0.5 * (travel.lower + travel.upper)
    return [arm.drive_map.motions(middle), arm.drive_map.motions(zero)]


def _numbered(sentence: str, number: str) -> str:
    if not sentence:
        return f"{number or 'first'} way"
    return f"{sentence}, {number} such" if number else sentence
