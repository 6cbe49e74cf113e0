"""Compiled kernels against NumPy, as ratios in one run: `python tests/benchmarks/kernels.py`.

Each figure is the median of several runs, the two sides taking turns. The yardsticks are written
as one would write them in NumPy alone: a chain of batched 4 x 4 products, and the same chain as
structures of arrays in chunks that stay in the cache (the best of several chunk sizes).
"""

import os
import statistics
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from time import perf_counter

for name in ("OPENBLAS_CORETYPE", "OPENBLAS_L2_SIZE"):
    os.environ.pop(name, None)

import numpy as np  # noqa: E402
from numpy.typing import NDArray  # noqa: E402

from kinematics.arm import Arm  # noqa: E402
from kinematics.chain import tool_in_base  # noqa: E402
from kinematics.jacobian import motion_of, singular_values_of  # noqa: E402
from kinematics.table import Convention, FloatArray, JointKind, Row, Table  # noqa: E402

POSTURES = 1_000_000
JACOBIANS = 100_000
PIECE = 4096
CHUNKS = (512, 1024, 2048, 4096, 8192, 16_384)
TURNS = 9
SEED = 20_261_201

# A spherical wrist behind a shoulder and an elbow; invented.
LENGTHS = ((0.06, 0.41), (0.52, 0.0), (0.03, 0.0), (0.0, 0.47), (0.0, 0.0), (0.0, 0.11))
TWISTS = (np.pi / 2, 0.0, np.pi / 2, -np.pi / 2, np.pi / 2, 0.0)
OFFSETS = (0.0, 0.0, np.pi / 2, 0.0, 0.0, 0.0)
TOOL = np.eye(4)
TOOL[2, 3] = 0.15


def arm() -> Arm:
    """Return the six-joint arm that everything is measured on."""
    rows = tuple(
        Row(JointKind.REVOLUTE, a, alpha, d, theta)
        for (a, d), alpha, theta in zip(LENGTHS, TWISTS, OFFSETS, strict=True)
    )
    return Arm("measured", Table(Convention.STANDARD, rows))


def chain_of_products(joint_values: FloatArray) -> FloatArray:
    """Yardstick: one batched 4 x 4 product per row."""
    pose = np.broadcast_to(np.eye(4), (len(joint_values), 4, 4))
    for row, ((a, d), alpha) in enumerate(zip(LENGTHS, TWISTS, strict=True)):
        cosine, sine = (
            np.cos(joint_values[:, row] + OFFSETS[row]),
            np.sin(joint_values[:, row] + OFFSETS[row]),
        )
        link = np.zeros((len(joint_values), 4, 4))
        link[:, 0, 0], link[:, 0, 1], link[:, 0, 2] = (
            cosine,
            -sine * np.cos(alpha),
            sine * np.sin(alpha),
        )
        link[:, 1, 0], link[:, 1, 1], link[:, 1, 2] = (
            sine,
            cosine * np.cos(alpha),
            -cosine * np.sin(alpha),
        )
        link[:, 0, 3], link[:, 1, 3] = a * cosine, a * sine
        link[:, 2, 1], link[:, 2, 2], link[:, 2, 3] = np.sin(alpha), np.cos(alpha), d
        link[:, 3, 3] = 1.0
        pose = pose @ link
    return pose @ TOOL


def structures_of_arrays(
    joint_values: FloatArray, chunk: int, poses: NDArray[np.floating]
) -> NDArray[np.floating]:
    """Yardstick: the same chain on arrays of single entries, a chunk at a time, into ``poses``."""
    number = poses.dtype.type
    poses[:, 3, 3] = 1.0
    for begin in range(0, len(joint_values), chunk):
        turned = np.ascontiguousarray(joint_values[begin : begin + chunk].T, dtype=number)
        count = turned.shape[1]
        axes = [[np.full(count, float(i == j), dtype=number) for i in range(3)] for j in range(3)]
        x, y, z = axes
        point = [np.zeros(count, dtype=number) for _ in range(3)]
        for row, ((a, d), alpha) in enumerate(zip(LENGTHS, TWISTS, strict=True)):
            # Offsets enter by the angle sum, as they are doubles that no sum should round.
            offset, twist = number(OFFSETS[row]), number(alpha)
            c, s = np.cos(turned[row]), np.sin(turned[row])
            cosine = c * np.cos(offset) - s * np.sin(offset)
            sine = s * np.cos(offset) + c * np.sin(offset)
            cos_twist, sin_twist = np.cos(twist), np.sin(twist)
            for i in range(3):
                new_x = cosine * x[i] + sine * y[i]
                new_y = cosine * y[i] - sine * x[i]
                point[i] = point[i] + number(d) * z[i] + number(a) * new_x
                x[i] = new_x
                y[i], z[i] = (
                    cos_twist * new_y + sin_twist * z[i],
                    cos_twist * z[i] - sin_twist * new_y,
                )
        block = poses[begin : begin + chunk]
        for i in range(3):
            block[:, i, 0], block[:, i, 1], block[:, i, 2] = x[i], y[i], z[i]
            block[:, i, 3] = point[i] + number(TOOL[2, 3]) * z[i]
    return poses


def seconds(*sides: Callable[[], object]) -> list[float]:
    """Return the median seconds of each side, the sides taking turns."""
    taken: list[list[float]] = [[] for _ in sides]
    for _ in range(TURNS):
        for place, side in enumerate(sides):
            started = perf_counter()
            side()
            taken[place].append(perf_counter() - started)
    return [statistics.median(times) for times in taken]


