"""The 28 names, both directions, the finding at lock, and what input is taken or refused."""

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from kinematics.errors import InvalidOrientation, KinematicsError, NotFinite, NotRigid, OutOfRange
from kinematics.orientation_forms import (
    FORMS,
    TRIPLES,
    distance_from_lock,
    lock_finding,
    rotation_from,
    shape_of,
    values_of,
)
from kinematics.orientation_input import checked_rotation
from kinematics.rigidity import defect
from kinematics.rotations import rotation_about
from kinematics.tolerances import LOCK_NOTICE, QUATERNION_SILENT

every_form = pytest.mark.parametrize("form", FORMS)
every_triple = pytest.mark.parametrize("form", TRIPLES)

RANDOM = np.random.default_rng(11)
ROTATIONS = Rotation.from_quat(RANDOM.normal(size=(200, 4))).as_matrix()

CORNERS = np.stack(
    [
        np.eye(3),
        *(rotation_about(axis, np.pi) for axis in np.eye(3)),
        *(rotation_about(axis, angle) for axis in np.eye(3) for angle in (-np.pi / 2, np.pi / 2)),
        *(rotation_about([2, -3, 6], angle) for angle in (1e-15, 1e-8, np.pi - 1e-7, np.pi)),
        rotation_about([-1, 1, 0], np.pi),
        rotation_about([1, 1, 1], 2 * np.pi / 3),  # x to y to z to x
    ]
)


def test_the_28_names() -> None:
    assert len(FORMS) == len(set(FORMS)) == 28
    assert len(TRIPLES) == 24
    assert set(FORMS) - set(TRIPLES) == {
        *("matrix", "quaternion-wxyz", "quaternion-xyzw", "rotation-vector")
    }
    assert {"zyx-current", "xyz-fixed", "zyz-current", "xyx-fixed"} <= set(TRIPLES)


@every_form
@pytest.mark.parametrize("rotations", [ROTATIONS, CORNERS], ids=["random", "corners"])
def test_every_form_gives_the_rotation_back(form: str, rotations: np.ndarray) -> None:
    values = values_of(form, rotations)
    back = rotation_from(form, values)
    np.testing.assert_allclose(back, rotations, rtol=0.0, atol=1e-14)
    again = values_of(form, back)
    np.testing.assert_allclose(rotation_from(form, again), rotations, rtol=0.0, atol=1e-14)
    assert not np.signbit(values[values == 0.0]).any()


@every_form
def test_batch_and_loop_agree_to_the_last_bit(form: str) -> None:
    rotations = np.concatenate([ROTATIONS[:20], CORNERS])
    values = values_of(form, rotations)
    for rotation, row in zip(rotations, values, strict=True):
        np.testing.assert_array_equal(values_of(form, rotation), row)
    one_by_one = [rotation_from(form, row) for row in values]
    np.testing.assert_array_equal(rotation_from(form, values), one_by_one)


@every_form
@pytest.mark.parametrize("batch", [(), (0,), (2, 3), (3, 0)])
def test_shapes(form: str, batch: tuple[int, ...]) -> None:
    rotation = np.broadcast_to(np.eye(3), (*batch, 3, 3))
    values = values_of(form, rotation)
    assert values.shape == (*batch, *shape_of(form))
    assert rotation_from(form, values).shape == (*batch, 3, 3)
    assert distance_from_lock(form, rotation).shape == batch


def test_quaternion_orders_by_hand() -> None:
    about_x = rotation_about([1, 0, 0], np.pi / 2)
    half = np.sqrt(0.5)
    np.testing.assert_allclose(
        values_of("quaternion-wxyz", about_x), [half, half, 0, 0], rtol=0.0, atol=1e-15
    )
    np.testing.assert_allclose(
        values_of("quaternion-xyzw", about_x), [half, 0, 0, half], rtol=0.0, atol=1e-15
    )
    np.testing.assert_allclose(
        rotation_from("quaternion-wxyz", [1, 1, 0, 0]), about_x, rtol=0.0, atol=1e-15
    )
    np.testing.assert_allclose(
        rotation_from("quaternion-xyzw", [1, 0, 0, 1]), about_x, rtol=0.0, atol=1e-15
    )


