"""Postures spread evenly over all that travel allows, a million of them in a blink.

Idea: numbers drawn by chance leave gaps and clusters; a Sobol sequence fills a box evenly at every
length, and scrambled by a seed it has no pattern that an arm could share. Its numbers are whole
multiples of 2^-30, and each block of 4096 is the first block with every number exclusive-or'ed by
one constant (the sequence is linear over the field of two elements), so any block is there at once
and threads or machines need not share anything. Postures that a combined travel excludes are left
out, which keeps the others as evenly spread as they were.

Source: Sobol 1967 in the order of Antonov and Saleev 1979, scrambled as in Matousek 1998, from
scipy.stats.qmc. Not covered: an even spread of tool positions, which crowd where the arm folds.
"""

from functools import cached_property
from threading import Lock

import numpy as np
from numpy.typing import NDArray

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.errors import KinematicsError
from kinematics.reach.tolerances import FEWEST_SAMPLES_KEPT
from kinematics.reach.travel_region import travel_region
from kinematics.table import FloatArray

BLOCK = 4096
"""Postures of which numbers, poses and positions stay within a processor's fast memory."""

_BITS = 30
MOST_SAMPLES = 2**_BITS
"""The sequence repeats then."""

MOST_SEED = 2**53 - 1
"""The largest whole number that every reader of a request and its answer holds exactly (RFC 8259,
section 6)."""

_WholeNumbers = NDArray[np.uint32]


