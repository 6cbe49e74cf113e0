"""Readings of a screen: those of a map are one, none is missing, what cannot be is left out."""

from itertools import permutations, product

import numpy as np
import pytest

from kinematics.orientation_forms import FORMS
from kinematics.screen_readings import UNITS_OF_SCREENS, Family, families_of
from tests.kinematics.screens import Screen, count_of, has_unit

ROUNDING = 1e-13
SHOWN = {
    3: np.array([[0.31, -1.2, 0.7]]),
    4: np.array([[0.36, -0.48, 0.8, 0.0]]),
    9: np.array([[6.0, 2.0, 3.0, -3.0, 6.0, 2.0, -2.0, -3.0, 6.0]]) / 7.0,
}
FAMILIES = [family for count in SHOWN for family in families_of(count)]


def name(family: Family) -> str:
    return f"{family.kind}-{family.unit}"


@pytest.mark.parametrize("family", FAMILIES, ids=name)
def test_all_readings_of_a_map_say_what_the_map_says(family: Family) -> None:
    """Against scipy, form by form: xyz-fixed is zyx-current read backwards."""
    shown = SHOWN[family.count]
    if family.kind == "axis-angle":
        shown = np.array([[0.36, -0.48, 0.8, 0.9]])
    made = family.quaternions(shown)[:, 0]
    readings = family.readings()
    assert len(readings) == len(made)
    possible = family.possible(shown)[:, 0]
    assert possible.any()
    for quaternion, same, is_possible in zip(made, readings, possible, strict=True):
        assert len(set(same)) == len(same) == (4 if family.kind in ("turns", "quaternion") else 2)
        if not is_possible:
            continue
        for reading in same:
            screen = Screen(
                reading.form, reading.order, reading.signs, reading.unit, reading.inverse
            )
            said = np.roll(screen.meaning(shown[0]).as_quat(), 1)
            assert abs(said @ quaternion) == pytest.approx(1.0, abs=ROUNDING), reading


def test_every_form_order_sign_unit_and_sense_is_in_one_map() -> None:
    """Counted by hand: 24 triples x 6 orders x 8 signs x 2 senses, and so on."""
    by_form: dict[str, list[object]] = {}
    for family in FAMILIES:
        for same in family.readings():
            for reading in same:
                by_form.setdefault(reading.form, []).append(reading)
    assert set(by_form) == {*FORMS, "axis-angle"}
    for form, readings in by_form.items():
        count = count_of(form)
        # The sign of all four numbers of a quaternion, or of axis and angle, says nothing.
        ways = {3: 6 * 8, 4: 24 * 8, 9: 2 * 4}[count] * 2
        assert len(readings) == len(set(readings)) == ways * (3 if has_unit(form) else 1), form


def test_orders_and_signs_are_all_there() -> None:
    (same, *_), *_ = [family.readings() for family in families_of(3, "rad")]
    assert {reading.unit for reading in same} == {"rad"}
    triples = [r for same in families_of(3, "rad")[0].readings() for r in same if not r.inverse]
    for form in ("zyx-current", "zyz-fixed"):
        ways = {(r.order, r.signs) for r in triples if r.form == form}
        assert ways == set(product(permutations((1, 2, 3)), product((1, -1), repeat=3)))


@pytest.mark.parametrize(
    ("kind", "unit", "shown", "expected"),
    [
        ("turns", "deg", [720.0, 0, 0], True),
        ("turns", "deg", [720.1, 0, 0], False),
        ("turns", "rad", [0, -12.5, 0], True),
        ("turns", "rad", [0, -13.0, 0], False),
        ("turns", "half-turns", [0, 0, 4.0], True),
        ("turns", "half-turns", [0, 0, 90.0], False),
        ("rotation-vector", "rad", [0, 0, 90.0], False),
        ("quaternion", None, [0.5, 0.5, 0.5, 0.5], True),
        ("quaternion", None, [0.5, 0.5, 0.5, 0.46], True),
        ("quaternion", None, [1.0, 0.0, 0.0, 0.4], False),
        ("matrix", None, [1, 0, 0, 0, 1, 0, 0, 0, 1], True),
        ("matrix", None, [1, 0, 0, 0, 1, 0, 0, 0, -1], False),
        ("matrix", None, [1, 0, 0, 0, 1, 0, 0, 0.1, 1], False),
        ("matrix", None, [0] * 9, False),
    ],
)
def test_what_a_screen_could_show(
    kind: str, unit: str | None, shown: list[float], expected: bool
) -> None:
    family = Family(kind, unit, len(shown))
    assert family.possible(np.array([shown])).all() == expected
    assert family.possible(np.array([shown])).any() == expected


def test_with_a_stated_unit_any_angle_will_do() -> None:
    for family in families_of(3, "rad"):
        assert family.possible(np.array([[1e9, 0.0, -90.0]])).all()


def test_an_axis_has_the_length_one_wherever_it_stands() -> None:
    family = families_of(4, "deg")[1]
    assert family.kind == "axis-angle"
    possible = family.possible(np.array([[0.6, 0.0, 0.8, 30.0], [30.0, 0.0, 0.0, 1.0]]))
    for same, (first, second) in zip(family.readings(), possible, strict=True):
        assert first == (same[0].order[3] == 4)
        assert second == (same[0].order[3] == 1)
    # No axis is told where nothing turns.
    assert family.possible(np.zeros((1, 4))).all()
    assert not family.possible(np.array([[0.0, 0.0, 0.0, 5.0]])).any()


@pytest.mark.parametrize(
    ("form", "shown", "far"),
    [
        ("zyx-current", [10.0, 70.0, 10.0], True),
        ("zyx-current", [10.0, 80.0, 10.0], False),
        ("zyx-current", [190.0, 0.0, 0.0], False),
        ("zyz-current", [10.0, 10.0, 10.0], False),
        ("zyz-current", [10.0, 90.0, 10.0], True),
        ("zyz-current", [10.0, 170.0, 10.0], False),
    ],
)
def test_how_far_from_gimbal_lock(form: str, shown: list[float], far: bool) -> None:
    family = families_of(3, "deg")[0]
    plain = [
        place
        for place, same in enumerate(family.readings())
        if any(r.form == form and r.order == (1, 2, 3) and min(r.signs) > 0 for r in same[:1])
    ]
    assert family.far_from_lock(np.array([shown]))[plain, 0].tolist() == [far]


def test_vectors_keep_from_a_half_turn() -> None:
    vectors = families_of(3, "deg")[1]
    assert vectors.far_from_lock(np.array([[0.0, 150.0, 0.0]])).all()
    assert not vectors.far_from_lock(np.array([[0.0, 150.0, 90.0]])).any()


def test_no_other_count_is_known() -> None:
    assert [count for count in range(13) if families_of(count)] == [3, 4, 9]
    assert {family.unit for family in families_of(3)} == set(UNITS_OF_SCREENS)
