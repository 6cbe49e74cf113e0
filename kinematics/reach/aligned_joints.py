"""Families of two joints in line: what one turns the other turns back.

Where two axes are one line in a posture (a wrist straight, a gantry's tool hanging down), the one
joint can be turned by any angle and the other against it; what lies between turns about their line
and the tool stays. So the sum of both (or the difference, as they count) is the family's own, its
interval is where both are within travel, and its best posture where the lesser of their margins is
largest: a crossing of two straight lines. No curve need be followed, and it takes a tenth of the
time. By whole turns there may be several such sums within travel, and each is a family.

Source: none, plain geometry. Not covered: joints without travel or coupled to others, more lost
motions than one, and axes that are not quite in line (families_of follows those).
"""

from itertools import combinations

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.inverse.landing import columns_of, land
from kinematics.inverse.measured import POSE, errors_of
from kinematics.inverse.screws import Screws
from kinematics.kernels.compiler import for_kernel
from kinematics.reach.targets import Family
from kinematics.reach.tolerances import EXACT_REACH, FAMILY_MEMBER
from kinematics.table import FloatArray, Travel
from kinematics.tolerances import LOST_RANK, TRAVEL_EDGE
from kinematics.travel_limits import travel_margin

TURN = 2.0 * np.pi


class AlignedJoints:
    """Finds the families of postures of one arm with one tool whose joints are in line."""

    def __init__(self, arm: Arm, screws: Screws) -> None:
        self._arm, self._screws = arm, screws
        self._scale = np.where(screws.prismatic, 1.0 / screws.length, 1.0)
        self._lines = for_kernel(screws.axis), for_kernel(screws.point), screws.prismatic
        self._tool = for_kernel(screws.tool_at_zero)
        self._pairs = list(combinations(_plain_joints(arm), 2))

    def families(
        self, postures: FloatArray, target: FloatArray
    ) -> tuple[list[Family], NDArray[np.bool_]] | None:
        """Return the families of postures (k, joints) on a target, and which are of one, (k,).

        None where some posture has lost a motion that is not that of two joints in line.

        Parameters
        ----------
        target : (4, 4), the tool in base, metres.
        """
        families: list[Family] = []
        members = np.zeros(len(postures), np.bool_)
        for place, values in enumerate(postures):
            pair = self._in_line(values)
            if pair is None:
                return None
            one, other, sign = pair
            still = np.delete(np.arange(len(values)), (one, other))
            known = [f for f in families if f.free_joints == (one + 1, other + 1)]
            if any(_alike((values - f.witness)[still]) for f in known):
                members[place] = True
                continue
            made = self._of_sums(values, one, other, sign)
            if not self._stay(made, target):
                return None
            # The others stay where they are: beyond travel, all of the family is.
            within = [family for family in made if self._is_within(family)]
            families += within
            members[place] = bool(within)
        return families, members

    def _in_line(self, values: FloatArray) -> tuple[int, int, int] | None:
        """Return the two joints in line, and 1 for a sum that stays, -1 for a difference."""
        rows = self._screws.rows
        axis, point = np.empty((rows, 3)), np.empty((rows, 3))
        pose, jacobian = np.empty((4, 4)), np.empty((6, rows))
        motions = self._arm.drive_map.motions(values) * self._scale
        land(*self._lines, self._tool, motions, axis, point, pose)
        columns_of(axis, point, self._screws.prismatic, pose, jacobian)
        singular = np.linalg.svd(jacobian, compute_uv=False)
        if singular[min(rows, 6) - 2] < LOST_RANK:
            return None
        driven = self._arm.drive_map.driven
        for one, other in self._pairs:
            h, g = axis[driven[one]], axis[driven[other]]
            apart = np.cross(point[driven[other]] - point[driven[one]], h)
            if max(np.linalg.norm(np.cross(h, g)), np.linalg.norm(apart)) < FAMILY_MEMBER:
                rows_of = self._arm.table.rows[driven[one]], self._arm.table.rows[driven[other]]
                sign = rows_of[0].direction * rows_of[1].direction * (1 if h @ g > 0 else -1)
                return one, other, sign
        return None

    def _of_sums(self, values: FloatArray, one: int, other: int, sign: int) -> list[Family]:
        """Return a family for each sum, whole turns apart, that both travels leave room for."""
        first, second = self._travel(one), self._travel(other)
        least = first.lower + min(sign * second.lower, sign * second.upper)
        most = first.upper + max(sign * second.lower, sign * second.upper)
        total = float(values[one] + sign * values[other])
        families = []
        for turns in range(int(np.ceil((least - total) / TURN)), int((most - total) // TURN) + 1):
            kept = total + turns * TURN
            ends = sorted((kept - sign * second.lower, kept - sign * second.upper))
            low, high = max(first.lower, ends[0]), min(first.upper, ends[1])
            witness = values.copy()
            witness[one] = _best(first, Travel(*ends), low, high)
            witness[other] = sign * (kept - witness[one])
            families.append(
                Family(
                    (one + 1, other + 1),
                    "rad",
                    ((low, high),),
                    witness,
                    f"joint {one + 1} {'+' if sign > 0 else '-'} joint {other + 1} = {{measure}}",
                    kept,
                )
            )
        return families

    def _stay(self, families: list[Family], target: FloatArray) -> bool:
        """Tell whether families are on the target, as exactly as six joints are held to."""
        if not families:
            return True
        motions = self._arm.drive_map.motions(np.array([family.witness for family in families]))
        of = np.zeros(len(motions), np.intp)
        position, angle = errors_of(self._screws, motions, target[None], of, POSE)
        off = max(float(position.max()) / self._screws.length, float(angle.max()))
        return off <= EXACT_REACH

    def _is_within(self, family: Family) -> bool:
        return bool(travel_margin(self._arm, family.witness[None])[0] >= -TRAVEL_EDGE)

    def _travel(self, joint: int) -> Travel:
        travel = self._arm.table.rows[self._arm.drive_map.driven[joint]].travel
        assert travel is not None
        return travel


def _plain_joints(arm: Arm) -> list[int]:
    """Return the turning joints with travel that move one row and are in no sum with a bound."""
    bound = {number - 1 for combined in arm.combined_travel for number in combined.ratios}
    matrix = arm.drive_map.matrix
    plain = []
    for joint, row in enumerate(arm.drive_map.driven):
        alone = np.count_nonzero(matrix[row]) == 1 == np.count_nonzero(matrix[:, joint])
        turns = arm.table.rows[row].is_revolute and arm.table.rows[row].travel is not None
        if alone and turns and row not in bound:
            plain.append(joint)
    return plain


def _alike(off: FloatArray) -> bool:
    """Tell whether joint values differ by whole turns alone."""
    return bool((np.abs(off - TURN * np.round(off / TURN)) < FAMILY_MEMBER).all())


def _best(first: Travel, second: Travel, low: float, high: float) -> float:
    """Return where within (low, high) the lesser share of what is left of two travels is largest.

    Shares are straight lines that rise from one end of a travel and fall to the other: the best
    place is an end, or where two of the four cross.

    Examples
    --------
    >>> _best(Travel(0.0, 2.0), Travel(1.0, 5.0), 1.0, 2.0)
    1.6666666666666667
    """
    lines = []
    for travel in (first, second):
        slope = 1.0 / (travel.upper - travel.lower)
        lines += [(slope, -travel.lower * slope), (-slope, travel.upper * slope)]
    places = [low, high]
    for (a, b), (c, d) in combinations(lines, 2):
        if a != c:
            places.append(min(max((d - b) / (a - c), low), high))
    return max(places, key=lambda place: min(a * place + b for a, b in lines))
