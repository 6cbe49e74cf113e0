"""What fits a screen's readouts: the truth is found in every form, the rest is ranked below it."""

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from kinematics.orientation_guesses import Guess, Guesses, guesses
from kinematics.readouts import KnownDirection, KnownOrientation, Meaning
from kinematics.tolerances import GUESS_FITS
from tests.kinematics.screens import SHOWN_FORMS, Screen, has_unit, noisy, screen, tilted

UP, DOWN = np.array([0.0, 0.0, 1.0]), np.array([0.0, 0.0, -1.0])
TOOL_DOWN = KnownDirection(UP, DOWN)
HALF = 5e-10  # residuals are told to nine decimals
NOISE = np.radians(0.5)  # 0.05 degrees in three angles, ten times over


def known(*rotations: Rotation) -> list[Meaning]:
    return [KnownOrientation(rotation.as_matrix()) for rotation in rotations]


def same(guess: Guess, made: Screen) -> bool:
    """Whether a screen's way of counting is among the readings of a group.

    The sign of all four numbers of a quaternion, or of axis and angle, says nothing.
    """
    four = len(made.order) == 4
    signs = {made.signs, tuple(-sign for sign in made.signs)} if four else {made.signs}
    return any(
        (reading.form, reading.order, reading.unit, reading.inverse)
        == (made.form, made.order, made.unit, made.inverse)
        and reading.signs in signs
        for reading in guess.readings
    )


def place_of(found: Guesses, made: Screen) -> int:
    places = [place for place, guess in enumerate(found.ranked) if same(guess, made)]
    assert len(places) == 1, "the truth is in one group, and in one alone"
    return places[0]


FORMS_IN_UNITS = [
    (form, unit)
    for form in SHOWN_FORMS
    for unit in (("deg", "rad", "half-turns") if has_unit(form) else ("deg",))
]


def test_every_form_is_asked_about() -> None:
    assert len(FORMS_IN_UNITS) == (24 + 2) * 3 + 3


@pytest.mark.parametrize(("form", "unit"), FORMS_IN_UNITS)
def test_three_noisy_readouts_settle_every_form(form: str, unit: str) -> None:
    rng = np.random.default_rng(sum(map(ord, form + unit)))
    for _ in range(3):
        made = screen(form, rng, unit)
        tools = [tilted(made, rng, 10.0) for _ in range(3)]
        shown = np.array([noisy(made, tool, rng) for tool in tools])
        found = guesses(shown, known(*tools), most=100)
        assert place_of(found, made) == 0
        assert found.ranked[0].fits
        assert max(found.ranked[0].residuals) < NOISE
        # What else fits is off by more, and what does not fit by more than the tolerance.
        assert all(other.rms > found.ranked[0].rms for other in found.ranked[1:])
        assert found.nearest_miss is not None
        assert max(found.nearest_miss.residuals) > GUESS_FITS


def test_residuals_are_the_angles_between_what_is_said_and_what_is_so() -> None:
    rng = np.random.default_rng(11)
    made = Screen("zyx-current", (2, 1, 3), (1, 1, -1), "deg")
    tools = [tilted(made, rng, 15.0) for _ in range(3)]
    shown = np.array([made.shows(tool) for tool in tools])
    off = [Rotation.from_rotvec(angle * UP) for angle in (0.001, 0.002, -0.004)]
    turned = [tool * turn for tool, turn in zip(tools, off, strict=True)]
    found = guesses(shown, known(*turned))
    place_of(found, made)
    assert found.ranked[0].residuals == pytest.approx([0.001, 0.002, 0.004], abs=HALF)
    assert found.ranked[0].worst == 2
    assert found.ranked[0].rms == pytest.approx(np.sqrt(7e-6), abs=HALF)


