"""The pages of addresses, codes and controllers as a person meets them: both themes, three widths.

Left out: what they list (tests/contract).
"""

import pytest

from tests.browser.checks import (
    contrast_faults,
    focus_faults,
    host_faults,
    name_faults,
    structure_faults,
    width_faults,
)
from tests.browser.chromium import Look, Screen
from tests.conftest import ServerProcess

PAGES = {
    "docs/problems": "document.querySelector('tr[id]')",
    "docs/controllers": "document.querySelector('#place-x')",
}
LOOKS = [Look(390, 844), Look(1280, 800, "dark")]


@pytest.mark.parametrize("look", LOOKS, ids=str)
@pytest.mark.parametrize("path", PAGES)
def test_plain_pages(screen: Screen, demo: ServerProcess, path: str, look: Look) -> None:
    screen.open(f"{demo.url}/{path}", look, ready=PAGES[path])
    screen.picture(f"{path.replace('/', '-')}-{look}", whole=True)
    assert contrast_faults(screen) == []
    assert structure_faults(screen) == []
    assert name_faults(screen) == []
    assert width_faults(screen) == []
    assert focus_faults(screen) == []
    assert screen.console() == []
    assert host_faults(screen, demo.url) == []
