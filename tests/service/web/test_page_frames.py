"""The frames of pages: words in their places, headers, what is fetched ahead."""

import re

import pytest

from service.cautions import CAUTIONS
from service.web.page_files import files
from service.web.page_frames import framed, said, words

FRAMES = sorted(name for name in files() if name.endswith(".html"))
PLACE = re.compile(r"\{\{([a-z_.]+)\}\}")
GIVEN = {
    "head",
    "header",
    "footer",
    "preload",
    "cautions",
    "caution",
    "version",
    "arm",
    "what",
    "said",
    "like",
}


def test_the_words_are_sections_of_texts() -> None:
    assert {"shell", "board", "sheet", "reach"} == set(words())
    for section in words().values():
        for key, value in section.items():
            assert re.fullmatch(r"[a-z][a-z0-9_-]*", key)
            assert isinstance(value, str | dict | list)


@pytest.mark.parametrize("frame", FRAMES)
def test_every_place_of_a_frame_has_words(frame: str) -> None:
    for key in set(PLACE.findall(files()[frame].decode("utf-8"))) - GIVEN:
        assert said(key)


def test_a_frame_is_filled_and_knows_where_it_is() -> None:
    text = framed("<html lang='en'>{{header}}<b>{{arm}}</b>{{footer}}", "/docs", {"arm": "a&amp;b"})
    page = text.decode("utf-8")
    assert "{{" not in page
    assert "<b>a&amp;b</b>" in page
    assert '<a href="/docs" aria-current="page">' in page
    assert page.count("aria-current") == 1
    assert page.count("<li>") == len(CAUTIONS)
    assert "data-bare" not in page


def test_what_is_put_in_is_not_read_again() -> None:
    page = framed("<html >{{arm}}", "/", {"arm": "{{shell.name}} {{nothing.at_all}}"})
    assert page == b"<html >{{shell.name}} {{nothing.at_all}}"


def test_an_empty_value_stays_empty() -> None:
    assert framed("<html >-{{arm}}-", "/", {"arm": ""}) == b"<html >--"


def test_bare_marks_the_page() -> None:
    assert framed("<html lang='en'>", "/", {}, bare=True).startswith(b"<html data-bare lang=")


def test_all_that_a_page_imports_is_fetched_ahead() -> None:
    page = framed('<html >{{preload}}<script type="module" src="/pages/board.js">', "/", {})
    ahead = re.findall(r'modulepreload" href="/pages/([a-z_]+\.js)"', page.decode("utf-8"))
    assert ahead[0] == "board.js"
    assert len(ahead) == len(set(ahead)) >= 9
    for name in ahead:
        for imported in re.findall(r'from "\./([a-z_]+\.js)"', files()[name].decode("utf-8")):
            assert imported in ahead
