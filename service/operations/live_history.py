"""Where the tool of an arm was in the last ten minutes, by the samples that are kept.

Left out: how they are kept (service/live/history.py), and the formats (service/wire).
"""

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.table import FloatArray
from service.convert import joint_values_out, pose_orientations_out
from service.live.clocks import Clock
from service.live.live_arm import LiveArm
from service.operations.poses import placed
from service.operations.questions import Question

_BESIDE = 3


class Track(NamedTuple):
    """Samples of the past, the oldest first; in the units of a question.

    Attributes
    ----------
    happened_ms : (samples,), Unix milliseconds by our clock as it stands now.
    sequence : (samples,), -1 where the source said none; simulated : (samples,), bool.
    joints : (samples, joints); positions : (samples, 3); orientations : (samples, ...).
    """

    happened_ms: FloatArray
    sequence: FloatArray
    simulated: NDArray[np.bool_]
    joints: FloatArray
    positions: FloatArray
    orientations: FloatArray


def kept_samples(
    live: LiveArm, clock: Clock, from_ms: float, to_ms: float, every_ms: float, limit: int
) -> FloatArray:
    """Return the newest ``limit`` samples of a while, the last in each step of ``every_ms``.

    Returns
    -------
    As ``History.table``, with Unix milliseconds in the first column.
    """
    steady_s, wall_ms = clock.steady_s(), clock.wall_ms()
    from_s, to_s = (steady_s + (one - wall_ms) / 1000.0 for one in (from_ms, to_ms))
    found = live.history.table(from_s, to_s)
    found[:, 0] = wall_ms + (found[:, 0] - steady_s) * 1000.0
    if every_ms > 0.0 and len(found):
        # The last of each step of time, so that the newest is always among them.
        # Times are told in whole milliseconds: shorter steps than that are none.
        steps = np.floor((found[-1, 0] - found[:, 0]) / max(every_ms, 1.0))
        found = found[np.append(steps[1:] != steps[:-1], True)]
    return found[-limit:]


def track(question: Question, kept: FloatArray) -> Track:
    """Return where the tool was at samples as ``kept_samples`` returns them."""
    joints = np.ascontiguousarray(kept[:, _BESIDE:])
    tool_in_frame = placed(question, joints, None)
    orientations, _ = pose_orientations_out(question.units, question.form, tool_in_frame)
    return Track(
        np.round(kept[:, 0]),
        kept[:, 1],
        kept[:, 2] > 0.0,
        joint_values_out(question.arm, question.units, joints),
        question.units.length_out(tool_in_frame[:, :3, 3]),
        orientations,
    )