def test_directions_are_held_by_the_angle_between_them() -> None:
    found = guesses(
        np.array([[0.0, 30.0, 0.0]]),
        [KnownDirection(UP, np.array([np.sin(0.52), 0.0, np.cos(0.52)]))],
        unit="deg",
    )
    # Turned by 30 deg about y: off the direction 0.52 rad by 0.52 - pi/6.
    assert found.ranked[0].rms == pytest.approx(abs(0.52 - np.pi / 6), abs=HALF)


def test_fixed_and_current_are_one_group() -> None:
    rng = np.random.default_rng(5)
    made = Screen("xyz-fixed", (1, 2, 3), (1, 1, 1), "deg")
    tools = [tilted(made, rng, 10.0) for _ in range(3)]
    found = guesses(np.array([made.shows(tool) for tool in tools]), known(*tools))
    assert found.fitting == 1
    (group,) = found.ranked
    assert {(reading.form, reading.order, reading.inverse) for reading in group.readings} == {
        ("xyz-fixed", (1, 2, 3), False),
        ("zyx-current", (3, 2, 1), False),
        ("xyz-current", (1, 2, 3), True),
        ("zyx-fixed", (3, 2, 1), True),
    }
    assert group.readings[0].form == "xyz-fixed", "the plainest comes first"


def test_all_zeros_leave_everything_open() -> None:
    found = guesses(np.zeros((2, 3)), known(Rotation.identity(), Rotation.identity()), most=2000)
    assert found.fitting == len(found.ranked) == 3 * (576 + 48)
    assert found.nearest_miss is None
    assert {reading.unit for guess in found.ranked for reading in guess.readings} == {
        *("deg", "rad", "half-turns")
    }
    assert found.plainest == 0
    assert found.next is not None


def test_one_readout_of_a_turn_about_one_axis_leaves_several() -> None:
    """Turned by 40 about z with zeros beside it: nobody can tell which zero is which."""
    tool = Rotation.from_euler("z", 40, degrees=True)
    found = guesses(np.array([[0.0, 0.0, 40.0]]), known(tool), unit="deg", most=2000)
    # By hand. Of a sequence of three axes one turn is z, of xyx none, of zyz two. The number 40
    # goes there with sign +: 2 orders and 4 signs of the zeros, 6 x 1 x 8 + 6 times (z twice in
    # 2 sequences, once in 2). And of the 48 vectors those with 40 at z: 2 x 4.
    assert found.fitting == 6 * 8 + (2 * 2 + 2 * 1) * 8 + 8
    assert all(guess.rms == 0.0 for guess in found.ranked)


def test_ranked_by_residual_and_then_by_plainness() -> None:
    rng = np.random.default_rng(8)
    shown = rng.uniform(-3.0, 3.0, (2, 3))
    found = guesses(shown, known(*(Rotation.identity(),) * 2), tolerance=0.1, most=3000)
    rms = [guess.rms for guess in found.ranked]
    assert rms == sorted(rms)
    assert found.fitting == len(rms) > 100
    zeros = guesses(np.zeros((1, 3)), known(Rotation.identity()), most=4)
    assert [guess.readings[0].form for guess in zeros.ranked[:3]] == [
        *("xyz-fixed", "zyx-current", "zyz-current")
    ]
    assert all(guess.readings[0].order == (1, 2, 3) for guess in zeros.ranked)


def test_the_plainest_is_named_where_another_fits_better() -> None:
    """Rounding favours an odd reading; which one people would expect is told all the same."""
    tool = Rotation.from_euler("xyz", [0.02, 0.0, 40.0], degrees=True)
    found = guesses(np.array([[0.0, 0.02, 40.0]]), known(tool), unit="deg", most=500)
    assert found.plainest is not None
    assert found.plainest > 0
    plain = found.ranked[found.plainest].readings[0]
    assert (plain.form, plain.order, plain.signs) == ("xyz-fixed", (1, 2, 3), (1, 1, 1))
    few = guesses(np.array([[0.0, 0.02, 40.0]]), known(tool), unit="deg", most=1)
    assert few.plainest is None


