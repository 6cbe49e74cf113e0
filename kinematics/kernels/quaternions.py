"""Unit quaternions of many rotation matrices.

Left out: what the signs mean and where they come from (kinematics/rotations.py).
"""

import numpy as np

from kinematics.kernels.compiler import compiled_exactly
from kinematics.number_checks import FloatArray


@compiled_exactly
def quaternions_wxyz(
    rotations: FloatArray, half_turn: float, silent: float, quaternions: FloatArray
) -> None:
    """Write the unit quaternion of each rotation, scalar first and not negative.

    Parameters
    ----------
    rotations : (count, 3, 3), or (count, 4, 4), poses.
    half_turn : scalar up to which a rotation counts as a half turn.
    silent : entry up to which a component has no sign of its own.
    quaternions : (count, 4).

    Source
    ------
    Shepperd 1978: of the four quotients the one with the largest denominator.

    Examples
    --------
    >>> quaternions = np.empty((1, 4))
    >>> quaternions_wxyz(np.diag([-1.0, -1.0, 1.0])[None], 1e-15, 1e-12, quaternions)
    >>> quaternions
    array([[0., 0., 0., 1.]])
    """
    for b in range(rotations.shape[0]):
        r = rotations[b]
        xx, yy, zz = r[0, 0], r[1, 1], r[2, 2]
        from_x, from_y, from_z = r[2, 1] - r[1, 2], r[0, 2] - r[2, 0], r[1, 0] - r[0, 1]
        with_xy, with_xz, with_yz = r[0, 1] + r[1, 0], r[0, 2] + r[2, 0], r[1, 2] + r[2, 1]
        by_w, by_x = 1.0 + xx + yy + zz, 1.0 + xx - yy - zz
        by_y, by_z = 1.0 - xx + yy - zz, 1.0 - xx - yy + zz
        # Each is the quaternion times four times one of its own components.
        if by_w >= by_x and by_w >= by_y and by_w >= by_z:
            w, x, y, z = by_w, from_x, from_y, from_z
        elif by_x >= by_y and by_x >= by_z:
            w, x, y, z = from_x, by_x, with_xy, with_xz
        elif by_y >= by_z:
            w, x, y, z = from_y, with_xy, by_y, with_yz
        else:
            w, x, y, z = from_z, with_xz, with_yz, by_z
        norm = np.sqrt(w * w + x * x + y * y + z * z)
        # Numbers that are none make none; infinite ones too.
        scale = 1.0 / norm if np.isfinite(norm) else np.nan
        w, x, y, z = w * scale, x * scale, y * scale, z * scale
        leading = w
        if abs(w) <= half_turn:
            w = 0.0
            # The first component that is not 0 decides; x where all are (no rotation at all).
            leading = x
            if abs(x) <= silent:
                if abs(y) > silent:
                    leading = y
                elif abs(z) > silent:
                    leading = z
        sign = -1.0 if leading < 0.0 else 1.0
        # Adding 0.0 makes 0.0 of -0.0.
        quaternions[b, 0] = sign * w + 0.0
        quaternions[b, 1] = sign * x + 0.0
        quaternions[b, 2] = sign * y + 0.0
        quaternions[b, 3] = sign * z + 0.0
