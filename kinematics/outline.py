"""What a drawing of an arm is made from: its axes, the line from base to tool, and both ends.

Idea: between two neighbouring axes a table knows a length along the first axis (d) and one across
it (a), and nothing of the bodies. So the line goes from each axis' foot along the axis, then over
to the next; it has the same corners in both conventions, which part the same chain elsewhere.
Left out: how thick an arm is (no table says), and the paper.
"""

from dataclasses import dataclass

import numpy as np

from kinematics.arm import Arm
from kinematics.chain import walk
from kinematics.table import FloatArray
from kinematics.transforms import in_frame


@dataclass(frozen=True)
class Outline:
    """The lines of an arm in postures (...,), in metres; n rows, passive ones among them.

    Attributes
    ----------
    axis_from, axis_to : (..., n, 3), where the line comes to each axis and where it leaves it. For
        a row that slides the stretch between them is what slides.
    axis_direction : (..., n, 3), unit vectors, the z axes of the table.
    line : (..., 2 n + 3, 3), base origin, then the two places of each axis, flange, tool point.
        Places that coincide are all there, so that each keeps its number.
    base, flange, tool : (..., 4, 4), their poses.
    """

    axis_from: FloatArray
    axis_to: FloatArray
    axis_direction: FloatArray
    line: FloatArray
    base: FloatArray
    flange: FloatArray
    tool: FloatArray


def outline(
    arm: Arm,
    joint_values: FloatArray,
    tool_in_flange: FloatArray,
    base_in_frame: FloatArray | None = None,
) -> Outline:
    """Return the lines of an arm for postures (..., joints), in a frame that does not move.

    Parameters
    ----------
    joint_values : radians or metres, as the controller shows them.
    tool_in_flange : (4, 4). base_in_frame : (4, 4); None for the base itself.

    Source
    ------
    Denavit and Hartenberg (1955): a lies along the common normal of two axes, d along the first of
    them between two such normals. The next axis' place is therefore across from where the line
    leaves this one, which is that place's nearest point on this axis.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> rows = (Row(JointKind.REVOLUTE, 0.3, 0.0, 0.5, 0.0),)
    >>> arm = Arm("post", Table(Convention.STANDARD, rows))
    >>> outline(arm, np.array([0.0]), np.eye(4)).line.tolist()[1:4]
    [[0.0, 0.0, 0.0], [0.0, 0.0, 0.5], [0.3, 0.0, 0.5]]
    """
    walked = walk(arm, joint_values)
    places, flange = walked.axis_point, walked.flange_in_base
    following = np.concatenate([places, flange[..., None, :3, 3]], axis=-2)[..., 1:, :]
    along = ((following - places) * walked.axis_direction).sum(axis=-1, keepdims=True)
    leaves = places + along * walked.axis_direction
    poses = np.stack([walked.link_in_base[..., 0, :, :], flange, flange @ tool_in_flange])
    base_in_frame = np.eye(4) if base_in_frame is None else base_in_frame
    turn, shift = base_in_frame[:3, :3].T, base_in_frame[:3, 3]
    base, flange, tool = in_frame(base_in_frame, poses)
    places, leaves = places @ turn + shift, leaves @ turn + shift
    of_axes = np.stack([places, leaves], axis=-2).reshape(*places.shape[:-2], -1, 3)
    ends = [pose[..., None, :3, 3] for pose in (base, flange, tool)]
    line = np.concatenate([ends[0], of_axes, *ends[1:]], axis=-2)
    return Outline(places, leaves, walked.axis_direction @ turn, line, base, flange, tool)
