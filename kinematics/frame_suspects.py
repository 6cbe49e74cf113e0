"""Which relation most likely is wrong: by how much the rest would agree better without it.

A wrong relation pulls its neighbours along, so the largest residual need not be its own. What
counts is the drop of the sum of squares when a relation is left out, which the residuals and their
redundancy give without solving anew. Left out: two wrong relations at once; leave the first out
and ask again.
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from kinematics.block_system import BlockMatrix, inverted
from kinematics.frame_estimate import Estimate
from kinematics.kernels.frame_graph import IntArray
from kinematics.number_checks import FloatArray
from kinematics.tolerances import RELATION_WRONG, SUSPECTS_ALIKE, UNCONTROLLED

MOST_EXACT = 5
"""Relations of a large network that are held exactly; six more equations are solved for each."""

LEVERAGE_ACCURACY = 1e-5

AT_ONCE = 2e6
"""Numbers of relations' rows held at once: 16 MB, a hundredth of a second."""


@dataclass(frozen=True, eq=False)
class Suspects:
    """How wrong each relation seems.

    Attributes
    ----------
    drop : (relations,), pure numbers: what the weighted sum of squares loses when the relation is
        left out; of chi-square distribution with 6 degrees of freedom where nothing is wrong.
    redundancy : (relations,), 0 to 1: the share of a mistake in the relation that shows.
    is_exact : whether that holds for every relation; else the network is large, neighbours of a
        relation were taken as known, which makes redundancy too large and drops too small, and
        only the relations that seemed the most wrong were held exactly.
    most_likely : the relation with the largest drop, then the largest residual; None where
        everything agrees.
    alike : all relations with that drop: none of them is more likely wrong than the others.
    """

    drop: FloatArray
    redundancy: FloatArray
    is_exact: bool
    most_likely: int | None
    alike: tuple[int, ...]

    @property
    def is_beyond_chance(self) -> bool:
        """Whether the most likely one is off by more than its standard deviations explain."""
        return self.most_likely is not None and bool(self.drop[self.most_likely] > RELATION_WRONG)


def suspects_of(found: Estimate, between: Callable[[], None] = lambda: None) -> Suspects:
    """Return how wrong each relation of an estimate seems, and the most likely one.

    Parameters
    ----------
    found : of estimate.
    between : called now and then; may raise to give up.

    Source
    ------
    Data snooping: Baarda, A Testing Procedure for Use in Geodetic Networks, 1968, here of all six
    numbers of a relation at once; equal to leaving the relation out: Cook and Weisberg, Residuals
    and Influence in Regression, 1982, 2.2.

    Examples
    --------
    >>> from kinematics.frame_estimate import estimate
    >>> from kinematics.frames import FrameGraph
    >>> from kinematics.transforms import pose
    >>> heights = pose(np.eye(3), [[0, 0, 1], [0, 0, 1], [0, 0, 2]])
    >>> thrice = FrameGraph(["a"] * 3, ["b"] * 3, heights)
    >>> suspects = suspects_of(estimate(thrice, np.full(3, 0.1), np.full(3, 0.1)))
    >>> suspects.most_likely, float(suspects.drop[2].round(6))
    (2, 66.666667)
    """
    relations = len(found.position_residual)
    is_exact = found.root_of_inverse is not None
    if found.root_of_inverse is not None:
        leverages = _all_known(found, found.root_of_inverse, between)
        drop, redundancy = _dropped(found, leverages, np.arange(relations))
    else:
        between()
        normal = found.pattern.normal(found.linearised.of_inner, found.linearised.of_outer)
        leverages = _neighbours_known(found, normal)
        drop, redundancy = _dropped(found, leverages, np.arange(relations))
        worst = np.argsort(drop)[::-1][:MOST_EXACT]
        exact = _solved(found, normal, worst, between)
        drop[worst], redundancy[worst] = _dropped(found, exact, worst)
    largest = float(drop.max(initial=0.0))
    if largest <= found.rounding**2:
        return Suspects(drop, redundancy, is_exact, None, ())
    alike = np.flatnonzero(drop >= largest * (1.0 - SUSPECTS_ALIKE))
    weighted = np.linalg.norm(found.linearised.residuals[alike], axis=1)
    most_likely = int(alike[np.argmax(weighted)])
    return Suspects(drop, redundancy, is_exact, most_likely, tuple(alike.tolist()))


