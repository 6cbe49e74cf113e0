"""What relations are off by when frames are placed somewhere, and how that changes as they move.

Left out: where frames are placed best (frame_estimate).
"""

from dataclasses import dataclass

import numpy as np

from kinematics.block_system import BlockMatrix, BlockPattern
from kinematics.errors import OutOfRange
from kinematics.frames import FrameGraph
from kinematics.number_checks import FloatArray
from kinematics.rotations import rotation_vector_of
from kinematics.tolerances import SDS_APART, USUAL_ANGLE_SD, USUAL_POSITION_SD

ROUNDING = 16 * np.finfo(np.float64).eps
SERIES_BELOW = 1e-3
"""Half angle, rad: the next term of the series is half^4 / 1890, below 1e-15 of the sum."""


@dataclass(frozen=True, eq=False)
class Linearised:
    """The weighted residuals of all relations near given poses, and how they change.

    Attributes
    ----------
    residuals : (relations, 6), of position and orientation in axes of the root, each over its
        standard deviation: pure numbers.
    of_inner, of_outer : (relations, 6, 6), change of the residuals by a small motion of either
        frame: its position, then its rotation, in axes of the root.
    given : (relations, 3), m, each relation's position as given, in axes of the root.
    turned_off : (relations, 3), rad, what its orientation is off by.
    weights : what the residuals were divided by.
    """

    residuals: FloatArray
    of_inner: FloatArray
    of_outer: FloatArray
    given: FloatArray
    turned_off: FloatArray
    weights: "Weights"

    @property
    def sum_of_squares(self) -> float:
        """The sum of all squared weighted residuals, which is to be least."""
        return float((self.residuals**2).sum())

    def gradient(self, pattern: BlockPattern) -> FloatArray:
        """Return half the slope of the sum of squares, (unknown frames, 6)."""
        off = self.residuals[..., None]
        return pattern.gathered(
            (np.swapaxes(self.of_inner, 1, 2) @ off)[..., 0],
            (np.swapaxes(self.of_outer, 1, 2) @ off)[..., 0],
        )

    def bend(self, pattern: BlockPattern) -> BlockMatrix:
        """Return what the second derivatives of the residuals add to the normal equations.

        Source
        ------
        Second-order terms of exp(w) u, and of the product of exponentials (Baker, Campbell,
        Hausdorff); the squared distance on SO(3) bends by half / tan half across its axis.
        """
        per_metre = 1.0 / self.weights.position_sd[:, None, None]
        per_radian = 1.0 / self.weights.angle_sd[:, None, None]
        off = self.residuals[:, :3, None] * per_metre
        across = off @ self.given[:, None, :]
        along = np.trace(across, axis1=1, axis2=2)[:, None, None] * np.eye(3)
        crossed = _cross(self.turned_off)
        squared, bent = crossed @ crossed, _bent(self.turned_off)
        less = ((0.25 - bent) * squared - bent**2 * (squared @ squared)) * per_radian**2
        ends, inner, between = (np.zeros_like(self.of_inner) for _ in range(3))
        ends[:, 3:, 3:] = less
        inner[:, 3:, 3:] = less + along - 0.5 * (across + np.swapaxes(across, 1, 2))
        between[:, 3:, 3:] = 0.5 * crossed * per_radian**2 - less
        return pattern.matrix(inner, ends, between)


@dataclass(frozen=True, eq=False)
class Weights:
    """Standard deviations of relations, (relations,) each, m and rad."""

    position_sd: FloatArray
    angle_sd: FloatArray

    def refuse_if_far_apart(self) -> None:
        """Refuse what the normal equations cannot tell: they square ratios.

        Raises
        ------
        OutOfRange : of the two furthest apart, that further from the usual one; so never one that
            was not stated.
        """
        for field, sds, usual in (
            ("position_sd", self.position_sd, USUAL_POSITION_SD),
            ("angle_sd", self.angle_sd, USUAL_ANGLE_SD),
        ):
            if not len(sds) or sds.max() <= sds.min() * SDS_APART * (1.0 + ROUNDING):
                continue
            furthest = int(np.argmax(np.abs(np.log(sds / usual))))
            ratio = sds.max() / sds.min()
            what = field.partition("_")[0]
            raise OutOfRange(
                f"standard deviations of {what}s differ by a factor of {ratio:.2g}, and no more "
                f"than {SDS_APART:g} can be weighed against each other (those not stated are "
                "1 mm and 1 mrad, as are those of arms and cells)",
                where=("relations", furthest, field),
                value=float(sds[furthest]),
                way_out=f"give it nearer the others: within a factor of {SDS_APART:g} the larger "
                "ones give way all the same",
            )

    def rounding(self, graph: FrameGraph, frame_in_root: FloatArray) -> float:
        """Return how long, in standard deviations, a step out of rounding alone may be."""
        places = np.concatenate([frame_in_root[:, :3, 3], graph.of_in[:, :3, 3]])
        extent = np.abs(places).max(initial=0.0)
        per_metre, per_radian = (
            np.linalg.norm(1 / self.position_sd),
            np.linalg.norm(1 / self.angle_sd),
        )
        return float(ROUNDING * (extent * per_metre + per_radian))


