"""Where frames most likely are when more relations are known than needed: weighted least squares.

All relations give way, each in proportion to its variance, until the weighted sum of squares of
what they are off by is least. Left out: which relation is to blame (frame_suspects).
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from kinematics.block_system import BlockPattern
from kinematics.frame_residuals import Linearised, Weights, linearised
from kinematics.frames import FrameGraph
from kinematics.kernels.frame_graph import IntArray
from kinematics.number_checks import FloatArray
from kinematics.rigidity import nearest_rotation
from kinematics.rotations import rotation_from_vector
from kinematics.tolerances import ESTIMATE_SETTLED, ROUNDING_AMPLIFIED
from kinematics.transforms import inverse, pose

MOST_ITERATIONS = 40
"""A cell settles in three to six, relations that contradict each other by a quarter turn in some
twenty; what has not settled by then creeps along a valley without a floor."""

MOST_HALVINGS = 30
NEAR_THE_LEAST = 0.1
"""Share of the sum of squares that a step gained, below which the least is near enough for second
derivatives to help; further off they lead astray."""

LEVEL = 1e-11
"""Share of the sum of squares that is lost in its rounding: short steps must not be refused for
it, nor steps between sums that are 0 but for rounding."""

CONJUGATE_ACCURACY = 1e-9
"""What conjugate gradients may leave of each step; the next step takes care of it."""


@dataclass(frozen=True, eq=False)
class Estimate:
    """Frames and relations after the adjustment.

    Attributes
    ----------
    frame_in_root : (frames, 4, 4), in the frame with the lowest number of its group.
    position_residual, angle_residual : (relations,), m and rad: what each relation as given is off
        by from the estimate.
    sum_of_squares : of all weighted residuals.
    freedom : how many of the 6 numbers of each relation are more than needed.
    rounding : length, in standard deviations, of what rounding alone leaves.
    settled : whether the last step, and the slope after it, were small against the uncertainty
        of the result, and rounding is not amplified so much that they say nothing.
    iterations : steps taken.
    pattern, linearised : the equations at the end, for frame_suspects.
    root_of_inverse : of their normal equations, (6 unknown frames, 6 unknown frames); None where
        these are too many.
    """

    frame_in_root: FloatArray
    position_residual: FloatArray
    angle_residual: FloatArray
    sum_of_squares: float
    freedom: int
    rounding: float
    settled: bool
    iterations: int
    pattern: BlockPattern
    linearised: Linearised
    root_of_inverse: FloatArray | None

    def pose_between(
        self, of: IntArray | Sequence[int], within: IntArray | Sequence[int]
    ) -> FloatArray:
        """Return the pose of frames ``of`` in frames ``within``, (..., 4, 4), by their numbers."""
        found: FloatArray = inverse(self.frame_in_root[within]) @ self.frame_in_root[of]
        return found

    @property
    def misfit(self) -> float | None:
        """1 where relations are off by as much as their standard deviations say; None if free."""
        return float(np.sqrt(self.sum_of_squares / self.freedom)) if self.freedom else None


def estimate(
    graph: FrameGraph,
    position_sd: FloatArray,
    angle_sd: FloatArray,
    between: Callable[[], None] = lambda: None,
) -> Estimate:
    """Return the most likely poses of all frames.

    The least squares of a few wildly contradictory relations can have several minima; the one
    found is that next to the start, which is the best linear fit of all rotations at once.

    Parameters
    ----------
    graph : relations and frames.
    position_sd, angle_sd : (relations,), m and rad, positive: standard deviation of each
        coordinate of a relation's position, and of its rotation about each axis.
    between : called before each step, and in long ones; may raise to give up.

    Raises
    ------
    OutOfRange : standard deviations differ too much; ``where`` is the relation and the field.

    Source
    ------
    Gauss-Newton with halved steps: Bjoerck, Numerical Methods for Least Squares Problems, 9.2,
    on the rotations' tangent space: Absil, Mahony and Sepulchre, Optimization Algorithms on Matrix
    Manifolds, 8.4. Start: Martinec and Pajdla, CVPR 2007, relaxed rotations. The residual is the
    difference of positions in the inner frame, and the rotation vector between orientations.

    Examples
    --------
    >>> from kinematics.transforms import pose
    >>> twice = FrameGraph(["a", "a"], ["b", "b"], pose(np.eye(3), [[0, 0, 1.0], [0, 0, 1.3]]))
    >>> found = estimate(twice, np.array([0.1, 0.2]), np.array([0.1, 0.1]))
    >>> a, b = (twice.connections.numbers_of([name]) for name in "ab")
    >>> found.pose_between(a, b)[0, 2, 3].round(12)
    np.float64(1.06)
    """
    weights = Weights(position_sd, angle_sd)
    weights.refuse_if_far_apart()
    is_root = graph.group == np.arange(len(graph.names))
    unknown = np.where(is_root, -1, np.cumsum(~is_root) - 1)
    pattern = BlockPattern(
        unknown[graph.inner], unknown[graph.outer], int(np.count_nonzero(~is_root))
    )
    frame_in_root = _start(graph, pattern, unknown, angle_sd, between)
    at = linearised(graph, weights, frame_in_root)
    settled, iterations, bent = pattern.nodes == 0, 0, False
    while not settled and iterations < MOST_ITERATIONS:
        between()
        step, length = _step(pattern, at, between, bent=bent)
        lower = _lower(graph, weights, frame_in_root, at, _of_frames(step, unknown))
        iterations += 1
        if lower is None:
            break
        bent = at.sum_of_squares - lower[1].sum_of_squares < NEAR_THE_LEAST * at.sum_of_squares
        frame_in_root, at = lower
        small = max(ESTIMATE_SETTLED, weights.rounding(graph, frame_in_root))
        settled = length <= small and _steepest(pattern, at) <= small
    root_of_inverse, amplified = _amplified(pattern, at, between)
    off = at.residuals.reshape(-1, 2, 3)
    return Estimate(
        frame_in_root=frame_in_root,
        position_residual=np.linalg.norm(off[:, 0], axis=-1) * position_sd,
        angle_residual=np.linalg.norm(off[:, 1], axis=-1) * angle_sd,
        sum_of_squares=at.sum_of_squares,
        freedom=6 * (len(graph.inner) - pattern.nodes),
        rounding=weights.rounding(graph, frame_in_root),
        settled=settled and amplified <= ROUNDING_AMPLIFIED,
        iterations=iterations,
        pattern=pattern,
        linearised=at,
        root_of_inverse=root_of_inverse,
    )


def _start(
    graph: FrameGraph,
    pattern: BlockPattern,
    unknown: IntArray,
    angle_sd: FloatArray,
    between: Callable[[], None],
) -> FloatArray:
    """Return rotations to start from, all positions 0: these the first step finds exactly.

    Matrices that are free to be no rotations are fitted linearly, and the nearest rotations taken.
    """
    turned = graph.of_in[:, :3, :3]
    weight = 1.0 / angle_sd[:, None, None]
    # Of the transposed rotations M: outer = turned^T inner; the root's is the identity.
    of_inner, of_outer = -np.swapaxes(turned, 1, 2) * weight, np.eye(3) * weight
    frame_in_root = np.zeros((len(graph.names), 4, 4)) + np.eye(4)
    if pattern.nodes == 0:
        return frame_in_root
    held = np.where((unknown < 0)[:, None, None], np.eye(3), 0.0)
    off = of_outer @ held[graph.outer] + of_inner @ held[graph.inner]
    right = -pattern.gathered(np.swapaxes(of_inner, 1, 2) @ off, np.swapaxes(of_outer, 1, 2) @ off)
    solve = pattern.normal(of_inner, of_outer).solver(CONJUGATE_ACCURACY, between)
    transposed = solve(right.reshape(-1, 3)).reshape(-1, 3, 3)
    rotations = nearest_rotation(np.swapaxes(transposed, 1, 2))
    frame_in_root[unknown >= 0, :3, :3] = rotations[unknown[unknown >= 0]]
    return frame_in_root


def _step(
    pattern: BlockPattern, at: Linearised, between: Callable[[], None], *, bent: bool
) -> tuple[FloatArray, float]:
    """Return the step downhill, (unknown frames, 6), and its length in standard deviations.

    Where the residuals are large their bend counts too (Newton), unless it leads uphill.
    """
    downhill = -at.gradient(pattern)
    normal = pattern.normal(at.of_inner, at.of_outer)
    for matrix in [normal + at.bend(pattern), normal] if bent else [normal]:
        solve = matrix.solver(CONJUGATE_ACCURACY, between)
        step = solve(downhill.reshape(-1, 1)).reshape(-1, 6)
        square = float((step * downhill).sum())
        if square >= 0.0:
            break
    return step, float(np.sqrt(max(square, 0.0)))


def _steepest(pattern: BlockPattern, at: Linearised) -> float:
    """Return the largest slope along one number of one frame.

    It is the step of that number alone, in standard deviations as they were if all else was known:
    never longer than the whole step, unless the equations were not solved.
    """
    diagonal = np.diagonal(pattern.normal(at.of_inner, at.of_outer).diagonal(), axis1=1, axis2=2)
    return float((np.abs(at.gradient(pattern)) / np.sqrt(diagonal)).max(initial=0.0))


def _amplified(
    pattern: BlockPattern, at: Linearised, between: Callable[[], None]
) -> tuple[FloatArray | None, float]:
    """Return the root of the inverse, and by how much the equations amplify rounding.

    Of large networks there is no root, and it is only known that no relation is too far apart.
    """
    normal = pattern.normal(at.of_inner, at.of_outer)
    if not normal.is_small:
        return None, 0.0
    between()
    return normal.root_of_inverse()


def _of_frames(step: FloatArray, unknown: IntArray) -> FloatArray:
    """Return the step of each frame, 0 for those that are held."""
    return np.concatenate([step, np.zeros((1, 6))])[unknown]


def _lower(
    graph: FrameGraph,
    weights: Weights,
    frame_in_root: FloatArray,
    at: Linearised,
    step: FloatArray,
) -> tuple[FloatArray, Linearised] | None:
    """Return where the step, or a half of a half of it, leads downhill; None if nowhere."""
    for halvings in range(MOST_HALVINGS):
        part = step * 0.5**halvings
        tried = pose(
            rotation_from_vector(part[:, 3:]) @ frame_in_root[:, :3, :3],
            frame_in_root[:, :3, 3] + part[:, :3],
        )
        there = linearised(graph, weights, tried)
        if there.sum_of_squares <= at.sum_of_squares * (1.0 + LEVEL) + LEVEL:
            return tried, there
    return None
