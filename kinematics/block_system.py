"""Symmetric equations between neighbours in a graph, a small block each, solved as they deserve.

Few unknowns are solved at once, densely. Many are solved by sparse factors where the graph is long
and thin, so that the factors stay thin too; where it is well knit factors would fill up, but there
conjugate gradients need few steps. Left out: what the unknowns are.
"""

from collections.abc import Callable
from contextlib import suppress

import numpy as np

from kinematics.kernels.frame_graph import IntArray
from kinematics.number_checks import FloatArray

MOST_DENSE = 1200
"""Unknowns up to which a dense solution takes no more than a fifth of a second."""

MOST_ENVELOPE = 2e7
"""Sum of squared row lengths, in blocks, up to which sparse factors take about a second."""

CONJUGATE_STEPS = 2000
"""Steps of conjugate gradients; well knit graphs settle within a hundred."""

Solve = Callable[[FloatArray], FloatArray]
"""From right-hand sides to solutions, (size, columns) both."""


class BlockPattern:
    """Which nodes are neighbours, and where each edge's blocks go in the matrix.

    Parameters
    ----------
    one, other : (edges,), the nodes of each edge; -1 is a node that is held and has no unknowns.
    nodes : how many there are.
    """

    def __init__(self, one: IntArray, other: IntArray, nodes: int) -> None:
        self.nodes = nodes
        self.one, self.other = one, other
        rows = np.concatenate([one, other, one, other])
        columns = np.concatenate([one, other, other, one])
        self._kept = np.flatnonzero((rows >= 0) & (columns >= 0))
        keys = rows[self._kept] * max(nodes, 1) + columns[self._kept]
        self._order = np.argsort(keys, kind="stable")
        places, self._begins = np.unique(keys[self._order], return_index=True)
        self.rows, self.columns = np.divmod(places, max(nodes, 1))

    def normal(self, of_one: FloatArray, of_other: FloatArray) -> "BlockMatrix":
        """Return the sum over all edges of ``A^T A``.

        Parameters
        ----------
        of_one, of_other : (edges, rows, block), the part of A at each end of the edge.
        """
        to_one, to_other = np.swapaxes(of_one, 1, 2), np.swapaxes(of_other, 1, 2)
        return self.matrix(to_one @ of_one, to_other @ of_other, to_one @ of_other)

    def matrix(self, one: FloatArray, other: FloatArray, between: FloatArray) -> "BlockMatrix":
        """Return the sum of what all edges give.

        Parameters
        ----------
        one, other, between : (edges, block, block), at either end, symmetric, and in the row of
            the one and the column of the other.
        """
        parts = np.concatenate([one, other, between, np.swapaxes(between, 1, 2)])
        blocks = parts[self._kept[self._order]]
        if len(blocks):
            blocks = np.add.reduceat(blocks, self._begins, axis=0)
        return BlockMatrix(self, blocks)

    def gathered(self, of_one: FloatArray, of_other: FloatArray) -> FloatArray:
        """Return the sum at each node, (nodes, block, ...), of what edges give to their ends."""
        total = np.zeros((self.nodes + 1, *of_one.shape[1:]))
        np.add.at(total, self.one, of_one)
        np.add.at(total, self.other, of_other)
        return total[:-1]  # held nodes, -1, have written into the last row


