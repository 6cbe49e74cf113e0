"""One browser, the demonstration and a hall of made arms for all tests of pages.

Skipped where there is no browser. Left out: pages; the tests that need one open it.
"""

from collections.abc import Callable, Iterator

import pytest

from tests.browser.chromium import MISSING, Screen, browsing
from tests.browser.hall import fill
from tests.conftest import ServerProcess


@pytest.fixture(scope="session")
def tab(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Screen]:
    """The one tab of a browser that all tests of a run share."""
    if MISSING:
        pytest.skip(MISSING)
    with browsing(tmp_path_factory.mktemp("browser")) as opened:
        yield opened


@pytest.fixture
def screen(tab: Screen) -> Iterator[Screen]:
    """The tab, left empty afterwards: a page that stays open would go on asking."""
    yield tab
    tab.forget()


@pytest.fixture(scope="session")
def demo(launch: Callable[..., ServerProcess]) -> ServerProcess:
    """The demonstration, which moves while it is looked at."""
    return launch("--demo")


@pytest.fixture(scope="session")
def hall(launch: Callable[..., ServerProcess]) -> ServerProcess:
    """A server with one arm in each state a page can meet; nothing moves."""
    server = launch()
    fill(server.url)
    return server


@pytest.fixture(scope="session")
def empty(launch: Callable[..., ServerProcess]) -> ServerProcess:
    """A server where no arm is stored."""
    return launch()