class JointSamples:
    """Postures within travel, each known by its number: the same ones however they are asked for.

    Parameters
    ----------
    count : how many, at least 1.
    seed : whole number, 0 to MOST_SEED; another one gives postures as evenly spread elsewhere.
    working : whether to stay within working travel too.

    Raises
    ------
    KinematicsError : as ``travel_region``; a count or seed beyond what there is; limits that leave
        so little of the box around them that nearly all postures would be drawn in vain.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table, Travel
    >>> row = Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0, travel=Travel(0.0, 4.0))
    >>> samples = JointSamples(Arm("one", Table(Convention.STANDARD, (row,))), 4, seed=1)
    >>> np.sort(samples.piece(0, 4).ravel()).astype(int)
    array([0, 1, 2, 3])
    """

    def __init__(self, arm: Arm, count: int, seed: int, *, working: bool = False) -> None:
        if not 1 <= count <= MOST_SAMPLES:
            raise KinematicsError(
                f"{count} samples cannot be drawn",
                where=("count",),
                value=count,
                way_out=f"ask for 1 to {MOST_SAMPLES}",
            )
        if not 0 <= seed <= MOST_SEED:
            raise KinematicsError(
                f"a seed is a whole number from 0 to {MOST_SEED}",
                where=("seed",),
                value=seed,
                way_out="give one of these, the same for the same samples",
            )
        self.arm, self.count, self.seed = arm, count, seed
        self.region = travel_region(arm, working=working)
        self._sequence = _Blocks(arm.joint_count, seed)
        self._step = (self.region.upper - self.region.lower) * 2.0**-_BITS

    def piece(self, begin: int, end: int) -> FloatArray:
        """Return postures ``begin`` ... ``end``, (end - begin, joints), rad or m."""
        found = np.empty((max(end - begin, 0), self.arm.joint_count))
        if self.region.is_box:
            for block in range(begin // BLOCK, -(-end // BLOCK)):
                first = block * BLOCK
                low, high = max(begin, first), min(end, first + BLOCK)
                part = slice(low - first, high - first)
                self._fill(block, part, found[low - begin : high - begin])
            return found
        ends = self._kept_before
        for block in range(int(np.searchsorted(ends, begin, "right")) - 1, len(ends) - 1):
            first = int(ends[block])
            if first >= end:
                break
            kept = self._kept(block)
            low, high = max(begin, first), min(end, first + len(kept))
            found[low - begin : high - begin] = kept[low - first : high - first]
        return found

    def _fill(self, block: int, part: slice, out: FloatArray) -> None:
        """Write the postures of a part of a block to ``out``."""
        np.multiply(self._sequence.block(block, part), self._step, out=out)
        out += self.region.lower
        # So that a sum that rounds upward does not leave travel.
        np.minimum(out, self.region.upper, out=out)

    def _kept(self, block: int) -> FloatArray:
        """Return the postures of a block that keep to what cuts the box."""
        drawn = np.empty((BLOCK, self.arm.joint_count))
        self._fill(block, slice(0, BLOCK), drawn)
        kept: FloatArray = drawn[self.region.holds(drawn)]
        return kept

    @cached_property
    def _kept_before(self) -> NDArray[np.int64]:
        """How many are kept before each block that is drawn from, and in all."""
        ends = [0]
        while ends[-1] < self.count:
            drawn = len(ends) * BLOCK
            ends.append(ends[-1] + len(self._kept(len(ends) - 1)))
            if ends[-1] < FEWEST_SAMPLES_KEPT * drawn or drawn >= MOST_SAMPLES:
                raise KinematicsError(
                    f"combined travel leaves {ends[-1]} of {drawn} postures that the travel of the "
                    "single joints allows: too few to draw from",
                    where=("arm", "combined_travel"),
                    value=ends[-1] / drawn,
                    way_out="narrow the travel of the joints to what combined travel leaves them",
                )
        return np.array(ends)


class _Blocks:
    """The whole numbers of a scrambled Sobol sequence, a block of 4096 at a time."""

    def __init__(self, dimensions: int, seed: int) -> None:
        # Imported where it is needed: it takes as long as all else of the core.
        from scipy.stats.qmc import Sobol

        self._sobol = Sobol(dimensions, scramble=True, bits=_BITS, rng=seed)
        self._first = _whole(self._sobol.random(BLOCK))
        self._drawn = BLOCK
        self._constants: list[_WholeNumbers] = []
        self._lock = Lock()

    def block(self, number: int, part: slice) -> _WholeNumbers:
        """Return a part of a block, (count, dimensions), in units of 2^-30."""
        # In Gray code, number k of the sequence is the exclusive or of one constant for each bit
        # of k ^ (k >> 1); those of the lower twelve bits are in the first block.
        code = (number * BLOCK) ^ (number * BLOCK >> 1)
        shift = np.zeros_like(self._first[0])
        for bit in range(code.bit_length()):
            if code >> bit & 1:
                shift ^= self._constant(bit)
        shifted: _WholeNumbers = self._first[part] ^ shift
        return shifted

    def _constant(self, bit: int) -> _WholeNumbers:
        """Return what the sequence's numbers change by with one bit of their Gray code."""
        with self._lock:  # pieces are made by several threads
            while len(self._constants) <= bit:
                # Number 2^k has the bits k and k - 1 of its Gray code set.
                change = self._point(1 << len(self._constants)) ^ self._first[0]
                self._constants.append(change ^ self._constants[-1] if self._constants else change)
        return self._constants[bit]

    def _point(self, place: int) -> _WholeNumbers:
        """Return one point of the sequence; those beyond the first block are asked for in order."""
        if place < BLOCK:
            point: _WholeNumbers = self._first[place]
            return point
        self._sobol.fast_forward(place - self._drawn)
        self._drawn = place + 1
        (point,) = _whole(self._sobol.random(1))
        return np.asarray(point)


def _whole(points: FloatArray) -> _WholeNumbers:
    return (points * 2.0**_BITS).astype(np.uint32)


def tool_positions(
    samples: JointSamples, tool_in_flange: FloatArray, begin: int, end: int
) -> FloatArray:
    """Return where samples ``begin`` ... ``end`` bring the tool, (end - begin, 3), in the base.

    Parameters
    ----------
    tool_in_flange : (4, 4).

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> arm = Arm("one", Table(Convention.STANDARD, (Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0),)))
    >>> places = tool_positions(JointSamples(arm, 8, seed=1), np.eye(4), 0, 8)
    >>> np.hypot(places[:, 0], places[:, 1]).round(12)
    array([0.4, 0.4, 0.4, 0.4, 0.4, 0.4, 0.4, 0.4])
    """
    positions = np.empty((max(end - begin, 0), 3))
    poses = np.empty((min(BLOCK, len(positions)), 4, 4))
    for first in range(begin, end, BLOCK):
        last = min(first + BLOCK, end)
        joint_values = samples.piece(first, last)
        tool_in_base(samples.arm, joint_values, tool_in_flange, out=poses[: last - first])
        positions[first - begin : last - begin] = poses[: last - first, :3, 3]
    return positions
