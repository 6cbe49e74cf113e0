"""Singular values and vectors of many small matrices by one-sided Jacobi, a block at a time.

Never through the Gram matrix, whose rounding would hide singular values below 1e-8.
"""

import numpy as np

from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

BLOCK = 64
"""Matrices worked on together: a 6 x 6 block with its rotations is 37 kB."""

_CONVERGED = 1e-17
"""Square of the cosine between vectors at which one more sweep, which converges quadratically,
leaves nothing above rounding."""

_NOISE = 1e-15
"""Length of a vector, over the longest, at which its direction is the rounding's and not its own;
it is then made from the others."""

_MOST_SWEEPS = 30
"""Six to eight are seen on matrices of six rows; a bound, so that no input can hang."""

_TINY = 1e-300
"""Keeps divisions by the norm of a zero vector finite; far below the square of any rounding."""


@compiled
def _measure_pair(
    first: FloatArray, second: FloatArray, cosine: FloatArray, sine: FloatArray, count: int
) -> float:
    """Write the rotations that make two vectors of each matrix perpendicular.

    Returns the largest squared cosine between the two met in the block.

    Source
    ------
    Hestenes 1958; rotation angle as Rutishauser 1966, the smaller of the two.
    """
    length = first.shape[0]
    worst = 0.0
    for b in range(count):
        norm_first, norm_second, product = 0.0, 0.0, 0.0
        for k in range(length):
            x, y = first[k, b], second[k, b]
            norm_first += x * x
            norm_second += y * y
            product += x * y
        worst = max(worst, product * product / (norm_first * norm_second + _TINY))
        difference = norm_second - norm_first
        double = 2.0 * product
        root = np.sqrt(difference * difference + double * double)
        tangent = abs(double) / (abs(difference) + root + _TINY)
        opposed = (double < 0.0) != (difference < 0.0)
        tangent = -tangent if opposed else tangent
        scale = 1.0 / np.sqrt(1.0 + tangent * tangent)
        cosine[b] = scale
        sine[b] = scale * tangent
    return worst


@compiled
def _rotate_pair(
    first: FloatArray, second: FloatArray, cosine: FloatArray, sine: FloatArray, count: int
) -> None:
    for k in range(first.shape[0]):
        x_row, y_row = first[k], second[k]
        for b in range(count):
            x, y = x_row[b], y_row[b]
            x_row[b] = cosine[b] * x - sine[b] * y
            y_row[b] = sine[b] * x + cosine[b] * y


@compiled
def _orthogonalise(vectors: FloatArray, rotations: FloatArray, count: int) -> None:
    """Rotate the vectors (p, length, BLOCK) of each matrix until they are perpendicular.

    ``rotations`` (p, p or 0, BLOCK) is turned along; without its second axis nothing is kept.
    """
    cosine, sine = np.empty(BLOCK), np.empty(BLOCK)
    keep = rotations.shape[1] > 0
    for _ in range(_MOST_SWEEPS):
        worst = 0.0
        for i in range(vectors.shape[0] - 1):
            for j in range(i + 1, vectors.shape[0]):
                seen = _measure_pair(vectors[i], vectors[j], cosine, sine, count)
                worst = max(worst, seen)
                _rotate_pair(vectors[i], vectors[j], cosine, sine, count)
                if keep:
                    _rotate_pair(rotations[i], rotations[j], cosine, sine, count)
        if worst < _CONVERGED:
            break


@compiled
def _load(
    matrices: FloatArray,
    begin: int,
    count: int,
    row_map: FloatArray,
    column_scale: FloatArray,
    vectors: FloatArray,
    by_rows: bool,
) -> None:
    """Put ``row_map @ matrix * column_scale`` of each matrix into the block, by rows or columns."""
    for b in range(count):
        for i in range(row_map.shape[0]):
            for j in range(column_scale.shape[0]):
                entry = 0.0
                for k in range(row_map.shape[1]):
                    share = row_map[i, k]
                    if share != 0.0:
                        entry += share * matrices[begin + b, k, j]
                entry *= column_scale[j]
                if by_rows:
                    vectors[i, j, b] = entry
                else:
                    vectors[j, i, b] = entry


