"""The board: a card for each arm at its place, and no state that could be taken for another.

Left out: looks in both themes and at all widths (test_every_page.py).
"""

from collections.abc import Callable, Iterator

import httpx
import pytest

from tests.browser.chromium import Look, Screen
from tests.browser.hall import HALL, UPRIGHT, feed
from tests.browser.test_every_page import READY
from tests.browser.test_reach_page import of
from tests.conftest import ServerProcess

CARD = "document.querySelector('[data-arm=\"{}\"]')"
ALL_THERE = f"document.querySelectorAll('[data-arm]').length === {len(HALL)}"
WRITTEN = """
window.written = [];
const cardOf = (node) => (node.closest ? node : node.parentElement)?.closest("[data-arm]");
new MutationObserver((all) => all.forEach((one) =>
  window.written.push(cardOf(one.target)?.dataset.arm))).observe(document.querySelector("main"),
  { subtree: true, childList: true, characterData: true, attributes: true });
"""
STATES = {
    "regular": "good",
    "near": "good",
    "singular": "good",
    "off-work": "good",
    "beyond": "uncertain",
    "leapt": "uncertain",
    "drives-silent": "uncertain",
    "simulated": "good",
    "stale": "stale",
    "never": "none",
}


@pytest.fixture(scope="module")
def shared(tab: Screen, hall: ServerProcess) -> Iterator[Callable[[], Screen]]:
    """The board of the hall, on a large screen: opened once for all that only look at it."""
    address = f"{hall.url}/"

    def opened() -> Screen:
        if tab.run("return document.body.dataset.looked ?? ''") != address:
            tab.open(address, Look(1920, 1080), ready=READY)
            tab.until(ALL_THERE)
            tab.run("document.body.dataset.looked = arguments[0]", address)
        return tab

    yield opened
    tab.forget()


@pytest.fixture
def board(shared: Callable[[], Screen]) -> Screen:
    """The board as it stands."""
    return shared()


def card_text(screen: Screen, arm: str) -> str:
    text: str = screen.run(f"return {CARD.format(arm)}.innerText")
    return text


def test_every_arm_has_its_place_by_name(board: Screen) -> None:
    names = board.run(
        "return [...document.querySelectorAll('[data-arm]')].map((one) => one.dataset.arm)"
    )
    assert names == sorted(HALL)


def test_each_state_is_told_by_a_word_and_by_its_frame(board: Screen) -> None:
    looks: dict[str, set[str]] = {}
    for arm, state in STATES.items():
        assert board.run(f"return {CARD.format(arm)}.dataset.state") == state
        frame = f"getComputedStyle({CARD.format(arm)}).borderTopStyle"
        looks.setdefault(state, set()).add(board.run(f"return {frame}"))
    assert all(len(styles) == 1 for styles in looks.values())
    assert looks["good"] == {"solid"}
    assert looks["uncertain"] == {"dashed"}
    assert looks["stale"] not in ({"solid"}, {"dashed"})


def test_a_stale_card_shows_no_number_that_could_be_live(board: Screen) -> None:
    text = card_text(board, "stale")
    assert "STALE" in text.upper()
    position = httpx.get(f"{_url(board)}/v1/arms/stale/live").json()["poses"][0]["position"]
    assert not [x for x in position if f"{abs(x):.1f}" in text or f"{abs(x):.0f}." in text]
    live = card_text(board, "regular")
    assert "STALE" not in live.upper()
    assert [x for x in position if f"{abs(x):.1f}" in live]


def test_the_word_stale_is_read_from_afar(board: Screen) -> None:
    size = board.run(
        f"const all = [...{CARD.format('stale')}.querySelectorAll('*')].filter((one) =>"
        " one.checkVisibility() && /^stale$/i.test(one.textContent.trim()));"
        " return Math.max(...all.map((one) => parseFloat(getComputedStyle(one).fontSize)))"
    )
    assert size >= 28


@pytest.mark.parametrize(
    ("arm", "said"),
    [
        ("near", "singular"),
        ("singular", "singular"),
        ("off-work", "working travel"),
        ("beyond", "travel limit"),
        ("leapt", "faster than its top speed"),
        ("drives-silent", "finite"),
    ],
)
def test_one_sentence_says_what_matters(board: Screen, arm: str, said: str) -> None:
    assert said in card_text(board, arm).lower()
    assert said not in card_text(board, "regular").lower()


def test_simulated_and_never_are_said_in_words(board: Screen) -> None:
    assert "SIMULATED" in card_text(board, "simulated")
    assert "SIMULATED" not in card_text(board, "regular")
    assert not any(letter.isdigit() for letter in card_text(board, "never"))


def test_the_nearest_named_frame_is_that_of_the_interface(board: Screen) -> None:
    told = httpx.get(f"{_url(board)}/v1/arms/regular/live?nearest=1").json()
    nearest = (told["poses"][0].get("nearest") or told.get("nearest"))["frame"]
    assert nearest in card_text(board, "regular")


def test_hostile_words_stay_words(board: Screen) -> None:
    assert board.run("return document.title") != "taken"
    inside = "querySelectorAll('script, img, iframe, svg[onload]').length"
    assert board.run(f"return {CARD.format('hostile')}.{inside}") == 0
    # No address with x, which an image of the title would ask for.
    assert not [one for one in board.requests() if one.endswith("/x")]


