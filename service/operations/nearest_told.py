"""The named frame nearest to the tool point, as it is told beside a pose.

Left out: which one it is (kinematics/nearest_frame.py).
"""

from collections.abc import Mapping

import numpy as np

from kinematics.nearest_frame import NearFrame
from service.convert import Units
from service.operations.questions import Question

KEY = "nearest"
_DECIMALS = {"mm": 0, "m": 3, "in": 1}
_NEAR_DECIMALS = {"mm": 1, "m": 4, "in": 2}
_NEAR_M = 0.01
"""Below a centimetre a digit more is said: there people look for the last bit."""

_AT_M = 5e-5
"""What rounds to no distance is at the frame, neither above nor below."""


def nearest_told(question: Question, item: Mapping[str, object]) -> dict[str, object] | None:
    """Return the frame nearest to a tool point; None where the arm names no frames.

    Parameters
    ----------
    item : the pose as it is told, in the frame and units of the question.
    """
    units, position = question.units, item["position"]
    assert isinstance(position, list)
    point = units.length_in(np.array(position))
    near = question.frame_places.nearest(point, question.frame_in_base)
    if near is None:
        return None
    return {
        "frame": near.name,
        "distance": units.value_out(near.distance, "m"),
        "position": [float(part) for part in units.length_out(near.position_in_frame)],
        "say": _said(near, units),
    }


def _said(near: NearFrame, units: Units) -> str:
    if near.distance < _AT_M:
        return f"at {near.name}"
    unit = units.unit_out("m")
    decimals = (_NEAR_DECIMALS if near.distance < _NEAR_M else _DECIMALS)[unit]
    where = ("above" if near.height > 0.0 else "below") if near.is_upright else "from"
    return f"{units.value_out(near.distance, 'm'):.{decimals}f} {unit} {where} {near.name}"
