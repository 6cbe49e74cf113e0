"""The chain walked for many postures: tool poses, joint axes and link frames.

Left out: what the numbers mean (kinematics/chain.py).
"""

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from kinematics.kernels.compiler import compiled
from kinematics.kernels.sine_cosine import sine_cosine
from kinematics.kernels.workspace import BLOCK, COSINE, POINT, SINE, SIZE, X, Y, Z
from kinematics.number_checks import FloatArray

Turn = Callable[[FloatArray, int, float, float, float, float], None]
Begin = Callable[[FloatArray, int, FloatArray, float, float, float, float], None]


def _turn_of(entry: int) -> Turn:
    """Return the kernel that carries one of the three entries of all axes over one row.

    A factory, since offsets must be constants when the kernel is compiled.
    """
    x_at, y_at, z_at, point_at = (
        X + entry * BLOCK,
        Y + entry * BLOCK,
        Z + entry * BLOCK,
        POINT + entry * BLOCK,
    )

    @compiled
    def turn(
        work: FloatArray, count: int, d: float, a: float, cos_alpha: float, sin_alpha: float
    ) -> None:
        for b in range(count):
            cosine, sine = work[COSINE + b], work[SINE + b]
            x, y, z = work[x_at + b], work[y_at + b], work[z_at + b]
            turned_x = cosine * x + sine * y
            turned_y = cosine * y - sine * x
            work[point_at + b] = work[point_at + b] + d * z + a * turned_x
            work[x_at + b] = turned_x
            work[y_at + b] = cos_alpha * turned_y + sin_alpha * z
            work[z_at + b] = cos_alpha * z - sin_alpha * turned_y

    return turn


_turn_0, _turn_1, _turn_2 = _turn_of(0), _turn_of(1), _turn_of(2)


@compiled
def _turn(
    work: FloatArray, count: int, d: float, a: float, cos_alpha: float, sin_alpha: float
) -> None:
    """Carry the frames over one row: its turn, ``d`` along its axis, and the X that follows."""
    _turn_0(work, count, d, a, cos_alpha, sin_alpha)
    _turn_1(work, count, d, a, cos_alpha, sin_alpha)
    _turn_2(work, count, d, a, cos_alpha, sin_alpha)


def _begin_of(entry: int) -> Begin:
    """Return the kernel that does for the first row what ``turn`` does for the others.

    From the one transform before it, in place of a frame for each posture.
    """
    x_at, y_at, z_at, point_at = (
        X + entry * BLOCK,
        Y + entry * BLOCK,
        Z + entry * BLOCK,
        POINT + entry * BLOCK,
    )

    @compiled
    def begin(
        work: FloatArray,
        count: int,
        first: FloatArray,
        d: float,
        a: float,
        cos_alpha: float,
        sin_alpha: float,
    ) -> None:
        x, y, z = first[entry, 0], first[entry, 1], first[entry, 2]
        point = first[entry, 3] + d * z
        y_of_z, z_of_z = sin_alpha * z, cos_alpha * z
        for b in range(count):
            cosine, sine = work[COSINE + b], work[SINE + b]
            turned_x = cosine * x + sine * y
            turned_y = cosine * y - sine * x
            work[point_at + b] = point + a * turned_x
            work[x_at + b] = turned_x
            work[y_at + b] = cos_alpha * turned_y + y_of_z
            work[z_at + b] = z_of_z - sin_alpha * turned_y

    return begin


_begin_0, _begin_1, _begin_2 = _begin_of(0), _begin_of(1), _begin_of(2)


@compiled
def _start(work: FloatArray, count: int, first: FloatArray) -> None:
    """Put the first constant transform into every posture of the block."""
    for entry in range(3):
        for b in range(count):
            work[X + entry * BLOCK + b] = first[entry, 0]
            work[Y + entry * BLOCK + b] = first[entry, 1]
            work[Z + entry * BLOCK + b] = first[entry, 2]
            work[POINT + entry * BLOCK + b] = first[entry, 3]


@compiled
def _drive(
    work: FloatArray,
    count: int,
    joint_values: FloatArray,
    begin: int,
    shares: FloatArray,
    offset: FloatArray,
    revolute: bool,
) -> None:
    """Put a row's cosine and sine into the block, and slide the frames by a prismatic row's value.

    The value is the row of the drive map times the joint values, most often one of them.
    """
    fresh, largest = True, 0.0
    for joint in range(shares.shape[0]):
        share = shares[joint]
        if share == 0.0:
            continue
        most = 0.0
        if fresh:
            for b in range(count):
                value = share * joint_values[begin + b, joint]
                work[COSINE + b] = value
                most = max(most, abs(value))
        else:
            for b in range(count):
                value = share * joint_values[begin + b, joint]
                work[COSINE + b] += value
                most = max(most, abs(value))
        fresh = False
        largest += most
    if fresh:
        for b in range(count):
            work[COSINE + b] = 0.0
    if revolute:
        sine_cosine(work, count, largest, offset[0], offset[1])
        return
    for entry in range(3):
        for b in range(count):
            work[POINT + entry * BLOCK + b] += work[COSINE + b] * work[Z + entry * BLOCK + b]
    for b in range(count):
        work[COSINE + b], work[SINE + b] = offset[0], offset[1]


@compiled
def _keep_frame(work: FloatArray, count: int, begin: int, frames: FloatArray, place: int) -> None:
    """Write the current frame of every posture to ``frames[begin + b, place]`` (4, 4)."""
    for b in range(count):
        for entry in range(3):
            at = entry * BLOCK + b
            frames[begin + b, place, entry, 0] = work[X + at]
            frames[begin + b, place, entry, 1] = work[Y + at]
            frames[begin + b, place, entry, 2] = work[Z + at]
            frames[begin + b, place, entry, 3] = work[POINT + at]
        for entry in range(3):
            frames[begin + b, place, 3, entry] = 0.0
        frames[begin + b, place, 3, 3] = 1.0


