"""Whether an arm of this table can be where a sample says, and have come there since the last one.

Idea: what travel is judged by is laid out once for each revision, for hundreds of samples a second.
Left out: the numbers and the time of a sample alone (live_arm.py), clocks (source_clock.py).
"""

import numpy as np

from kinematics.findings import OUTSIDE_TRAVEL as OUTSIDE_TRAVEL_CODE
from kinematics.sampled_motion import joint_too_fast
from kinematics.travel_limits import TravelRun, travel_findings
from service.convert import finding_out
from service.live.samples import JUMP, OUTSIDE_TRAVEL, Sample
from service.wire.arms import ReadArm

_UNEVEN_S = 0.05
"""By so much more than two samples say may lie between them: times in whole milliseconds, tasks of
a controller that begin late, values that come together."""


class Weighing:
    """What samples of one revision of an arm are weighed by."""

    def __init__(self, read: ReadArm) -> None:
        self._read = read
        self._joints = np.empty((1, read.arm.joint_count))
        self._travel = TravelRun(read.arm, self._joints)

    def doubt(self, before: Sample | None, sample: Sample) -> tuple[str, str]:
        """Return why the arm cannot be there, and the sentence; empty where it can.

        Parameters
        ----------
        before : the last good sample.
        """
        self._joints[0] = sample.joints
        self._travel()
        if self._travel.margin[0] < 0.0:
            return OUTSIDE_TRAVEL, self._say_outside(sample)
        if before is not None:
            # Whichever is longer: a source may send late what it measured in time.
            arrived = sample.received_s - before.received_s
            elapsed = max(elapsed_s(before, sample), arrived, 0.0) + _UNEVEN_S
            joint = joint_too_fast(self._read.arm, before.joints, sample.joints, elapsed)
            if joint is not None:
                return JUMP, f"joint {joint} moved faster than its top speed"
        return "", ""

    def _say_outside(self, sample: Sample) -> str:
        """Return which joint is beyond which limit, in the arm's own units."""
        found = travel_findings(self._read.arm, np.array(sample.joints))
        # Of a sum of joints, rounding may say otherwise than the kernel.
        outside = [one for one in found if one.code == OUTSIDE_TRAVEL_CODE]
        if not outside:
            return "the last joint values are outside travel"
        return str(finding_out(self._read.units, outside[0])["say"])


def elapsed_s(first: Sample, second: Sample) -> float:
    """Return the seconds between two samples: by the source's clock where it says both times."""
    if first.source == second.source and None not in (first.sampled_ms, second.sampled_ms):
        return (second.sampled_ms - first.sampled_ms) / 1000.0  # type: ignore[operator]
    return second.received_s - first.received_s
