"""Words made to fit."""

from hypothesis import given
from hypothesis import strategies as st

from service.drawings.lettering import SMALL, depth_of, shortened, width_of, wrapped

ANY_WORDS = st.text(max_size=80)


@given(ANY_WORDS, st.floats(10.0, 90.0))
def test_what_is_shortened_fits(words: str, width: float) -> None:
    fitting = shortened(words, SMALL, width)
    assert width_of(fitting, SMALL) <= width
    assert fitting == words or fitting.endswith("\u2026")


@given(ANY_WORDS, st.floats(10.0, 90.0), st.integers(1, 5))
def test_what_is_wrapped_fits_and_nothing_is_lost_unseen(
    words: str, width: float, lines: int
) -> None:
    found = wrapped(words, SMALL, width, lines)
    assert len(found) <= lines
    assert all(width_of(line, SMALL) <= width for line in found)
    if not any(line.endswith("\u2026") for line in found):
        assert " ".join(found).split() == words.split()


def test_letters_of_other_scripts_have_room() -> None:
    assert width_of("\u6cf5", SMALL) > width_of("M", SMALL)
    assert width_of("e\u0301", SMALL) == width_of("e", SMALL)


def test_only_some_letters_go_below_the_line() -> None:
    assert depth_of("1419.5", SMALL) == 0.0
    assert depth_of("working", SMALL) > 0.0
