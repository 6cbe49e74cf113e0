"""One posture of one arm after another, as a controller asks at every cycle.

The kernels work on batches. Here a batch of one is laid out once, so that a question costs the
kernels and little more; what comes out are plain numbers. Left out: the words (lost_motion.py).
"""

import threading
from collections.abc import Sequence
from typing import Any, NamedTuple

import numpy as np

from kinematics.arm import Arm
from kinematics.jacobian import MotionRun
from kinematics.orientation_forms import OrientationRun
from kinematics.singularity import JudgementRun
from kinematics.table import FloatArray
from kinematics.task_space import TaskSpace
from kinematics.travel_limits import TravelRun


class PostureReading(NamedTuple):
    """What is read off one posture; metres and radians.

    Attributes
    ----------
    position : 3 numbers; orientation : the values of the form asked for.
    from_lock : distance from gimbal lock, rad; infinite for forms without one.
    margin : smallest share of travel left; outside : whether a limit is exceeded.
    state, readings, step : as in ``Judgement``; None and empty for an arm without joints.
    """

    position: list[float]
    orientation: list[Any]
    from_lock: float
    margin: float
    outside: bool
    state: int | None
    readings: list[float]
    step: list[float]


class PostureReader:
    """Reads postures of one arm with one tool, in one frame and one orientation form.

    Safe to be used by several threads, one at a time.

    Parameters
    ----------
    base_in_frame : (4, 4); None where poses are wanted in the base.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table
    >>> from kinematics.task_space import task_space
    >>> rows = (Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0),) * 2
    >>> arm, flange = Arm("planar", Table(Convention.STANDARD, rows)), np.eye(4)
    >>> reader = PostureReader(arm, flange, None, "quaternion-wxyz", task_space(arm, flange))
    >>> reading = reader.read([0.0, 0.0])
    >>> reading.position, reading.state
    ([0.8, 0.0, 0.0], 2)
    """

    def __init__(
        self,
        arm: Arm,
        tool_in_flange: FloatArray,
        base_in_frame: FloatArray | None,
        form: str,
        space: TaskSpace | None,
    ) -> None:
        self._lock = threading.Lock()
        self._base_in_frame = base_in_frame
        self._values = np.empty((1, arm.joint_count))
        self._move = MotionRun(arm, self._values, tool_in_flange)
        self._travel = TravelRun(arm, self._values)
        tool_in_base = self._move.motion.tool_in_base
        self._tool_in_frame = tool_in_base if base_in_frame is None else np.empty((1, 4, 4))
        self._orient = OrientationRun(form, self._tool_in_frame)
        self._judge = None if space is None else JudgementRun(arm, space, self._move.motion)

    def read(self, joint_values: Sequence[float] | FloatArray) -> PostureReading:
        """Read the posture at joint values (joints,), rad or m."""
        with self._lock:
            self._values[0] = joint_values
            self._move()
            if self._base_in_frame is not None:
                in_base = self._move.motion.tool_in_base
                np.matmul(self._base_in_frame, in_base, out=self._tool_in_frame)
            self._orient()
            self._travel()
            pose = (
                self._tool_in_frame[0, :3, 3].tolist(),
                self._orient.values[0].tolist(),
                self._orient.from_lock.item(),
                self._travel.margin.item(),
                self._travel.outside.item(),
            )
            if self._judge is None:
                return PostureReading(*pose, None, [], [])
            self._judge()
            told = self._judge.judgement
            return PostureReading(
                *pose, told.state.item(), told.readings[0].tolist(), told.step[0].tolist()
            )
