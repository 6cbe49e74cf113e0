"""What three joints have to fulfil, written for each kind of pair as the same four terms in c.

Joint c carries the start along a circle (or a line), so each coordinate of it is linear in cos c
and sin c (or in c). What joints a and b can then still reach is told by y, the place the start is
turned to in the plane of the pair's record: A = qa y1, B = qb y2, and V = (V1, V2) has y's length.
All four are linear like the coordinates. Points and planes differ in A alone: of a plane the normal
turns and the offset follows.

Source: Pieper 1968 for two turning axes and a point, with the powers of the half angle's tangent
replaced by terms linear in cosine and sine; planes and slides worked out likewise here.
Not covered: two slides as the pair, and planes moved by a slide (regional_slides.py).
"""

import math

from kinematics.inverse.kernel_numbers import entries
from kinematics.inverse.regional_pairs import (
    ACROSS,
    ALONG,
    E1,
    E2,
    HA,
    HB,
    KIND,
    PA,
    PB,
    QA,
    QB,
    SHARE_A,
    SHARE_B,
    TURN_SLIDE,
    TURN_TURN,
    U,
    dot_at,
)
from kinematics.inverse.trig_roots import CONSTANT, SLACK, WEIGHT
from kinematics.kernels.compiler import compiled
from kinematics.number_checks import FloatArray

A, B, V1, V2, BESIDE = entries(0, 5)
"""Rows of the equations, (5, 6): the four terms, and what is needed beside them to tell a and b: of
two turning axes the start's height along b; of a slide how far it moves where y1 = 0."""


@compiled
def write_path(
    slides: bool,
    axis: FloatArray,
    point: FloatArray,
    is_plane: bool,
    start: FloatArray,
    path: FloatArray,
) -> float:
    """Write where joint c carries the start, and return how far it swings it.

    Parameters
    ----------
    axis, point : (3,), of joint c. start : (4,), a point, or a plane's unit normal and offset.
    path : (3, 4), written: constant part, times cos c (or c, of a slide), times sin c; fourth
        column the offset of a plane.

    Returns
    -------
    swing : the circle's radius; 1 of a slide. Where it is 0, c changes nothing.
    """
    for k in range(3):
        path[k, 3] = 0.0
    if slides:
        for k in range(3):
            path[0, k], path[1, k], path[2, k] = start[k], axis[k], 0.0
        return 1.0
    x, y, z = start[0], start[1], start[2]
    if not is_plane:
        x, y, z = x - point[0], y - point[1], z - point[2]
    hx, hy, hz = axis[0], axis[1], axis[2]
    # Twice across: h x (h x r) is -r's part square to the axis, free of cancellation.
    sx, sy, sz = hy * z - hz * y, hz * x - hx * z, hx * y - hy * x
    cx, cy, cz = sy * hz - sz * hy, sz * hx - sx * hz, sx * hy - sy * hx
    path[0, 0], path[0, 1], path[0, 2] = x - cx, y - cy, z - cz
    path[1, 0], path[1, 1], path[1, 2] = cx, cy, cz
    path[2, 0], path[2, 1], path[2, 2] = sx, sy, sz
    if is_plane:
        path[0, 3] = start[3] - x * point[0] - y * point[1] - z * point[2]
        for k in range(3):
            for i in range(3):
                path[k, 3] += path[k, i] * point[i]
    else:
        for i in range(3):
            path[0, i] += point[i]
    return math.sqrt(cx * cx + cy * cy + cz * cz)


@compiled
def _write_turns(
    pair: FloatArray, path: FloatArray, is_plane: bool, goal: FloatArray, equations: FloatArray
) -> None:
    """Write the terms for two turning axes: y is the place joint b turns the start to."""
    gx, gy, gz = goal[0], goal[1], goal[2]
    ux, uy, uz = pair[U], pair[U + 1], pair[U + 2]
    x0, y0, z0 = path[0, 0], path[0, 1], path[0, 2]
    if is_plane:
        known = goal[3] - dot_at(pair, PA, gx, gy, gz)
        tilt, length = dot_at(pair, HA, gx, gy, gz), 1.0
    else:
        gx, gy, gz = gx - pair[PA], gy - pair[PA + 1], gz - pair[PA + 2]
        x0, y0, z0 = x0 - pair[PB], y0 - pair[PB + 1], z0 - pair[PB + 2]
        length = gx * gx + gy * gy + gz * gz
        swing = path[1, 0] * path[1, 0] + path[1, 1] * path[1, 1] + path[1, 2] * path[1, 2]
        # Of |y| the squares of what stays and of what swings make up the constant part.
        known = 0.5 * (length - ux * ux - uy * uy - uz * uz - swing)
        known += 0.5 * (x0 * x0 + y0 * y0 + z0 * z0)
        tilt = dot_at(pair, HA, gx - ux, gy - uy, gz - uz)
    beside = dot_at(pair, HB, ux, uy, uz)
    for k in range(3):
        x, y, z = path[k, 0], path[k, 1], path[k, 2]
        if k == 0:
            x, y, z = x0, y0, z0
        height = dot_at(pair, HB, x, y, z)
        along_u, along_a = -beside * height, -pair[ALONG] * height
        if is_plane:
            along_u += dot_at(pair, PB, x, y, z) - path[k, 3]
        else:
            along_u -= x0 * x + y0 * y + z0 * z
        if k == 0:
            along_u, along_a = along_u + known, along_a + tilt
        equations[A, CONSTANT + k] = along_u - pair[SHARE_A] * along_a
        equations[B, CONSTANT + k] = along_a - pair[SHARE_B] * along_u
        equations[V1, CONSTANT + k] = dot_at(pair, E1, x, y, z)
        equations[V2, CONSTANT + k] = dot_at(pair, E2, x, y, z)
        equations[BESIDE, CONSTANT + k] = height
    equations[A, SLACK] *= 1.0 + math.sqrt(length)
    equations[B, SLACK] *= 1.0 + abs(pair[SHARE_B])


