"""Arms, tools and joint values for the property tests: any rows that a plant's table may hold."""

import numpy as np
from hypothesis import strategies as st

from kinematics.arm import Arm
from kinematics.rotations import rotation_about
from kinematics.table import Convention, Coupling, JointKind, Row, Table
from kinematics.transforms import pose

# Whole millimetres, so that what is not zero is far from it, and shrinks to what people type.
lengths = st.integers(-800, 800).map(lambda millimetres: millimetres / 1000)
angles = st.one_of(
    st.integers(-4, 4).map(lambda quarters: quarters * np.pi / 2),
    st.floats(-np.pi, np.pi, allow_subnormal=False),
)
joint_angles = st.one_of(st.floats(-np.pi, np.pi, allow_subnormal=False), angles)
joint_lengths = st.floats(-0.8, 0.8, allow_subnormal=False)
ratios = st.sampled_from([-1.0, 1.0, 0.5, -0.25, 1.5])
axes = st.tuples(*[st.integers(-3, 3)] * 3).filter(any)
poses = st.builds(
    lambda axis, angle, position: pose(rotation_about(axis, angle), position),
    axes,
    angles,
    st.tuples(lengths, lengths, lengths),
)


@st.composite
def arms(
    draw: st.DrawFn,
    min_rows: int = 1,
    max_rows: int = 8,
    conventions: tuple[Convention, ...] = tuple(Convention),
) -> Arm:
    """An arm with offsets, couplings and passive rows; its base stands anywhere."""
    count = draw(st.integers(min_rows, max_rows))
    passive = [index > 0 and draw(st.integers(0, 7)) == 7 for index in range(count)]
    rows = []
    for index in range(count):
        # Couplings to driven rows of lower number keep the drive map one that can be inverted.
        before = [number for number in range(1, index + 1) if not passive[number - 1]]
        coupled = bool(before) and (passive[index] or draw(st.integers(0, 3)) == 3)
        couplings = (Coupling(draw(st.sampled_from(before)), draw(ratios)),) if coupled else ()
        rows.append(
            Row(
                JointKind.PRISMATIC if draw(st.integers(0, 3)) == 3 else JointKind.REVOLUTE,
                a=draw(lengths),
                alpha=draw(angles),
                d=draw(lengths),
                theta=draw(angles),
                direction=draw(st.sampled_from([1, -1])),
                couplings=couplings,
                passive=passive[index],
            )
        )
    table = Table(draw(st.sampled_from(conventions)), tuple(rows))
    return Arm("drawn", table, base_in_world=draw(poses))


@st.composite
def postures_of(draw: st.DrawFn, arm: Arm, most: int = 4) -> np.ndarray:
    """Joint values (count, joints), sometimes of no posture at all."""
    each = [joint_angles if unit == "rad" else joint_lengths for unit in arm.joint_units]
    rows = draw(st.lists(st.tuples(*each), min_size=0, max_size=most))
    return np.array(rows, dtype=np.float64).reshape(len(rows), arm.joint_count)


@st.composite
def arms_and_postures(
    draw: st.DrawFn, min_rows: int = 1, max_rows: int = 8, most: int = 4
) -> tuple[Arm, np.ndarray]:
    arm = draw(arms(min_rows=min_rows, max_rows=max_rows))
    return arm, draw(postures_of(arm, most))
