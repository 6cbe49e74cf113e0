"""What holds for every rotation: it stays one, every form returns to it, and all forms agree."""

import numpy as np
from hypothesis import example, given, settings
from hypothesis import strategies as st

from kinematics.orientation_forms import (
    FORMS,
    TRIPLES,
    distance_from_lock,
    rotation_from,
    values_of,
)
from kinematics.orientation_input import checked_rotation
from kinematics.rigidity import defect, nearest_rotation
from kinematics.rotations import angle_of, rotation_about, rotation_vector_of
from kinematics.tolerances import LOCK_EXACT
from kinematics.transforms import inverse, pose

ROUNDING = 1e-14  # some dozens of operations on numbers up to 1, at 1e-16 each

# Right angles, and what is a little off them: the places where forms lose their footing.
corner_angles = st.builds(
    lambda quarters, exponent, sign: quarters * np.pi / 2 + sign * 10.0**-exponent,
    st.integers(-4, 4),
    st.integers(1, 17),
    st.sampled_from([-1, 0, 1]),
)
angles = st.one_of(st.floats(-10.0, 10.0), corner_angles, st.floats(-1e9, 1e9))
triples = st.tuples(angles, angles, angles)
components = st.floats(-1.0, 1.0, allow_subnormal=False)
axes = st.tuples(components, components, components).filter(lambda axis: any(axis))
forms = st.sampled_from(FORMS)
triple_forms = st.sampled_from(TRIPLES)
rotations = st.one_of(
    st.builds(rotation_from, triple_forms, triples),
    st.builds(rotation_about, axes, angles),
)

thorough = settings(deadline=None, max_examples=300)


def assert_same(actual: np.ndarray, expected: np.ndarray, tolerance: float = ROUNDING) -> None:
    np.testing.assert_allclose(actual, expected, rtol=0.0, atol=tolerance)


@thorough
@given(rotations)
def test_a_rotation_is_rigid_and_right_handed(rotation: np.ndarray) -> None:
    assert float(defect(rotation)) < ROUNDING
    assert np.linalg.det(rotation) > 0.0


@thorough
@given(rotations, forms)
@example(rotation_from("zyx-current", [0.3, np.pi / 2 - 1.1e-12, 2.0]), "zyx-current")
def test_every_form_returns_to_the_rotation(rotation: np.ndarray, form: str) -> None:
    back = rotation_from(form, values_of(form, rotation))
    locked = float(distance_from_lock(form, rotation)) <= LOCK_EXACT
    assert_same(back, rotation, LOCK_EXACT + ROUNDING if locked else ROUNDING)


@thorough
@given(rotations, forms)
def test_values_lie_in_their_canonical_range(rotation: np.ndarray, form: str) -> None:
    values = values_of(form, rotation)
    assert not np.signbit(values[values == 0.0]).any()
    if form in TRIPLES:
        first, middle, last = values
        assert -np.pi < first <= np.pi
        assert -np.pi < last <= np.pi
        if form[0] == form[2]:
            assert 0.0 <= middle <= np.pi
        else:
            assert abs(middle) <= np.pi / 2
    elif form.startswith("quaternion"):
        scalar = values[0] if form == "quaternion-wxyz" else values[3]
        assert scalar >= 0.0
        assert abs(np.linalg.norm(values) - 1.0) < ROUNDING
    elif form == "rotation-vector":
        assert np.linalg.norm(values) <= np.pi + ROUNDING


@thorough
@given(triple_forms, triples)
def test_fixed_turns_are_current_turns_read_backwards(form: str, angles: tuple[float]) -> None:
    sequence, _, about = form.partition("-")
    twin = f"{sequence[::-1]}-{'current' if about == 'fixed' else 'fixed'}"
    assert_same(rotation_from(form, angles), rotation_from(twin, angles[::-1]), 0.0)


@thorough
@given(st.lists(rotations, min_size=0, max_size=5), forms)
def test_batch_equals_loop(batch: list[np.ndarray], form: str) -> None:
    stacked = np.array(batch).reshape(len(batch), 3, 3)
    values = values_of(form, stacked)
    assert len(values) == len(batch)
    for rotation, row in zip(batch, values, strict=True):
        np.testing.assert_array_equal(row, values_of(form, rotation))


@thorough
@given(rotations, forms)
def test_what_comes_out_is_taken_back_in_without_a_finding(rotation: np.ndarray, form: str) -> None:
    taken, findings = checked_rotation(form, values_of(form, rotation).tolist())
    assert findings == ()
    assert_same(taken, rotation, LOCK_EXACT + ROUNDING)


@thorough
@given(rotations)
def test_the_opposite_turn_undoes(rotation: np.ndarray) -> None:
    opposite = rotation_from("rotation-vector", -rotation_vector_of(rotation))
    assert_same(opposite @ rotation, np.eye(3))
    assert_same(angle_of(rotation.T), angle_of(rotation))


@thorough
@given(rotations, st.lists(st.floats(-2e-3, 2e-3), min_size=9, max_size=9))
def test_repair_moves_no_entry_further_than_the_defect_allows(
    rotation: np.ndarray, noise: list[float]
) -> None:
    matrix = rotation + np.reshape(noise, (3, 3))
    nearest = nearest_rotation(matrix)
    assert float(defect(nearest)) < ROUNDING
    # The nearest rotation is at least as near as the one we started from.
    assert np.linalg.norm(nearest - matrix) <= np.linalg.norm(rotation - matrix) + ROUNDING
    assert_same(nearest_rotation(nearest), nearest)


@thorough
@given(rotations, st.tuples(*[st.floats(-10.0, 10.0)] * 3))
def test_inverse_undoes_a_pose(rotation: np.ndarray, position: tuple[float]) -> None:
    x_in_y = pose(rotation, position)
    assert_same(inverse(x_in_y) @ x_in_y, np.eye(4), 20 * ROUNDING)
    assert_same(inverse(inverse(x_in_y)), x_in_y, 20 * ROUNDING)