class BlockMatrix:
    """A symmetric matrix in blocks, at the places of a pattern.

    Parameters
    ----------
    blocks : (places, block, block).
    """

    def __init__(self, pattern: BlockPattern, blocks: FloatArray) -> None:
        self.pattern = pattern
        self.blocks = blocks
        self.size: int = pattern.nodes * int(blocks.shape[-1])

    @property
    def is_small(self) -> bool:
        """Whether it is solved, and may be inverted, densely."""
        return self.size <= MOST_DENSE

    def __add__(self, other: "BlockMatrix") -> "BlockMatrix":
        return BlockMatrix(self.pattern, self.blocks + other.blocks)

    def diagonal(self) -> FloatArray:
        """Return the blocks of the nodes themselves, (nodes, block, block)."""
        return np.asarray(self.blocks[self.pattern.rows == self.pattern.columns])

    def at(self, row: IntArray, column: IntArray | None = None) -> FloatArray:
        """Return blocks, (count, block, block), of the diagonal or of an edge's two ends.

        A held node has the identity on the diagonal, and nothing beside it.
        """
        pattern, columns = self.pattern, row if column is None else column
        keys = pattern.rows * pattern.nodes + pattern.columns
        held = (row < 0) | (columns < 0)
        places = np.searchsorted(keys, np.where(held, 0, row * pattern.nodes + columns))
        blocks = self.blocks[places]
        blocks[held] = np.eye(self.blocks.shape[-1]) if column is None else 0.0
        return blocks

    def dense(self) -> FloatArray:
        """Return the whole matrix, (size, size)."""
        block = self.blocks.shape[-1]
        whole = np.zeros((self.pattern.nodes, block, self.pattern.nodes, block))
        whole[self.pattern.rows, :, self.pattern.columns, :] = self.blocks
        return whole.reshape(self.size, self.size)

    def solver(self, accuracy: float, between: Callable[[], None] = lambda: None) -> Solve:
        """Return what solves the equations for right-hand sides, (size, columns).

        Parameters
        ----------
        accuracy : relative size of what conjugate gradients may leave; factors leave rounding.
        between : called before each step of conjugate gradients; may raise to give up.

        Source
        ------
        Dense and sparse factors: Golub and Van Loan, Matrix Computations, 4.2. Conjugate
        gradients, preconditioned by the blocks of the diagonal: Hestenes and Stiefel, J. Research
        NBS 49(6), 1952; Saad, Iterative Methods for Sparse Linear Systems, 9.2 and 10.2.
        """
        if self.is_small:
            whole = self.dense()
            return lambda right: _solved(whole, right)
        # Imported here: small cells are answered without scipy's import time.
        from scipy.sparse import bsr_matrix
        from scipy.sparse.linalg import splu

        rows_begin = np.searchsorted(self.pattern.rows, np.arange(self.pattern.nodes + 1))
        shape = (self.size, self.size)
        whole = bsr_matrix((self.blocks, self.pattern.columns, rows_begin), shape=shape)
        if _envelope(self.pattern) <= MOST_ENVELOPE:
            in_order = {"SymmetricMode": True}
            with suppress(RuntimeError):  # a pivot that is exactly 0; steps need none
                factors = splu(
                    whole.tocsc(), "MMD_AT_PLUS_A", diag_pivot_thresh=0.0, options=in_order
                )
                return lambda right: factors.solve(right)
        nearby = inverted(self.diagonal())

        def by_node(right: FloatArray) -> FloatArray:
            return (nearby @ right.reshape(len(nearby), -1, right.shape[1])).reshape(right.shape)

        def by_matrix(trial: FloatArray) -> FloatArray:
            between()
            return np.asarray(whole @ trial)

        return lambda right: _by_steps(by_matrix, by_node, right, accuracy)

    def root_of_inverse(self) -> tuple[FloatArray, float]:
        """Return W, (size, size), with ``W^T W`` the inverse, and the condition number at most.

        Rows ``a`` of the equations are better multiplied as ``W a``, and squared afterwards, than
        by the inverse: there what neighbours share is large and cancels. The condition number is
        that of the matrix with its diagonal scaled to 1, which is what rounding is amplified by.

        Source
        ------
        Golub and Van Loan, Matrix Computations, 4.2; Higham, Accuracy and Stability of Numerical
        Algorithms, 10.1, on scaling.

        Examples
        --------
        >>> pattern = BlockPattern(np.array([-1]), np.array([0]), 1)
        >>> root, most = pattern.normal(np.zeros((1, 1, 1)), np.array([[[4.0]]])).root_of_inverse()
        >>> root.tolist(), most
        ([[0.25]], 1.0)
        """
        whole = self.dense()
        diagonal = np.diag(whole)
        scale = 1.0 / np.sqrt(np.where(diagonal > 0.0, diagonal, 1.0))
        scaled = whole * scale * scale[:, None]
        try:
            root = np.linalg.inv(np.linalg.cholesky(scaled))
        except np.linalg.LinAlgError:
            values, axes = np.linalg.eigh(scaled)
            kept = values > self.size * np.finfo(np.float64).eps * values[-1]
            root = np.where(kept, axes / np.sqrt(np.where(kept, values, 1.0)), 0.0).T
            return root * scale, float(np.inf)
        largest = np.abs(scaled).sum(axis=0).max(initial=0.0)
        return root * scale, float(largest * (root**2).sum())