def test_the_matrix_handed_out_is_a_copy() -> None:
    rotation = np.eye(3)
    rotation_from("matrix", rotation)[0, 0] = 9.0
    values_of("matrix", rotation)[0, 0] = 9.0
    assert rotation[0, 0] == 1.0


@pytest.mark.parametrize("form", ["xyz", "zyx-moving", "XYZ-fixed", "xxy-fixed", "quaternion", ""])
def test_unknown_forms_are_refused_everywhere(form: str) -> None:
    for call in (
        lambda: rotation_from(form, np.zeros(3)),
        lambda: values_of(form, np.eye(3)),
        lambda: distance_from_lock(form, np.eye(3)),
        lambda: lock_finding(form, np.eye(3)),
        lambda: checked_rotation(form, [0, 0, 0]),
    ):
        with pytest.raises(InvalidOrientation, match="no orientation form") as caught:
            call()
        assert caught.value.where == ("form",)
        assert caught.value.value == form


@every_form
def test_values_of_another_shape_are_refused(form: str) -> None:
    with pytest.raises(InvalidOrientation, match="shape"):
        rotation_from(form, np.zeros((2, 5)))
    with pytest.raises(InvalidOrientation, match="shape"):
        rotation_from(form, 0.0)


# --- gimbal lock ---------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("form", "angles", "combination"),
    [
        ("zyx-current", [0.7, np.pi / 2, -0.4], "first - last = 1.1 rad"),
        ("zyx-current", [0.7, -np.pi / 2, -0.4], "first + last = 0.3 rad"),
        ("xyz-fixed", [0.7, np.pi / 2, -0.4], "first - last = 1.1 rad"),
        ("xyz-current", [0.7, np.pi / 2, -0.4], "first + last = 0.3 rad"),
        ("zyz-current", [0.7, 0.0, -0.4], "first + last = 0.3 rad"),
        ("zyz-fixed", [0.7, np.pi, -0.4], "first - last = 1.1 rad"),
        ("zyz-current", [3.0, 0.0, 1.0], f"first + last = {4.0 - 2 * np.pi:.9g} rad"),
    ],
)
@pytest.mark.parametrize("distance", [0.0, 5e-8])
def test_lock_finding_names_the_determined_combination(
    form: str, angles: list[float], combination: str, distance: float
) -> None:
    middle = angles[1] - distance if angles[1] > 0 else angles[1] + distance
    rotation = rotation_from(form, [angles[0], middle, angles[2]])
    finding = lock_finding(form, rotation)
    assert finding is not None
    assert (finding.code, finding.name, finding.unit) == (5, "angles-not-unique", "rad")
    assert finding.measure == pytest.approx(distance, abs=1e-15)
    assert finding.threshold == LOCK_NOTICE
    assert f"only {combination} (" in finding.text()
    assert form in finding.text()


@every_triple
def test_no_finding_away_from_lock(form: str) -> None:
    lock = 0.0 if form[0] == form[2] else np.pi / 2
    away = lock + 2e-7 if lock == 0.0 else lock - 2e-7
    assert lock_finding(form, rotation_from(form, [0.1, away, 0.3])) is None
    assert lock_finding(form, rotation_from(form, [0.1, 0.8, 0.3])) is None
    assert lock_finding(form, rotation_from(form, [0.1, lock, 0.3])) is not None


def test_forms_without_angles_never_lock() -> None:
    for form in set(FORMS) - set(TRIPLES):
        assert lock_finding(form, np.eye(3)) is None
        assert np.isinf(distance_from_lock(form, np.eye(3)))


def test_distance_from_lock_by_hand() -> None:
    rotation = rotation_from("zyx-current", [0.4, 1.2, -2.0])
    assert float(distance_from_lock("zyx-current", rotation)) == pytest.approx(np.pi / 2 - 1.2)
    rotation = rotation_from("zyz-fixed", [0.4, 3.0, -2.0])
    assert float(distance_from_lock("zyz-fixed", rotation)) == pytest.approx(np.pi - 3.0)


# --- input ---------------------------------------------------------------------------------


@every_form
def test_good_input_is_taken_without_findings(form: str) -> None:
    for rotation in (*ROTATIONS[:10], *CORNERS):
        values = values_of(form, rotation)
        for given in (values, values.tolist(), tuple(values.tolist())):
            taken, findings = checked_rotation(form, given)
            assert findings == ()
            np.testing.assert_allclose(taken, rotation, rtol=0.0, atol=1e-14)