def _dropped(
    found: Estimate, leverages: FloatArray, relations: IntArray
) -> tuple[FloatArray, FloatArray]:
    """Return drop and redundancy of relations from the leverage (..., 6, 6) of each."""
    residuals = found.linearised.residuals[relations]
    values, axes = np.linalg.eigh(np.eye(6) - leverages)
    along = (np.swapaxes(axes, 1, 2) @ residuals[..., None])[..., 0]
    controlled = values > UNCONTROLLED
    shares = np.where(controlled, along**2 / np.where(controlled, values, 1.0), 0.0)
    return shares.sum(axis=1), np.clip(values, 0.0, 1.0).mean(axis=1)


def _all_known(found: Estimate, root: FloatArray, between: Callable[[], None]) -> FloatArray:
    """Return all leverages from the root of the inverse of the normal equations."""
    pattern, at = found.pattern, found.linearised
    # A held frame, number -1, has the last columns: it is known exactly.
    columns = np.zeros((pattern.nodes + 1, 6, 6 * pattern.nodes))
    columns[:-1] = root.T.reshape(pattern.nodes, 6, 6 * pattern.nodes)
    leverages = np.empty_like(at.of_inner)
    size = max(1, int(AT_ONCE / max(1, 6 * columns.shape[2])))
    for begin in range(0, len(leverages), size):
        between()
        part = slice(begin, begin + size)
        rows = at.of_inner[part] @ columns[pattern.one[part]]
        rows += at.of_outer[part] @ columns[pattern.other[part]]
        leverages[part] = rows @ np.swapaxes(rows, 1, 2)
    return leverages


def _neighbours_known(found: Estimate, normal: BlockMatrix) -> FloatArray:
    """Return what leverages would be if all frames but the two of a relation were known.

    No leverage is smaller than that: what is known of neighbours can only help.
    """
    pattern, at = found.pattern, found.linearised
    ends = np.zeros((len(pattern.one), 2, 6, 2, 6))
    ends[:, 0, :, 0], ends[:, 1, :, 1] = normal.at(pattern.one), normal.at(pattern.other)
    ends[:, 0, :, 1] = normal.at(pattern.one, pattern.other)
    ends[:, 1, :, 0] = np.swapaxes(ends[:, 0, :, 1], 1, 2)
    parts = np.stack([at.of_inner, at.of_outer], axis=2)
    parts[pattern.one < 0, :, 0] = 0.0
    parts[pattern.other < 0, :, 1] = 0.0
    rows = parts.reshape(-1, 6, 12)
    return np.asarray(rows @ inverted(ends.reshape(-1, 12, 12)) @ np.swapaxes(rows, 1, 2))


def _solved(
    found: Estimate, normal: BlockMatrix, relations: IntArray, between: Callable[[], None]
) -> FloatArray:
    """Return the leverages of a few relations, by solving for each of their rows."""
    pattern, at = found.pattern, found.linearised
    solve = normal.solver(LEVERAGE_ACCURACY, between)
    right = np.zeros((pattern.nodes + 1, 6, len(relations), 6))
    for place, relation in enumerate(relations.tolist()):
        right[pattern.one[relation], :, place] += at.of_inner[relation].T
        right[pattern.other[relation], :, place] += at.of_outer[relation].T
    moved = np.zeros_like(right)
    moved[:-1] = solve(right[:-1].reshape(6 * pattern.nodes, -1)).reshape(right[:-1].shape)
    leverages = np.stack(
        [
            at.of_inner[relation] @ moved[pattern.one[relation], :, place]
            + at.of_outer[relation] @ moved[pattern.other[relation], :, place]
            for place, relation in enumerate(relations.tolist())
        ]
    )
    return np.asarray(0.5 * (leverages + np.swapaxes(leverages, 1, 2)))