def inverted(matrices: FloatArray) -> FloatArray:
    """Return the inverses of symmetric matrices (..., n, n), of singular ones the pseudo-inverse.

    Source
    ------
    Golub and Van Loan, Matrix Computations, 5.5.2.

    Examples
    --------
    >>> inverted(np.diag([2.0, 0.0])).tolist()
    [[0.5, 0.0], [0.0, 0.0]]
    """
    try:
        return np.asarray(np.linalg.inv(matrices))
    except np.linalg.LinAlgError:
        return np.asarray(np.linalg.pinv(matrices, hermitian=True))


def _solved(whole: FloatArray, right: FloatArray) -> FloatArray:
    try:
        return np.asarray(np.linalg.solve(whole, right))
    except np.linalg.LinAlgError:
        return np.asarray(np.linalg.lstsq(whole, right)[0])


def _by_steps(matrix: Solve, nearly: Solve, right: FloatArray, accuracy: float) -> FloatArray:
    """Return the solution for each column, (size, columns), by conjugate gradients.

    Sums are einsum's: those of the linear algebra library wait for each other's threads, which on a
    busy machine takes longer than the sums.

    Parameters
    ----------
    matrix, nearly : what multiplies columns by the matrix, and by almost its inverse.
    """

    def product(one: FloatArray, other: FloatArray) -> FloatArray:
        return np.asarray(np.einsum("ij,ij->j", one, other))

    found, left = np.zeros_like(right), right.copy()
    enough = accuracy**2 * product(right, right)
    direction = np.zeros_like(right)
    before = np.ones(right.shape[1])
    for _ in range(CONJUGATE_STEPS):
        going = product(left, left) > enough
        if not going.any():
            break
        ahead = nearly(left)
        now = product(left, ahead)
        direction = ahead + np.where(going, now / before, 0.0) * direction
        moved = matrix(direction)
        # A column that is done stands still; so does one that has met a direction without curve.
        curve = product(direction, moved)
        length = np.where(going & (curve != 0.0), now / np.where(curve == 0.0, 1.0, curve), 0.0)
        found += length * direction
        left -= length * moved
        before = np.where(now == 0.0, 1.0, now)
    return found


def _envelope(pattern: BlockPattern) -> float:
    """Return what factors cost: the sum of squared row lengths, nodes renumbered by levels.

    Source
    ------
    Reverse ordering by levels: Cuthill and McKee, 1969; George and Liu, Computer Solution of
    Large Sparse Positive Definite Systems, 4.
    """
    from scipy.sparse import csr_matrix
    from scipy.sparse.csgraph import reverse_cuthill_mckee

    links = csr_matrix(
        (np.ones(len(pattern.rows)), (pattern.rows, pattern.columns)),
        shape=(pattern.nodes, pattern.nodes),
    )
    place = np.empty(pattern.nodes, dtype=np.int64)
    place[reverse_cuthill_mckee(links, symmetric_mode=True)] = np.arange(pattern.nodes)
    first = np.arange(pattern.nodes)
    np.minimum.at(first, place[pattern.rows], place[pattern.columns])
    lengths = np.arange(pattern.nodes) - first + 1
    return float((lengths.astype(np.float64) ** 2).sum())
