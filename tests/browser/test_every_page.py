"""Each page and state in both themes and at three widths: what every page must keep to.

Widths differ in layout, themes in colours alone: a page is opened at each width, and looked at in
the other theme where it stands. Pictures of all of them are written for a person to judge where
``ARMSPAN_TEST_PICTURES`` names a folder. Left out: what pages do (the modules named so).
"""

from dataclasses import dataclass, replace

import pytest

from tests.browser.checks import contrast_faults, focus_faults, host_faults, looks_faults
from tests.browser.chromium import Look, Screen
from tests.conftest import ServerProcess

READY = "document.documentElement.dataset.ready"
WIDTHS = ((390, 844), (1280, 800), (1920, 1080))
OTHER = {"light": "dark", "dark": "light"}


@dataclass(frozen=True, slots=True)
class Shown:
    """A page in one state: of which server, and at which address."""

    server: str
    path: str


PAGES = {
    "board": Shown("hall", "/"),
    "board-moving": Shown("demo", "/"),
    "board-empty": Shown("empty", "/"),
    "board-bare": Shown("hall", "/?bare"),
    "sheet": Shown("demo", "/arms/housing-loader"),
    "sheet-near": Shown("hall", "/arms/near"),
    "sheet-stale": Shown("hall", "/arms/stale"),
    "sheet-never": Shown("hall", "/arms/never"),
    "sheet-hostile": Shown("hall", "/arms/hostile"),
    "sheet-bare": Shown("demo", "/arms/lathe-tender?bare"),
    "sheet-four-axes": Shown("demo", "/arms/pallet-stacker"),
    "sheet-track": Shown("demo", "/arms/line-runner"),
    "reach": Shown("demo", "/arms/housing-loader/reach"),
    "reach-bare": Shown("demo", "/arms/housing-loader/reach?bare"),
    "wrong-name": Shown("demo", "/arms/housing-laoder"),
}
# The three pages as they mostly are at all widths; of the other states one look each, in turn.
CASES = [
    (name, Look(*WIDTHS[at % 3], ("light", "dark")[at % 2]))
    for turn, name in enumerate(PAGES)
    for at in ((0, 2, 4) if name in {"board", "sheet", "reach"} else [turn])
]


@pytest.mark.parametrize(("name", "look"), CASES, ids=lambda part: str(part))
def test_page(screen: Screen, request: pytest.FixtureRequest, name: str, look: Look) -> None:
    server: ServerProcess = request.getfixturevalue(PAGES[name].server)
    screen.open(server.url + PAGES[name].path, look, ready=READY)
    screen.picture(f"{name}-{look}", whole=True)
    assert looks_faults(screen) == []
    assert host_faults(screen, server.url) == []
    assert focus_faults(screen) == []
    # Without motion: colours are weighed where they have come to.
    other = replace(look, theme=OTHER[look.theme], still=True)
    screen.look(other)
    assert contrast_faults(screen) == []
    screen.picture(f"{name}-{other}", whole=True)
    # A page that was not found says 404, and the browser tells the console so.
    assert [line for line in screen.console() if "404" not in line or name != "wrong-name"] == []
