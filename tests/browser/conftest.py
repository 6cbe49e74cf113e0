"""One browser, the demonstration and a hall of made arms for all tests of pages.

Skipped where there is no browser. Left out: pages; the tests that need one open it.
"""

from collections.abc import Callable, Iterator

import pytest

from tests.browser.chromium import MISSING, Screen, browsing
from tests.browser.hall import fill
from tests.conftest import ServerProcess


@pytest.fixture(scope="package")
def screen(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Screen]:
    """The one tab of a browser that all tests of pages share."""
    if MISSING:
        pytest.skip(MISSING)
    with browsing(tmp_path_factory.mktemp("browser")) as opened:
        yield opened


@pytest.fixture(scope="package")
def demo(launch: Callable[..., ServerProcess]) -> Iterator[ServerProcess]:
    """The demonstration, which moves while it is looked at."""
    server = launch("--demo")
    yield server
    _end(server)


@pytest.fixture(scope="package")
def hall(launch: Callable[..., ServerProcess]) -> Iterator[ServerProcess]:
    """A server with one arm in each state a page can meet; nothing moves."""
    server = launch()
    fill(server.url)
    yield server
    _end(server)


@pytest.fixture(scope="package")
def empty(launch: Callable[..., ServerProcess]) -> Iterator[ServerProcess]:
    """A server where no arm is stored."""
    server = launch()
    yield server
    _end(server)


def _end(server: ServerProcess) -> None:
    """End a server with the tests of pages: all other tests would run beside it."""
    server.process.kill()
    server.process.wait(10)