@every_form
@pytest.mark.parametrize("bad", [float("nan"), float("inf"), -float("inf")])
def test_non_finite_input_is_refused_where_it_stands(form: str, bad: float) -> None:
    for index in np.ndindex(*shape_of(form)):
        values = values_of(form, ROTATIONS[0])
        values[index] = bad
        with pytest.raises(NotFinite) as caught:
            checked_rotation(form, values.tolist())
        assert caught.value.where == index
        assert form in str(caught.value)


@every_form
@pytest.mark.parametrize("bad", [1.1e9, -1e12, 1e308])
def test_input_beyond_all_bounds_is_refused_where_it_stands(form: str, bad: float) -> None:
    for index in np.ndindex(*shape_of(form)):
        values = values_of(form, ROTATIONS[0])
        values[index] = bad
        with pytest.raises(OutOfRange) as caught:
            checked_rotation(form, values.tolist())
        assert caught.value.where == index


def test_a_rotation_vector_longer_than_the_bound_is_refused() -> None:
    with pytest.raises(OutOfRange, match="length"):
        checked_rotation("rotation-vector", [8e8, 8e8, 0])
    rotation, _ = checked_rotation("rotation-vector", [1e9, 0, 0])
    np.testing.assert_allclose(rotation, rotation_about([1, 0, 0], 1e9), rtol=0.0, atol=1e-15)


@every_form
@pytest.mark.parametrize(
    "bad", [[], [1, 2], [1] * 5, "abc", None, 1.0, [[1, 2, 3]], [["1"] * 3] * 3]
)
def test_wrong_counts_and_kinds_are_refused(form: str, bad: object) -> None:
    with pytest.raises(InvalidOrientation) as caught:
        checked_rotation(form, bad)
    assert caught.value.way_out


@pytest.mark.parametrize("form", ["quaternion-wxyz", "quaternion-xyzw"])
def test_quaternion_norms(form: str) -> None:
    unit = values_of(form, ROTATIONS[1])
    for factor in (1.0, 1.0 + 0.9 * QUATERNION_SILENT, 1.0 - 0.9 * QUATERNION_SILENT):
        rotation, findings = checked_rotation(form, (factor * unit).tolist())
        assert findings == ()
        assert float(defect(rotation)) < 1e-15
        np.testing.assert_allclose(rotation, ROTATIONS[1], rtol=0.0, atol=1e-15)
    for factor in (1.0 + 1.1 * QUATERNION_SILENT, 1.0 - 1.1 * QUATERNION_SILENT, 1.1e-6, 1e6, -2.0):
        rotation, (finding,) = checked_rotation(form, (factor * unit).tolist())
        assert (finding.code, finding.name) == (6, "input-repaired")
        assert finding.measure == pytest.approx(abs(abs(factor) - 1.0))
        assert finding.threshold == QUATERNION_SILENT
        np.testing.assert_allclose(rotation, ROTATIONS[1], rtol=0.0, atol=1e-15)
    for factor in (0.0, 1e-300, 0.9e-6):
        with pytest.raises(InvalidOrientation, match="no direction") as caught:
            checked_rotation(form, (factor * unit).tolist())
        assert caught.value.value == (factor * unit).tolist()


def test_matrices_follow_the_rules_of_rigidity() -> None:
    typed = np.round(ROTATIONS[2], 4)
    rotation, (finding,) = checked_rotation("matrix", typed.tolist())
    assert finding.code == 6
    assert finding.measure == pytest.approx(float(defect(typed)))
    np.testing.assert_allclose(rotation, ROTATIONS[2], rtol=0.0, atol=1e-4)
    with pytest.raises(NotRigid, match="mirrored"):
        checked_rotation("matrix", (-ROTATIONS[2]).tolist())
    for bad in (np.zeros((3, 3)), np.full((3, 3), 1e9), 1.01 * np.eye(3)):
        with pytest.raises(NotRigid, match="no rotation"):
            checked_rotation("matrix", bad.tolist())


def test_every_refusal_is_of_the_one_tree() -> None:
    for bad in ([0, 0, 0, 0], [np.nan, 0, 0, 0], [1e300, 0, 0, 0], [1, 2], "x"):
        with pytest.raises(KinematicsError):
            checked_rotation("quaternion-wxyz", bad)
