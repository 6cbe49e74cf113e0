"""One posture read after another against the functions for many, with nothing left in between."""

from concurrent.futures import ThreadPoolExecutor
from dataclasses import replace

import numpy as np
import pytest

from kinematics.arm import Arm, CombinedTravel
from kinematics.chain import tool_in_base
from kinematics.jacobian import motion_of
from kinematics.number_checks import FloatArray
from kinematics.orientation_forms import FORMS, distance_from_lock, values_of
from kinematics.posture_reader import PostureReader, PostureReading
from kinematics.singularity import judge
from kinematics.table import Table, Travel
from kinematics.task_space import TaskSpace, task_space
from kinematics.travel_limits import margin_and_outside
from tests.kinematics.example_arms import (
    AT_FLANGE,
    NINE,
    QUARTER,
    SIX,
    arm_of,
    random_arm,
    random_joint_values,
    random_pose,
)


def bounded(arm: Arm) -> Arm:
    """Return the arm with travel on some rows, on a passive one too, with speeds and with a sum."""
    rows = tuple(
        replace(
            row,
            travel=Travel(-1.5, 2.0 + 0.1 * index) if index % 3 else None,
            working_travel=Travel(-1.0, 1.0) if index % 2 else None,
            top_speed=None if row.passive else 0.5 + 0.2 * index,
        )
        for index, row in enumerate(arm.table.rows)
    )
    turning = [index + 1 for index, row in enumerate(rows) if row.is_revolute and not row.passive]
    sums = (CombinedTravel(dict.fromkeys(turning[:2], 1.0), Travel(-2.0, 2.5)),)
    combined = sums if len(turning) > 1 else ()
    return Arm("bounded", Table(arm.table.convention, rows), combined_travel=combined)


def alike(reading: PostureReading, other: PostureReading, tolerance: float) -> None:
    assert (reading.outside, reading.state) == (other.outside, other.state)
    assert (len(reading.readings), len(reading.step)) == (len(other.readings), len(other.step))
    for part in ("position", "orientation", "from_lock", "margin", "readings", "step"):
        given, wanted = np.array(getattr(reading, part)), np.array(getattr(other, part))
        np.testing.assert_allclose(given, wanted, rtol=tolerance, atol=tolerance, err_msg=part)


def together(
    arm: Arm,
    tool: FloatArray,
    base_in_frame: FloatArray | None,
    form: str,
    space: TaskSpace | None,
    values: FloatArray,
) -> list[PostureReading]:
    """Return what the functions for many say of all the postures at once."""
    tool_in_frame = tool_in_base(arm, values, tool)
    if base_in_frame is not None:
        tool_in_frame = base_in_frame @ tool_in_frame
    orientations = values_of(form, tool_in_frame[:, :3, :3])
    from_lock = distance_from_lock(form, tool_in_frame[:, :3, :3])
    margin, outside = margin_and_outside(arm, values)
    judgement = None if space is None else judge(arm, space, motion_of(arm, values, tool))
    return [
        PostureReading(
            tool_in_frame[index, :3, 3].tolist(),
            orientations[index].tolist(),
            float(from_lock[index]),
            float(margin[index]),
            bool(outside[index]),
            None if judgement is None else int(judgement.state[index]),
            [] if judgement is None else judgement.readings[index].tolist(),
            [] if judgement is None else judgement.step[index].tolist(),
        )
        for index in range(len(values))
    ]


@pytest.mark.parametrize("joints", [0, 1, 5, 6, 7, 8])
@pytest.mark.parametrize("kind", ["turning", "sliding too", "coupled", "passive"])
@pytest.mark.parametrize("framed", [True, False], ids=["in a frame", "in the base"])
def test_one_by_one_as_together(joints: int, kind: str, framed: bool) -> None:
    random = np.random.default_rng([joints, len(kind), framed])
    arm = arm_of()
    if joints:
        arm = random_arm(
            random,
            joints,
            prismatic_share=0.0 if kind == "turning" else 0.3,
            coupled=kind == "coupled",
            passive=2 * (kind == "passive"),
        )
    tool, base_in_frame = random_pose(random), random_pose(random) if framed else None
    arm = bounded(arm)
    space = task_space(arm, tool)
    values = random_joint_values(random, arm, 12)
    forms = ("matrix", "rotation-vector", "quaternion-xyzw", "quaternion-wxyz", "zyz-current")
    for form in (*forms, "xyz-fixed"):
        reader = PostureReader(arm, tool, base_in_frame, form, space)
        expected = together(arm, tool, base_in_frame, form, space, values)
        for index, other in enumerate(expected):
            posture = values[index : index + 1]
            (alone,) = together(arm, tool, base_in_frame, form, space, posture)
            # The kernel for poses and the one for axes round alike but for the last digits, which
            # angles near a lock enlarge.
            alike(reader.read(posture[0]), alone, 1e-13)
            alike(reader.read(posture[0]), other, 1e-9)
            np.testing.assert_allclose(alone.position, other.position, rtol=0.0, atol=1e-12)


@pytest.mark.parametrize("form", FORMS)
def test_every_form(form: str) -> None:
    arm, random = bounded(arm_of(*SIX)), np.random.default_rng(4)
    space, base_in_frame = task_space(arm, AT_FLANGE), random_pose(random)
    values = random_joint_values(random, arm, 6)
    # With the base as it is, quarter turns stand at many of the locks.
    values[3:] = np.round(values[3:] / QUARTER) * QUARTER
    for base in (base_in_frame, None):
        reader = PostureReader(arm, AT_FLANGE, base, form, space)
        for posture in values:
            (alone,) = together(arm, AT_FLANGE, base, form, space, posture[None])
            alike(reader.read(posture), alone, 1e-13)


def test_numbers_are_plain_and_stay_as_they_were_read() -> None:
    arm = bounded(arm_of(*SIX))
    reader = PostureReader(arm, AT_FLANGE, None, "matrix", task_space(arm, AT_FLANGE))
    values = random_joint_values(np.random.default_rng(8), arm, 2)
    first = reader.read(values[0])
    kept = repr(first)
    assert "np." not in kept
    assert type(first.margin) is type(first.from_lock) is float
    assert (type(first.outside), type(first.state)) == (bool, int)
    second = reader.read(values[1].tolist())
    assert repr(first) == kept != repr(second)
    assert repr(reader.read(values[0])) == kept
    # What was handed in is copied, not kept.
    given = values[0].copy()
    reader.read(given)
    given[:] = 0.0
    assert repr(reader.read(values[0])) == kept


def test_a_singular_posture_leaves_nothing_behind() -> None:
    arm = bounded(arm_of(*SIX))
    reader = PostureReader(arm, AT_FLANGE, None, "zyz-current", task_space(arm, AT_FLANGE))
    values = random_joint_values(np.random.default_rng(2), arm, 1)
    before = repr(reader.read(values[0]))
    singular = reader.read([0.0] * 6)
    assert singular.state == 2
    assert np.isnan(singular.step).all()
    assert repr(reader.read(values[0])) == before


def test_threads_that_share_a_reader_do_not_mix_their_postures() -> None:
    arm = bounded(arm_of(*NINE))
    reader = PostureReader(arm, AT_FLANGE, None, "xyz-fixed", task_space(arm, AT_FLANGE))
    values = random_joint_values(np.random.default_rng(6), arm, 40)
    expected = [repr(reader.read(posture)) for posture in values]
    with ThreadPoolExecutor(8) as pool:
        rounds = np.tile(np.arange(40), 10)
        found = list(pool.map(lambda index: repr(reader.read(values[index])), rounds))
    assert found == [expected[index] for index in rounds]