def forward(measured: Arm, joint_values: FloatArray) -> None:
    """Print what forward kinematics reaches on one core and on two.

    In pieces as the service works on them, each written over the one before, so that what is
    measured is the work and not fresh memory. The chain of products goes over all postures at
    once, as it is written by hand; that one in pieces is shown beside it.
    """
    half = len(joint_values) // 2

    def in_pieces(
        side: Callable[[FloatArray, FloatArray], object], of: FloatArray, size: int = PIECE
    ) -> None:
        poses = np.zeros((size, 4, 4))
        for begin in range(0, len(of), size):
            piece = of[begin : begin + size]
            side(piece, poses[: len(piece)])

    def ours(of: FloatArray) -> None:
        in_pieces(lambda piece, poses: tool_in_base(measured, piece, TOOL, poses), of)

    pool = ThreadPoolExecutor(2)

    def on_two_cores() -> None:
        list(pool.map(ours, (joint_values[:half], joint_values[half:])))

    # Two cores first: the chain of products leaves the machine busy with gigabytes given back.
    alone, two = seconds(lambda: ours(joint_values), on_two_cores)
    one, products, pieces = seconds(
        lambda: ours(joint_values),
        lambda: chain_of_products(joint_values),
        lambda: in_pieces(lambda piece, _: chain_of_products(piece), joint_values),
    )
    beside, chunked = min(
        (
            seconds(
                lambda: ours(joint_values),
                lambda chunk=chunk: in_pieces(  # type: ignore[misc]
                    lambda piece, poses: structures_of_arrays(piece, chunk, poses),
                    joint_values,
                    chunk,
                ),
            )
            for chunk in CHUNKS
        ),
        key=lambda pair: pair[1],
    )
    print(f"forward kinematics, {POSTURES} postures: {POSTURES / alone / 1e6:.1f} M/s")
    print(f"  {products / one:.0f} times the chain of 4 x 4 products")
    print(f"  {pieces / one:.0f} times the same in pieces of {PIECE}")
    print(f"  {chunked / beside:.1f} times chunked structures of arrays, at their best chunk")
    print(f"  two cores {alone / two:.2f} times one")


def accuracy(measured: Arm) -> None:
    """Print the largest error against 80-bit arithmetic, over the arm's length."""
    generator = np.random.default_rng(SEED)
    length = float(np.abs(np.array(LENGTHS)).sum() + TOOL[2, 3])
    for largest in (np.pi, 1e4):
        joint_values = generator.uniform(-largest, largest, (20_000, 6))
        exact = structures_of_arrays(
            joint_values, 4096, np.zeros((len(joint_values), 4, 4), dtype=np.longdouble)
        )
        error = np.abs(tool_in_base(measured, joint_values, TOOL) - exact)
        print(
            f"  joint values to {largest:.5g} rad: position {error[:, :3, 3].max() / length:.1e} "
            f"of the length, rotation {error[:, :3, :3].max():.1e}"
        )


def jacobians(measured: Arm, joint_values: FloatArray) -> None:
    """Print what Jacobians with their singular values reach."""

    def plain() -> FloatArray:
        axes, points = [], []
        frame = np.broadcast_to(np.eye(4), (len(joint_values), 4, 4))
        for row, ((a, d), alpha) in enumerate(zip(LENGTHS, TWISTS, strict=True)):
            axes.append(frame[:, :3, 2])
            points.append(frame[:, :3, 3])
            angle = joint_values[:, row] + OFFSETS[row]
            link = np.zeros((len(joint_values), 4, 4))
            cosine, sine, c, s = np.cos(angle), np.sin(angle), np.cos(alpha), np.sin(alpha)
            link[:, 0, 0], link[:, 0, 1], link[:, 0, 2] = cosine, -sine * c, sine * s
            link[:, 1, 0], link[:, 1, 1], link[:, 1, 2] = sine, cosine * c, -cosine * s
            link[:, 0, 3], link[:, 1, 3] = a * cosine, a * sine
            link[:, 2, 1], link[:, 2, 2], link[:, 2, 3], link[:, 3, 3] = s, c, d, 1.0
            frame = frame @ link
        tool = (frame @ TOOL)[:, None, :3, 3]
        axis, point = np.stack(axes, axis=1), np.stack(points, axis=1)
        columns = np.concatenate([np.cross(axis, tool - point), axis], axis=-1)
        values: FloatArray = np.linalg.svd(np.swapaxes(columns, -1, -2), compute_uv=False)
        return values

    def ours() -> FloatArray:
        return singular_values_of(motion_of(measured, joint_values, TOOL).of_joints)

    mine, theirs = seconds(ours, plain)
    off = np.abs(ours()[:, -1] - plain()[:, -1]) / plain()[:, 0] / np.finfo(float).eps
    print(f"Jacobian and singular values, {len(joint_values)} postures")
    print(f"  {theirs / mine:.1f} times NumPy's batched pair")
    print(f"  smallest singular value within {off.max():.1f} eps of the largest")


def main() -> None:
    """Print every figure."""
    generator = np.random.default_rng(SEED)
    measured = arm()
    few = generator.uniform(-3.0, 3.0, (1000, 6))
    tool_in_base(measured, few, TOOL)
    singular_values_of(motion_of(measured, few, TOOL).of_joints)
    forward(measured, generator.uniform(-3.0, 3.0, (POSTURES, 6)))
    accuracy(measured)
    jacobians(measured, generator.uniform(-3.0, 3.0, (JACOBIANS, 6)))


if __name__ == "__main__":
    main()