@compiled
def tool_poses(
    joint_values: FloatArray,
    drive_matrix: FloatArray,
    first: FloatArray,
    offset: FloatArray,
    link: FloatArray,
    revolute: NDArray[np.bool_],
    tool: FloatArray,
    poses: FloatArray,
) -> None:
    """Write the tool's pose in the base for each posture to ``poses`` (count, 4, 4).

    Parameters
    ----------
    joint_values : (count, joints); drive_matrix : (rows, joints).
    first, tool : (4, 4), the constant transforms before the first row and after the last.
    offset : (rows, 3), cosine and sine of theta, and d, at joint value 0.
    link : (rows, 3), a, and cosine and sine of alpha, of the X that follows each Z.

    Examples
    --------
    >>> poses = np.empty((1, 4, 4))
    >>> one_row = np.array([[1.0, 0.0, 0.0]]), np.array([[0.5, 1.0, 0.0]]), np.array([True])
    >>> tool_poses(np.array([[0.0]]), np.eye(1), np.eye(4), *one_row, np.eye(4), poses)
    >>> poses[0, :3, 3]
    array([0.5, 0. , 0. ])
    """
    work = np.empty(SIZE)
    # Most tools are only set off from the flange: the most work of a row less.
    turned = False
    for i in range(3):
        for j in range(3):
            turned |= tool[i, j] != (1.0 if i == j else 0.0)
    for begin in range(0, joint_values.shape[0], BLOCK):
        count = min(BLOCK, joint_values.shape[0] - begin)
        begun = 0
        if offset.shape[0] > 0 and revolute[0]:
            _drive(work, count, joint_values, begin, drive_matrix[0], offset[0], True)
            d, a, cos_alpha, sin_alpha = offset[0, 2], link[0, 0], link[0, 1], link[0, 2]
            _begin_0(work, count, first, d, a, cos_alpha, sin_alpha)
            _begin_1(work, count, first, d, a, cos_alpha, sin_alpha)
            _begin_2(work, count, first, d, a, cos_alpha, sin_alpha)
            begun = 1
        else:
            _start(work, count, first)
        for row in range(begun, offset.shape[0]):
            _drive(work, count, joint_values, begin, drive_matrix[row], offset[row], revolute[row])
            _turn(work, count, offset[row, 2], link[row, 0], link[row, 1], link[row, 2])
        for b in range(count):
            pose = poses[begin + b]
            for entry in range(3):
                at = entry * BLOCK + b
                x, y, z = work[X + at], work[Y + at], work[Z + at]
                if turned:
                    pose[entry, 0] = x * tool[0, 0] + y * tool[1, 0] + z * tool[2, 0]
                    pose[entry, 1] = x * tool[0, 1] + y * tool[1, 1] + z * tool[2, 1]
                    pose[entry, 2] = x * tool[0, 2] + y * tool[1, 2] + z * tool[2, 2]
                else:
                    pose[entry, 0], pose[entry, 1], pose[entry, 2] = x, y, z
                moved = x * tool[0, 3] + y * tool[1, 3] + z * tool[2, 3]
                pose[entry, 3] = moved + work[POINT + at]
            pose[3, 0] = 0.0
            pose[3, 1] = 0.0
            pose[3, 2] = 0.0
            pose[3, 3] = 1.0


@compiled
def frames_and_axes(
    joint_values: FloatArray,
    drive_matrix: FloatArray,
    first: FloatArray,
    offset: FloatArray,
    link: FloatArray,
    revolute: NDArray[np.bool_],
    standard: bool,
    direction: FloatArray,
    point: FloatArray,
    frames: FloatArray,
) -> None:
    """Write every axis, and every frame or the flange alone, that the walk meets, in the base.

    Parameters
    ----------
    standard : whether frame i is read off after X_i rather than before it.
    direction, point : (count, rows, 3), of the axis each row turns about or slides along.
    frames : (count, rows + 2, 4, 4): link frames 0 ... rows, then the flange; or (count, 1, 4, 4):
        the flange.
    """
    work = np.empty(SIZE)
    rows = offset.shape[0]
    every = frames.shape[1] > 1
    for begin in range(0, joint_values.shape[0], BLOCK):
        count = min(BLOCK, joint_values.shape[0] - begin)
        if every:
            for b in range(count):
                for i in range(4):
                    for j in range(4):
                        frames[begin + b, 0, i, j] = 1.0 if i == j else 0.0
        _start(work, count, first)
        for row in range(rows):
            for b in range(count):
                for entry in range(3):
                    direction[begin + b, row, entry] = work[Z + entry * BLOCK + b]
                    point[begin + b, row, entry] = work[POINT + entry * BLOCK + b]
            _drive(work, count, joint_values, begin, drive_matrix[row], offset[row], revolute[row])
            d = offset[row, 2]
            if every and not standard:
                _turn(work, count, d, 0.0, 1.0, 0.0)
                _keep_frame(work, count, begin, frames, row + 1)
                for b in range(count):
                    work[COSINE + b], work[SINE + b] = 1.0, 0.0
                d = 0.0
            _turn(work, count, d, link[row, 0], link[row, 1], link[row, 2])
            if every and standard:
                _keep_frame(work, count, begin, frames, row + 1)
        _keep_frame(work, count, begin, frames, frames.shape[1] - 1)
