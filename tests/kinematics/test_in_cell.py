"""What an arm says of the frames of its cell that it does not see."""

import numpy as np
import pytest

from kinematics.arm import NamedFrame
from kinematics.errors import UnknownFrame
from kinematics.in_cell import InCell
from tests.kinematics.example_arms import PLANAR, arm_of

CELL = InCell("north", 3, "d" * 64, unseen={"eye": "eye moves", 7: "eye moves"}, way_out="ask")


@pytest.mark.parametrize("frame", ["eye", 7])
def test_what_moves_is_refused_with_its_reason(frame: str | int) -> None:
    arm = arm_of(*PLANAR, cell=CELL)
    with pytest.raises(UnknownFrame) as caught:
        arm.frame_name(frame)
    error = caught.value
    assert (error.say, error.where, error.value, error.way_out) == (
        "eye moves",
        ("frame",),
        frame,
        "ask",
    )


def test_an_own_frame_cannot_stand_in_what_moves() -> None:
    with pytest.raises(UnknownFrame, match="eye moves") as caught:
        arm_of(*PLANAR, cell=CELL, frames={"spot": NamedFrame(np.eye(4), "eye")})
    assert (caught.value.where, caught.value.value) == (("frames", "spot", "in"), "eye")


def test_a_name_in_neither_is_refused_as_without_a_cell() -> None:
    with pytest.raises(UnknownFrame, match="no frame 'ear'") as caught:
        arm_of(*PLANAR, cell=CELL).frame_name("ear")
    assert caught.value.way_out == "one of: base, world"


def test_of_many_frames_the_nearest_is_told() -> None:
    frames = {f"slot-{number}": NamedFrame(np.eye(4)) for number in range(100)}
    with pytest.raises(UnknownFrame) as caught:
        arm_of(*PLANAR, frames=frames).frame_name("slto-42")
    assert caught.value.way_out == 'did you mean "slot-42"?'