@compiled
def _write_turn_and_slide(
    pair: FloatArray, path: FloatArray, goal: FloatArray, equations: FloatArray
) -> None:
    """Write the terms where a turns and b slides: y is the place the slide brings the start to."""
    gx, gy, gz = goal[0] - pair[PA], goal[1] - pair[PA + 1], goal[2] - pair[PA + 2]
    across, along = pair[ACROSS], pair[ALONG]
    for k in range(3):
        x, y, z = path[k, 0], path[k, 1], path[k, 2]
        if k == 0:
            x, y, z = x - pair[PA], y - pair[PA + 1], z - pair[PA + 2]
        height, first = dot_at(pair, HA, x, y, z), dot_at(pair, E1, x, y, z)
        equations[BESIDE, CONSTANT + k] = -along * height - across * first
        equations[A, CONSTANT + k] = along * first - across * height
        equations[B, CONSTANT + k] = dot_at(pair, E2, x, y, z)
        equations[V1, CONSTANT + k], equations[V2, CONSTANT + k] = 0.0, 0.0
    wanted = dot_at(pair, HA, gx, gy, gz)
    equations[BESIDE, CONSTANT] += along * wanted
    equations[A, CONSTANT] += across * wanted
    equations[V1, CONSTANT] = dot_at(pair, E1, gx, gy, gz)
    equations[V2, CONSTANT] = dot_at(pair, E2, gx, gy, gz)


@compiled
def _write_slide_and_turn(
    pair: FloatArray, path: FloatArray, goal: FloatArray, equations: FloatArray
) -> None:
    """Write the terms where a slides and b turns: y is the place the slide leaves b to turn to."""
    gx, gy, gz = goal[0] - pair[PB], goal[1] - pair[PB + 1], goal[2] - pair[PB + 2]
    across, along = pair[ACROSS], pair[ALONG]
    for k in range(3):
        x, y, z = path[k, 0], path[k, 1], path[k, 2]
        if k == 0:
            x, y, z = x - pair[PB], y - pair[PB + 1], z - pair[PB + 2]
        height = dot_at(pair, HB, x, y, z)
        equations[BESIDE, CONSTANT + k] = -along * height
        equations[V1, CONSTANT + k] = dot_at(pair, E1, x, y, z)
        equations[V2, CONSTANT + k] = dot_at(pair, E2, x, y, z)
        equations[A, CONSTANT + k] = across * height
        equations[B, CONSTANT + k] = 0.0
    wanted, first = dot_at(pair, HB, gx, gy, gz), dot_at(pair, E1, gx, gy, gz)
    equations[BESIDE, CONSTANT] += along * wanted + across * first
    equations[A, CONSTANT] += along * first - across * wanted
    equations[B, CONSTANT] = dot_at(pair, E2, gx, gy, gz)


@compiled
def write_equations(
    pair: FloatArray,
    path: FloatArray,
    is_plane: bool,
    goal: FloatArray,
    slack: float,
    equations: FloatArray,
) -> None:
    """Write the terms of A^2 / qa^2 + B^2 / qb^2 = V1^2 + V2^2, scaled so that no weight passes 1.

    Parameters
    ----------
    pair : (PAIR,), with at least one turning joint. path : (3, 4), of ``write_path``.
    goal : (4,). slack : by how much lengths, and directions, may be off.
    equations : (5, 6), written; the columns of trig_roots.py.
    """
    for row in range(5):
        equations[row, SLACK] = slack
    if pair[KIND] == TURN_TURN:
        _write_turns(pair, path, is_plane, goal, equations)
    elif pair[KIND] == TURN_SLIDE:
        _write_turn_and_slide(pair, path, goal, equations)
    else:
        _write_slide_and_turn(pair, path, goal, equations)
    qa, qb = pair[QA] * pair[QA], pair[QB] * pair[QB]
    larger = max(qa, qb)
    equations[A, WEIGHT] = qb / larger
    equations[B, WEIGHT] = qa / larger
    equations[V1, WEIGHT] = -min(qa, qb)
    equations[V2, WEIGHT] = -min(qa, qb)