@compiled
def decompose(
    matrices: FloatArray,
    row_map: FloatArray,
    column_scale: FloatArray,
    left: FloatArray,
    values: FloatArray,
    right: FloatArray,
) -> None:
    """Write the singular value decomposition of ``row_map @ matrix * column_scale``.

    Parameters
    ----------
    matrices : (count, m, n); row_map : (k, m); column_scale : (n,).
    left : (count, k, min(k, n)); values : (count, min(k, n)), largest first.
    right : (count, n, n), complete: vectors beyond the values move nothing. Without any matrix in
        ``left`` and ``right``, (0, k, ...) and (0, n, n), the values alone are worked out.

    Examples
    --------
    >>> left, values, right = np.empty((1, 1, 1)), np.empty((1, 1)), np.empty((1, 2, 2))
    >>> decompose(np.array([[[3.0, 4.0]]]), np.eye(1), np.ones(2), left, values, right)
    >>> values[0], np.abs(right[0][:, 0]).round(12)
    (array([5.]), array([0.6, 0.8]))
    """
    rows, columns = row_map.shape[0], column_scale.shape[0]
    by_rows = rows <= columns
    fewer, longer = min(rows, columns), max(rows, columns)
    width = min(BLOCK, matrices.shape[0])
    kept = fewer if right.shape[0] > 0 else 0
    vectors = np.empty((fewer, longer, width))
    rotations = np.empty((fewer, kept, width))
    norms = np.empty(fewer)
    order = np.empty(fewer, dtype=np.int64)
    for begin in range(0, matrices.shape[0], BLOCK):
        count = min(BLOCK, matrices.shape[0] - begin)
        _load(matrices, begin, count, row_map, column_scale, vectors, by_rows)
        for i in range(fewer):
            for j in range(kept):
                for b in range(count):
                    rotations[i, j, b] = 1.0 if i == j else 0.0
        _orthogonalise(vectors, rotations, count)
        for b in range(count):
            _sorted_norms(vectors, b, norms, order)
            at = begin + b
            if kept == 0:
                for place in range(fewer):
                    values[at, place] = norms[order[place]]
                continue
            long_side, short_side = (right[at], left[at]) if by_rows else (left[at], right[at])
            for place in range(fewer):
                i = order[place]
                values[at, place] = norms[i]
                for j in range(fewer):
                    short_side[j, place] = rotations[i, j, b]
                if norms[i] > _NOISE * norms[order[0]]:
                    for k in range(longer):
                        long_side[k, place] = vectors[i, k, b] / norms[i]
                else:
                    _complete(long_side, place)
            for place in range(fewer, long_side.shape[1]):
                _complete(long_side, place)


@compiled
def _sorted_norms(vectors: FloatArray, b: int, norms: FloatArray, order: FloatArray) -> None:
    for i in range(vectors.shape[0]):
        square = 0.0
        for k in range(vectors.shape[1]):
            square += vectors[i, k, b] * vectors[i, k, b]
        norms[i] = np.sqrt(square)
        place = i
        while place > 0 and norms[order[place - 1]] < norms[i]:
            order[place] = order[place - 1]
            place -= 1
        order[place] = i


@compiled
def _complete(columns: FloatArray, place: int) -> None:
    """Make column ``place`` a unit vector perpendicular to the columns before it.

    Of the coordinate directions the one least covered so far is taken, and made perpendicular
    twice (Parlett, Kahan: twice is enough).
    """
    length = columns.shape[0]
    best, best_cover = 0, np.inf
    for k in range(length):
        cover = 0.0
        for j in range(place):
            cover += columns[k, j] * columns[k, j]
        if cover < best_cover:
            best, best_cover = k, cover
    for k in range(length):
        columns[k, place] = 1.0 if k == best else 0.0
    for _ in range(2):
        for j in range(place):
            product = 0.0
            for k in range(length):
                product += columns[k, j] * columns[k, place]
            for k in range(length):
                columns[k, place] -= product * columns[k, j]
        square = 0.0
        for k in range(length):
            square += columns[k, place] * columns[k, place]
        for k in range(length):
            columns[k, place] /= np.sqrt(square)
