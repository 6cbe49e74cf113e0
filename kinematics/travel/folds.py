"""Folds: singular postures at which a branch ends, and how to leave one.

Idea: at a singular posture the tool has lost a motion, and some joint motion t moves nothing at
first. If along it the arm bends away from the lost motion, the tool gets there as t^2 does: two
postures, t and -t, lead to each place on one side, and none to those on the other. So the arm can
leave a fold to one side, on either of two branches, its joints infinitely fast at first. Where it
does not bend, joints can turn about with the tool at rest: no fold.

Source: the normal form of a fold, Golubitsky and Guillemin, Stable Mappings and Their
Singularities, 1973, chapter 3; the bend is one directional difference of the Jacobian. Not covered:
more than one lost motion at once.
"""

from typing import NamedTuple

import numpy as np

from kinematics.arm import Arm
from kinematics.jacobian import motion_of
from kinematics.table import FloatArray
from kinematics.task_space import TaskSpace
from kinematics.travel.tolerances import FOLD_BENDS, FOLD_STEP


class Fold(NamedTuple):
    """A posture at which a motion is (nearly) lost.

    Attributes
    ----------
    lost : (6,), unit direction, lengths over the characteristic one, base axes; as a covector of
        twists in metres and radians.
    idle : (joints,), joint motion that moves nothing, rad and m.
    bend : lost motion per square of that joint motion, twice. smallest : the singular value.
    """

    lost: FloatArray
    idle: FloatArray
    bend: float
    smallest: float

    @property
    def ends(self) -> bool:
        """Whether a branch ends here."""
        return abs(self.bend) > FOLD_BENDS * self.smallest

    def leaving(self, twist: FloatArray) -> FloatArray | None:
        """Return the joint motion that leaves it by a small twist (6,), up to its sign.

        None where the twist leads to the side that nothing reaches.
        """
        way = 2.0 * float(self.lost @ twist) / self.bend
        return float(np.sqrt(way)) * self.idle if way > 0.0 else None


def fold_at(
    arm: Arm, tool_in_flange: FloatArray, space: TaskSpace, posture: FloatArray
) -> Fold | None:
    """Return what is lost at a posture (joints,); None where the task asks nothing.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> from kinematics.task_space import task_space
    >>> rows = (Row(JointKind.REVOLUTE, 0.5, 0.0, 0.0, 0.0),) * 2
    >>> arm = Arm("planar", Table(Convention.STANDARD, rows))
    >>> fold = fold_at(arm, np.eye(4), task_space(arm, np.eye(4)), np.array([0.0, 0.0]))
    >>> fold.ends, fold.leaving(np.array([1e-4, 0, 0, 0, 0, 0]))
    (True, None)
    >>> np.abs(fold.leaving(np.array([-1e-4, 0, 0, 0, 0, 0]))).round(4)
    array([0.0141, 0.0283])
    """
    rank = space.generic_rank
    if not rank:
        return None
    of_joints = motion_of(arm, posture[None], tool_in_flange).of_joints[0]
    left, values, right = np.linalg.svd(_scaled(space, of_joints))
    lost, idle = left[:, rank - 1], right[rank - 1]
    aside = FOLD_STEP * idle * space.joint_scale
    either = motion_of(arm, posture + np.stack([-aside, aside]), tool_in_flange)
    before, after = _scaled(space, either.of_joints)
    bend = float(lost @ (after - before) @ idle) / (2.0 * FOLD_STEP)
    return Fold(lost @ space.row_map, idle * space.joint_scale, bend, float(values[rank - 1]))


def _scaled(space: TaskSpace, of_joints: FloatArray) -> FloatArray:
    scaled: FloatArray = space.row_map @ of_joints * space.joint_scale
    return scaled
