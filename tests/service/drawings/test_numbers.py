"""Numbers as a drawing writes them: enough figures, no idle ones, bounds never told too small."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from kinematics.envelope.measures import Measure
from service.convert import UNITS
from service.drawings.numbers import length_words, measure_words
from tests.service.drawings.sheets import envelopes

MM = UNITS["mm-deg"]


@pytest.mark.parametrize(
    ("name", "metres", "words"),
    [
        ("metre", 0.5207, "520.7"),
        ("metre", 1.0, "1000"),
        ("metre", -0.00004, "0"),
        ("millimetre", 0.5207e-3, "0.5207"),
        ("hundred metres", 52.0712, "52071"),
    ],
)
def test_lengths_have_the_figures_that_the_size_asks_for(
    name: str, metres: float, words: str
) -> None:
    assert length_words(envelopes(name), MM)(metres) == words


def test_lengths_are_in_the_unit_asked_for() -> None:
    assert length_words(envelopes("metre"), UNITS["in-deg"])(0.0254) == "1"
    assert length_words(envelopes("metre"), UNITS["m-rad"])(0.0254) == "0.0254"


@given(st.floats(1e-3, 1e5), st.floats(0.0, 0.3))
def test_a_bound_is_never_told_smaller_than_it_is(value: float, share: float) -> None:
    words = measure_words(Measure(value, share * value), 2, UNITS["m-rad"])
    told, _, _, bound = words.split()
    # Whatever the true value is, it is within the bound of the one told, rounding included.
    assert abs(float(told) - value) + share * value <= float(bound) * (1.0 + 1e-6)
    assert float(bound) <= max(2.0 * share, 2e-4) * value + 1.0
    assert len(told.partition(".")[2]) == len(bound.partition(".")[2])


@pytest.mark.parametrize(
    ("value", "bound", "words"),
    [
        (1.2341, 0.0045, "1.234 m\u00b2 \u00b1 0.005"),
        (6.299, 0.02, "6.30 m\u00b2 \u00b1 0.03"),
        (37.0, 0.3, "37.0 m\u00b2 \u00b1 0.3"),
        (0.9220214, 1e-9, "0.9220 m\u00b2 \u00b1 0.0001"),
        (0.3, 4.0, "0 m\u00b2 \u00b1 5"),
        (5.0e12, 2.5e9, "5.000e+12 m\u00b2 \u00b1 3e+09"),
    ],
)
def test_value_and_bound_end_at_the_same_figure(value: float, bound: float, words: str) -> None:
    assert measure_words(Measure(value, bound), 2, MM) == words


def test_small_areas_are_told_in_millimetres() -> None:
    assert measure_words(Measure(2.5e-6, 0.0), 2, MM).startswith("2.5000 mm\u00b2")
    assert measure_words(Measure(0.0, 0.0), 3, MM) == "0"