def linearised(graph: FrameGraph, weights: Weights, frame_in_root: FloatArray) -> Linearised:
    """Return what all relations are off by at given poses.

    Parameters
    ----------
    frame_in_root : (frames, 4, 4), each in one frame that is held.

    Source
    ------
    The position of ``of`` in ``within`` less the one given, and the rotation vector from the
    orientation given to the one found; both turned into axes of the root.

    Examples
    --------
    >>> from kinematics.transforms import pose
    >>> graph = FrameGraph(["a"], ["world"], pose(np.eye(3), [[0, 0, 1.0]]))
    >>> there = pose(np.eye(3), [[0, 0, 0], [0, 0, 1.5]])
    >>> linearised(graph, Weights(np.array([0.25]), np.array([1.0])), there).residuals.tolist()
    [[0.0, 0.0, 2.0, 0.0, 0.0, 0.0]]
    """
    inner_in_root, outer_in_root = frame_in_root[graph.inner], frame_in_root[graph.outer]
    inner_rotation, outer_rotation = inner_in_root[:, :3, :3], outer_in_root[:, :3, :3]
    given = (inner_rotation @ graph.of_in[:, :3, 3:])[..., 0]
    off = outer_in_root[:, :3, 3] - inner_in_root[:, :3, 3] - given
    between = np.swapaxes(inner_rotation @ graph.of_in[:, :3, :3], 1, 2) @ outer_rotation
    turned_off = (outer_rotation @ rotation_vector_of(between)[..., None])[..., 0]
    per_metre = 1.0 / weights.position_sd[:, None]
    per_radian = 1.0 / weights.angle_sd[:, None]
    of_inner = np.zeros((len(graph.inner), 6, 6))
    of_outer = np.zeros_like(of_inner)
    of_outer[:, :3, :3] = np.eye(3) * per_metre[..., None]
    of_outer[:, 3:, 3:] = _turning_to_vector(turned_off) * per_radian[..., None]
    of_inner[:, :3, :3] = -of_outer[:, :3, :3]
    of_inner[:, 3:, 3:] = -of_outer[:, 3:, 3:]
    of_inner[:, :3, 3:] = _cross(given) * per_metre[..., None]
    residuals = np.concatenate([off * per_metre, turned_off * per_radian], axis=1)
    return Linearised(residuals, of_inner, of_outer, given, turned_off, weights)


def _turning_to_vector(vectors: FloatArray) -> FloatArray:
    """Return how rotation vectors (..., 3) change by small turns put before, (..., 3, 3).

    Source
    ------
    Inverse right Jacobian of SO(3): Chirikjian, Stochastic Models, Information Theory, and Lie
    Groups 2, 10.4; here of the vector in the outer axes, in which both sides look the same.
    """
    crossed = _cross(vectors)
    changes: FloatArray = np.eye(3) + 0.5 * crossed + _bent(vectors) * (crossed @ crossed)
    return changes


def _bent(vectors: FloatArray) -> FloatArray:
    """Return (1 - half / tan half) / angle^2 of rotation vectors (..., 3), as (..., 1, 1)."""
    half = 0.5 * np.linalg.norm(vectors, axis=-1)[..., None, None]
    with np.errstate(invalid="ignore", divide="ignore"):
        quotient = (1.0 - half * np.cos(half) / np.sin(half)) / (4.0 * half**2)
    # The series is good to the last digit where the quotient has lost half of its digits.
    bent: FloatArray = np.where(half < SERIES_BELOW, 1.0 / 12.0 + half**2 / 180.0, quotient)
    return bent


def _cross(vectors: FloatArray) -> FloatArray:
    """Return the matrices (..., 3, 3) that multiply by vectors (..., 3) from the left."""
    matrices = np.zeros((*vectors.shape, 3))
    x, y, z = np.moveaxis(vectors, -1, 0)
    matrices[..., 0, 1], matrices[..., 0, 2], matrices[..., 1, 2] = -z, y, -x
    matrices[..., 1, 0], matrices[..., 2, 0], matrices[..., 2, 1] = z, -y, x
    return matrices
