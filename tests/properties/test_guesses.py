"""Of any screen, however it counts: three readouts contain the truth, and rank it first.

The screens, what they show and what it means are scipy's.
"""

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.spatial.transform import Rotation

from kinematics.errors import InvalidOrientation
from kinematics.orientation_guesses import guesses
from kinematics.readouts import KnownDirection, KnownOrientation, Meaning, checked_direction
from kinematics.tolerances import GUESS_FITS
from tests.kinematics.screens import SHOWN_FORMS, Screen, count_of, has_unit, noisy, tilted

NOISE = np.radians(0.5)  # 0.05 degrees in three angles, ten times over
ROUNDED = 2e-9  # residuals are told to nine decimals

seeds = st.integers(0, 2**32 - 1)


@st.composite
def screens(draw: st.DrawFn) -> Screen:
    form = draw(st.sampled_from(SHOWN_FORMS))
    count = count_of(form)
    plain = tuple(range(1, count + 1))
    unit = draw(st.sampled_from(["deg", "rad", "half-turns"])) if has_unit(form) else None
    if count == 9:
        return Screen(form, plain, (1,) * 9, unit, draw(st.booleans()))
    order = tuple(draw(st.permutations(plain)))
    signs = tuple(draw(st.lists(st.sampled_from([1, -1]), min_size=count, max_size=count)))
    return Screen(form, order, signs, unit, draw(st.booleans()))


def known(tools: list[Rotation]) -> list[Meaning]:
    return [KnownOrientation(tool.as_matrix()) for tool in tools]


@settings(deadline=None, max_examples=40)
@given(screens(), seeds)
def test_the_truth_is_contained_and_ranked_first(made: Screen, seed: int) -> None:
    rng = np.random.default_rng(seed)
    tools = [tilted(made, rng, 5.0) for _ in range(3)]
    shown = np.array([noisy(made, tool, rng) for tool in tools])
    found = guesses(shown, known(tools), most=100)
    best = found.ranked[0]
    assert best.fits
    assert any(
        (reading.form, reading.order, reading.unit, reading.inverse)
        == (made.form, made.order, made.unit, made.inverse)
        and reading.signs in signs_that_say_the_same(made)
        for reading in best.readings
    )
    assert max(best.residuals) < NOISE
    assert all(other.rms >= best.rms for other in found.ranked)


def signs_that_say_the_same(made: Screen) -> set[tuple[int, ...]]:
    """The sign of all four numbers of a quaternion, or of axis and angle, says nothing."""
    four = len(made.order) == 4
    return {made.signs, tuple(-sign for sign in made.signs)} if four else {made.signs}


@settings(deadline=None, max_examples=40)
@given(screens(), seeds, st.integers(1, 4), st.booleans())
def test_what_is_exact_fits_exactly(made: Screen, seed: int, count: int, down: bool) -> None:
    """Whatever the posture, also at gimbal lock: the map of the screen leaves nothing."""
    rng = np.random.default_rng(seed)
    shown = np.array([made.shows(tilted(made, rng, 1.0)) for _ in range(count)])
    tools = [made.meaning(row) for row in shown]
    meanings = known(tools)
    if down:
        meanings = [KnownDirection(np.eye(3)[2], tool.as_matrix()[:, 2]) for tool in tools]
    found = guesses(shown, meanings, most=100)
    assert found.fitting >= 1
    assert found.ranked[0].rms <= ROUNDED


@settings(deadline=None, max_examples=30)
@given(screens(), seeds)
def test_neither_order_nor_repetition_of_readouts_matters(made: Screen, seed: int) -> None:
    rng = np.random.default_rng(seed)
    tools = [tilted(made, rng, 5.0) for _ in range(3)]
    shown = np.array([noisy(made, tool, rng) for tool in tools])
    once = guesses(shown, known(tools))
    turned = guesses(np.tile(shown[::-1], (2, 1)), known(tools[::-1] * 2))
    assert once.ranked[0].readings == turned.ranked[0].readings
    assert once.fitting == turned.fitting
    assert abs(once.ranked[0].rms - turned.ranked[0].rms) <= ROUNDED


EDGES = st.sampled_from([0.0, -0.0, 1e-300, 1e-9, 0.5, 1.0, 90.0, -180.0, 360.0, 1e9, -1e9])
DIRECTIONS = st.sampled_from([[0, 0, 1], [0, -1, 0], [1e-300, 0, 0], [1e9, -1e9, 1e-9]])


@settings(deadline=None, max_examples=30)
@given(
    st.sampled_from([3, 4, 9]).flatmap(
        lambda count: st.lists(
            st.lists(EDGES, min_size=count, max_size=count), min_size=1, max_size=3
        )
    ),
    DIRECTIONS,
    DIRECTIONS,
    st.sampled_from([None, "deg", "rad", "half-turns"]),
)
def test_numbers_at_the_edges_are_answered_or_refused(
    shown: list[list[float]], of: list[float], at: list[float], unit: str | None
) -> None:
    meaning = KnownDirection(checked_direction(of), checked_direction(at))
    try:
        found = guesses(np.array(shown), [meaning] * len(shown), unit=unit)
    except InvalidOrientation:
        return
    assert all(np.isfinite(guess.residuals).all() for guess in found.ranked)
    assert all(0.0 <= angle <= np.pi + ROUNDED for g in found.ranked for angle in g.residuals)
    if found.next is not None:
        assert found.next.told_apart <= found.next.pairs


@settings(deadline=None, max_examples=30)
@given(screens(), seeds, st.floats(0.001, 0.3))
def test_a_wider_tolerance_lets_no_fewer_fit(made: Screen, seed: int, wider: float) -> None:
    rng = np.random.default_rng(seed)
    tools = [tilted(made, rng, 5.0)]
    shown = np.array([noisy(made, tools[0], rng)])
    narrow = guesses(shown, known(tools), tolerance=GUESS_FITS)
    wide = guesses(shown, known(tools), tolerance=GUESS_FITS + wider)
    assert wide.fitting >= narrow.fitting >= 1
