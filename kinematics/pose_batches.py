"""Many poses from outside at once, where all of them can be taken as they are.

Left out: what is to be mended or refused; whoever meets it asks for each (orientation_batches).
"""

from typing import Final

import numpy as np

from kinematics.kernels.compiler import for_kernel
from kinematics.kernels.given_poses import QUATERNION, ROTATION_VECTOR, TRIPLE, write_poses
from kinematics.number_checks import FloatArray
from kinematics.orientation_forms import TRIPLES
from kinematics.rigidity import defect
from kinematics.tolerances import LARGEST_MAGNITUDE as LIMIT
from kinematics.tolerances import QUATERNION_SILENT as SILENT
from kinematics.tolerances import RIGID_SILENT
from kinematics.transforms import pose

Order = tuple[int, int, int, int]


def _order_of(triple: str) -> Order:
    """Return the axes of the turns, each about the current one, and 1 where that reverses them."""
    sequence, _, about = triple.partition("-")
    axes = ["xyz".index(letter) for letter in sequence]
    if about == "fixed":
        axes.reverse()
    return axes[0], axes[1], axes[2], int(about == "fixed")


_KINDS: Final[dict[str, tuple[int, Order]]] = {
    "quaternion-wxyz": (QUATERNION, (0, 1, 2, 3)),
    "quaternion-xyzw": (QUATERNION, (3, 0, 1, 2)),
    "rotation-vector": (ROTATION_VECTOR, (0, 0, 0, 0)),
    **{triple: (TRIPLE, _order_of(triple)) for triple in TRIPLES},
}


def poses_as_given(form: str, values: FloatArray, positions: FloatArray) -> FloatArray | None:
    """Return the poses, or None if one of them must be mended or cannot be used.

    Parameters
    ----------
    form : one of FORMS.
    values : (count, 3), (count, 4) or (count, 3, 3) as the form has it, no NaN; angles in rad.
    positions : (count, 3), m, no NaN.

    Returns
    -------
    poses : (count, 4, 4), entries within a few 1e-16; or None.

    Source
    ------
    As rotation_from, by way of quaternions.

    Examples
    --------
    >>> poses_as_given("xyz-fixed", np.zeros((1, 3)), np.array([[0.0, 0.0, 0.5]]))[0, 2]
    array([0. , 0. , 1. , 0.5])
    >>> poses_as_given("quaternion-wxyz", np.full((1, 4), 0.6), np.zeros((1, 3))) is None
    True
    """
    if form == "matrix":
        if not max(np.abs(values).max(initial=0.0), np.abs(positions).max(initial=0.0)) <= LIMIT:
            return None
        if (defect(values) > RIGID_SILENT).any() or (np.linalg.det(values) < 0.0).any():
            return None
        return pose(values, positions)
    kind, order = _KINDS[form]
    poses = np.empty((len(values), 4, 4))
    smallest, largest, farthest = write_poses(
        kind, order, for_kernel(values), for_kernel(positions), poses
    )
    if kind == QUATERNION and (abs(smallest - 1.0) > SILENT or abs(largest - 1.0) > SILENT):
        return None
    return poses if farthest <= LIMIT and largest <= LIMIT else None