def seen(screen: Screen) -> tuple[float, float]:
    """Return how large figures are and how far the last card reaches, in shares of the screen."""
    figure, bottom = screen.run(
        f"const figures = {CARD.format('regular')}.querySelectorAll('.place dd'), all = "
        "[...document.querySelectorAll('[data-arm]')].map((x) => x.getBoundingClientRect().bottom);"
        " return [parseFloat(getComputedStyle(figures[0]).fontSize) / innerWidth,"
        " Math.max(...all) / innerHeight]"
    )
    return figure, bottom


def test_twelve_arms_are_on_one_screen_and_seven_are_read_from_five_metres(board: Screen) -> None:
    figure, bottom = seen(board)
    assert figure >= 0.026
    assert bottom <= 1
    seven = ",".join(["regular", *(name for name in sorted(HALL) if name != "regular")][:7])
    board.open(f"{_url(board)}/?arms={seven}", Look(1280, 800), ready=READY)
    for look in (Look(1280, 800), Look(1920, 1080)):
        board.look(look)
        size = f"getComputedStyle({CARD.format('regular')}.querySelector('.place dd')).fontSize"
        board.until(f"parseFloat({size}) >= 0.039 * innerWidth")
        assert seen(board)[1] <= 1
    # Who chose which arms are shown is told of those that stood still since before.
    assert "891.1" in card_text(board, "regular")


def test_no_card_grows_by_what_it_says(board: Screen) -> None:
    sizes = board.run(
        "return [...document.querySelectorAll('[data-arm]')].map((one) => one.offsetHeight + ' '"
        " + one.querySelector('.head').offsetHeight)"
    )
    assert len({one.split()[0] for one in sizes}) == 1
    assert len({one.split()[1] for one in sizes}) == 1
    inside = "[...document.querySelectorAll('.card > div')].filter((one) => one.scrollHeight > "
    assert board.run(f"return {inside} one.clientHeight + 1).length") == 0


def test_uncertain_is_plain_from_across_the_hall(board: Screen) -> None:
    """By word, shape and line, each unlike those of stale and of good."""
    look = (
        "const card = document.querySelector('[data-arm=\"{}\"]'), word = [...card.querySelectorAll"
        "('b')].find((one) => /UNCERTAIN|STALE/.test(one.textContent)), style = (one) =>"
        " getComputedStyle(one); return [word ? parseFloat(style(word).fontSize) : 0,"
        " style(card.querySelector('.head')).backgroundColor, style(card.querySelector('dd'))"
        ".backgroundImage, style(card).backgroundImage, card.querySelector('dl').hidden]"
    )
    word, head, line, hatch, no_figure = board.run(look.format("leapt"))
    good = board.run(look.format("regular"))
    stale = board.run(look.format("stale"))
    assert word >= 24
    assert head not in (good[1], stale[1])
    assert ("gradient" in line, "gradient" in good[2]) == (True, False)
    assert ("gradient" in hatch, "gradient" in stale[3]) == (False, True)
    assert (no_figure, stale[4]) == (False, True)


def test_a_card_leads_to_its_sheet_by_keyboard(board: Screen) -> None:
    board.run(f"{CARD.format('near')}.querySelector('a').focus()")
    board.press("Enter")
    board.until(f"location.pathname === '/arms/near' && {READY}")


def test_what_changes_is_written_and_what_does_not_is_left(
    screen: Screen, hall: ServerProcess
) -> None:
    screen.open(f"{hall.url}/", Look(1280, 800), ready=READY)
    screen.until(ALL_THERE)
    screen.run(WRITTEN)
    before = card_text(screen, "regular")
    with httpx.Client(base_url=hall.url) as client:
        feed(client, "regular", [UPRIGHT[0] + 5.0, *UPRIGHT[1:]])
    screen.until("window.written.includes('regular')")
    # Ages are written twice a second, of all cards in one turn.
    screen.until("window.written.filter((name) => name === 'stale').length > 1")
    assert card_text(screen, "regular") != before
    written = set(screen.run("return window.written"))
    with httpx.Client(base_url=hall.url) as client:
        feed(client, "regular", UPRIGHT)
    # Ages go on by themselves; a card whose numbers stand says nothing else anew.
    assert "never" not in written


def test_what_stands_below_never_runs_into_its_neighbour(board: Screen) -> None:
    fields = board.run("""
      return [...document.querySelectorAll(".card .block dd")].map((one) => {
        one.textContent = "a-tool-whose-name-is-far-too-long-for-any-card-of-a-board".repeat(3);
        const [own, room] = [one, one.parentElement].map((box) => box.getBoundingClientRect());
        const isCut = one.scrollWidth > one.clientWidth;
        return [own.right <= room.right + 0.5, getComputedStyle(one).overflowX, isCut];
      });
    """)
    assert len(fields) >= 3 * len(HALL) - 3
    told = "[...document.querySelectorAll('.card .block dd[title]')].map((one) => one.title)"
    assert len(board.run(f"return {told}.filter((one) => one.length > 3)")) >= 8
    assert {tuple(one) for one in fields} == {(True, "hidden", True)}


def test_values_that_were_all_refused_are_not_told_as_none(board: Screen) -> None:
    body = """
      const problem = { code: "no-live-pose", say: "joint values have stopped" };
      return all.saidOf({ ok: false, reason: "stale", problem }, 0, "");
    """
    said = of("board_words.js", body, board)
    assert (said["state"], said["word"]) == ("bad", "NO POSE")
    assert said["sentence"] == "Of the values that came none can be relied on."


def _url(screen: Screen) -> str:
    url: str = screen.run("return location.origin")
    return url