def test_nothing_fits_contradictory_readouts() -> None:
    tools = Rotation.from_euler("zyx", [[10, 20, 30], [40, 50, 60]], degrees=True)
    found = guesses(np.array([[10.0, 20.0, 30.0]] * 2), known(*tools))
    assert found.fitting == 0
    assert found.next is None
    assert found.nearest_miss is None
    assert found.plainest is None
    assert len(found.ranked) == 3
    assert not any(guess.fits for guess in found.ranked)
    apart = (tools[0].inv() * tools[1]).magnitude()
    assert sum(found.ranked[0].residuals) >= apart - 1e-9, "the triangle inequality"


@pytest.mark.parametrize("form", ["zyx-current", "zyz-fixed", "rotation-vector", "quaternion-xyzw"])
def test_the_odd_one_out_is_found(form: str) -> None:
    rng = np.random.default_rng(17)
    made = screen(form, rng, orders=False)
    tools = [tilted(made, rng, 20.0) for _ in range(4)]
    shown = np.array([noisy(made, tool, rng) for tool in tools])
    tools[2] = tools[2] * Rotation.from_euler("y", 35, degrees=True)
    found = guesses(shown, known(*tools))
    assert found.fitting == 0
    assert found.odd_one_out is not None
    place, guess = found.odd_one_out
    assert place == 2
    assert same(guess, made)
    assert guess.residuals[2] == pytest.approx(np.radians(35), abs=NOISE)
    assert max(np.delete(guess.residuals, 2)) < NOISE


def test_two_readouts_have_no_odd_one() -> None:
    tools = Rotation.from_euler("zyx", [[10, 20, 30], [40, 50, 60]], degrees=True)
    assert guesses(np.array([[10.0, 20.0, 30.0]] * 2), known(*tools)).odd_one_out is None


def test_a_stated_unit_is_kept_to() -> None:
    tool = Rotation.from_euler("z", 90, degrees=True)
    for unit, shown in (("deg", 90.0), ("rad", np.pi / 2), ("half-turns", 0.5)):
        found = guesses(np.array([[0, 0, shown]]), known(tool), unit=unit)
        assert found.fitting > 0
        assert {r.unit for guess in found.ranked for r in guess.readings} == {unit}
    assert guesses(np.array([[0, 0, 450.0 * 4]]), known(tool * tool.inv()), unit="deg").fitting > 0


def test_directions_alone_settle_it_when_there_are_enough() -> None:
    rng = np.random.default_rng(23)
    made = Screen("zyz-current", (1, 2, 3), (1, 1, 1), "deg")
    tools = [tilted(made, rng, 20.0) for _ in range(6)]
    meanings = [
        KnownDirection(np.eye(3)[place % 3], tool.as_matrix()[:, place % 3])
        for place, tool in enumerate(tools)
    ]
    found = guesses(np.array([noisy(made, tool, rng) for tool in tools]), meanings)
    assert place_of(found, made) == 0
    assert found.fitting == 1


def test_down_with_a_tool_that_hangs_straight() -> None:
    """Symmetric postures only: the turn about the tool's own axis is never seen."""
    shown = np.array([[180.0, 0.0, 30.0], [180.0, 0.0, -45.0], [180.0, 0.0, 0.0]])
    found = guesses(shown, [TOOL_DOWN] * 3, most=2000)
    assert found.fitting > 100
    forms = {reading.form for guess in found.ranked for reading in guess.readings}
    assert {"xyz-fixed", "xyz-current", "zyx-current"} <= forms
    assert found.next is not None
    assert found.next.left <= 2


def test_a_hundred_readouts_of_numbers_that_fit_nothing_and_everything() -> None:
    """At the largest size the answer is the same kind as at the smallest."""
    rng = np.random.default_rng(2)
    shown = rng.uniform(-180, 180, (100, 3))
    none = guesses(shown, known(*Rotation.random(100, rng=1)))
    assert none.fitting == 0
    assert guesses(np.zeros((100, 3)), known(*(Rotation.identity(),) * 100)).fitting == 1872
