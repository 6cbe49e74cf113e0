"""The readout to take next tells apart what it says, and doing as told again settles a screen."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.spatial.transform import Rotation

from kinematics.next_readout import NextReadout, next_readout
from kinematics.orientation_forms import FORMS
from kinematics.orientation_guesses import guesses
from kinematics.readouts import KnownDirection, KnownOrientation, Meaning
from kinematics.screen_readings import Map, families_of
from kinematics.tolerances import GUESS_FITS, TOLD_APART
from tests.kinematics.screens import UNITS, Screen, screen, tilted

MOST_STEPS = 5
UP = np.array([0.0, 0.0, 1.0])


def plain(form: str) -> Map:
    """The map of a form in degrees, in the order of the form, all signs plus."""
    (found,) = [
        Map(family, place)
        for family in families_of(3, "deg")
        for place, same in enumerate(family.readings())
        if any(
            (r.form, r.order, r.inverse) == (form, (1, 2, 3), False) and min(r.signs) > 0
            for r in same
        )
    ]
    return found


def difference(first: Map, second: Map, shown: tuple[float, ...]) -> float:
    one, other = (
        Rotation.from_quat(np.roll(each.quaternions(np.array([shown]))[0], -1))
        for each in (first, second)
    )
    return float((one.inv() * other).magnitude())


@pytest.mark.parametrize(
    ("first", "second"),
    [
        ("zyx-current", "xyz-current"),
        ("zyx-current", "zyz-current"),
        ("xyz-fixed", "xyz-current"),
        ("zyx-current", "rotation-vector"),
    ],
)
def test_two_are_told_apart_by_what_is_said(first: str, second: str) -> None:
    maps = [plain(first), plain(second)]
    found = next_readout(maps, GUESS_FITS)
    assert found is not None
    assert (found.told_apart, found.pairs, found.left, found.left_otherwise) == (1, 1, 1, 0)
    assert found.unit == "deg"
    assert found.difference == pytest.approx(difference(*maps, found.shown), abs=1e-7)
    assert found.difference >= TOLD_APART


def test_right_angles_are_preferred_where_they_tell_as_much() -> None:
    found = next_readout([plain("zyx-current"), plain("xyz-current")], GUESS_FITS)
    assert found is not None
    assert set(found.shown) <= {0.0, 90.0, -90.0}


def test_numbers_keep_away_from_gimbal_lock() -> None:
    """Where zyx locks at 90 in the middle and zyz at 0 neither is asked for."""
    found = next_readout([plain("zyx-current"), plain("zyz-current")], GUESS_FITS)
    assert found is not None
    assert 15.0 <= abs(found.shown[1]) <= 75.0


def test_one_map_or_none_needs_no_readout() -> None:
    assert next_readout([], GUESS_FITS) is None
    assert next_readout([plain("zyx-current")], GUESS_FITS) is None


def test_a_wide_tolerance_asks_for_a_wide_difference() -> None:
    maps = [plain("zyx-current"), plain("xyz-current")]
    found = next_readout(maps, np.radians(30.0))
    assert found is not None
    assert found.difference is not None
    assert found.difference >= np.radians(90.0) - 1e-9


def test_a_screen_that_cannot_show_the_numbers_is_told_by_that() -> None:
    maps = [Map(family, 0) for family in families_of(3) if family.kind == "turns"]
    found = next_readout(maps, GUESS_FITS)
    assert found is not None
    assert (found.told_apart, found.left, found.left_otherwise) == (2, 1, 2)
    assert found.difference is None
    assert found.prediction(maps[0]) is not None
    assert found.prediction(maps[1]) is None
    assert found.unit == "deg"


def test_no_unit_is_said_where_several_could_show_the_numbers() -> None:
    maps = [Map(family, 0) for family in families_of(3)[2:] if family.kind == "turns"]
    assert {each.family.unit for each in maps} == {"rad", "half-turns"}
    found = next_readout(maps, GUESS_FITS)
    assert found is not None
    assert (found.shown, found.unit, found.left_otherwise) == ((0.5, 0.5, 0.5), None, 0)


def asked_until_settled(made: Screen, rng: np.random.Generator, down: bool) -> list[int]:
    """Start from one poor readout and do as told; return how many maps fitted at each step."""
    # Angles of 0 are no rotation in every form, though some are at gimbal lock there.
    poor = np.zeros(3) if made.unit else made.shows(Rotation.identity())
    shown, meanings = [poor], [meaning_of(Rotation.identity(), down)]
    found = guesses(np.array(shown), meanings)
    counts = [found.fitting]
    while found.next is not None and len(counts) <= MOST_STEPS:
        bound = found.next.left
        now = np.array(found.next.shown)
        if not could_show(made, found.next):
            bound = found.next.left_otherwise
            now = np.round(made.shows(tilted(made, rng, 20.0)), 6)
        shown.append(now)
        meanings.append(KnownOrientation(made.meaning(now).as_matrix()))
        found = guesses(np.array(shown), meanings)
        counts.append(found.fitting)
        assert 1 <= found.fitting <= bound, "the truth always fits, and no more than was said"
    return counts


def could_show(made: Screen, asked: NextReadout) -> bool:
    """Angles of two turns at most, a length of 1 but for 0.05, and nothing else."""
    numbers = np.array(asked.shown)
    if made.unit:
        return bool(np.abs(numbers).max() <= 4.0 * np.pi * UNITS[made.unit])
    return len(numbers) == 9 or bool(abs(np.linalg.norm(numbers) - 1.0) <= 0.05)


def meaning_of(tool: Rotation, down: bool) -> Meaning:
    if down:
        return KnownDirection(UP, tool.as_matrix()[:, 2])
    return KnownOrientation(tool.as_matrix())


@settings(deadline=None, max_examples=8)
@given(
    form=st.sampled_from(FORMS),
    unit=st.sampled_from(["deg", "rad", "half-turns"]),
    seed=st.integers(0, 2**32 - 1),
    down=st.booleans(),
)
def test_doing_as_told_settles_every_screen(form: str, unit: str, seed: int, down: bool) -> None:
    rng = np.random.default_rng(seed)
    counts = asked_until_settled(screen(form, rng, unit), rng, down)
    assert counts[-1] == 1, counts
