"""The page of addresses in a real browser: it shows every operation and asks no other host.

Left out: looks. Skipped where no chromium is installed.
"""

import json
import re
import shutil
import subprocess
from collections.abc import Callable
from pathlib import Path
from typing import Any

import httpx
import pytest

BROWSER = shutil.which("chromium") or shutil.which("chromium-browser")
OPTIONS = (
    "--headless",
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
    # The browser has business of its own with other hosts; it stays on this machine.
    "--host-resolver-rules=MAP * ~NOTFOUND, EXCLUDE 127.0.0.1",
    "--virtual-time-budget=15000",
    "--enable-logging=stderr",
    "--dump-dom",
)
CONSOLE = re.compile(r"CONSOLE.*")

pytestmark = pytest.mark.skipif(BROWSER is None, reason="no chromium is installed here")


def look(address: str, folder: Path) -> tuple[str, list[str], list[str]]:
    """Return what a page became, the addresses it asked for, and what its console says."""
    log = folder / "net.json"
    assert BROWSER is not None
    done = subprocess.run(
        [
            BROWSER,
            *OPTIONS,
            f"--user-data-dir={folder / 'profile'}",
            f"--log-net-log={log}",
            address,
        ],
        capture_output=True,
        text=True,
        timeout=120,
        check=True,
    )
    return done.stdout, asked_by_pages(log), CONSOLE.findall(done.stderr)


def asked_by_pages(log: Path) -> list[str]:
    """Return the addresses that pages asked for, without the browser's own business."""
    found = json.loads(log.read_text(encoding="utf-8"))
    start = found["constants"]["logEventTypes"]["URL_REQUEST_START_JOB"]
    said = [event.get("params", {}) for event in found["events"] if event["type"] == start]
    return [
        params["url"]
        for params in said
        if params.get("initiator", "not an origin") != "not an origin"
    ]


@pytest.fixture(scope="module")
def page(launch: Callable[..., Any], tmp_path_factory: pytest.TempPathFactory) -> Any:
    """The page of addresses as a browser sees it, and the server it came from."""
    server = launch("--demo")
    return server.url, *look(f"{server.url}/docs", tmp_path_factory.mktemp("browser"))


def test_every_operation_is_shown(page: Any) -> None:
    url, shown, _, _ = page
    paths = httpx.get(f"{url}/openapi.json").json()["paths"]
    operations = sum(len(item) for item in paths.values())
    assert operations >= 20
    assert {path for path in paths if f'data-path="{path}"' in shown} == set(paths)
    assert shown.count('class="opblock-summary-path"') == operations


def test_the_cautions_stand_below(page: Any) -> None:
    _, shown, _, _ = page
    assert "Not a safety function" in shown.split("<footer ")[1]


def test_no_other_host_is_asked(page: Any) -> None:
    url, _, asked, _ = page
    assert f"{url}/openapi.json" in asked
    assert f"{url}/docs/files/swagger-ui-bundle.js" in asked
    assert [address for address in asked if not address.startswith(f"{url}/")] == []


def test_the_console_has_nothing_to_complain(page: Any) -> None:
    _, _, _, console = page
    # A browser asks for an icon of its own accord; there is none.
    assert [line for line in console if "favicon.ico" not in line] == []


def test_a_page_that_asks_another_host_is_seen(tmp_path: Path) -> None:
    asking = tmp_path / "asking.html"
    asking.write_text('<img src="http://elsewhere.example/x.png">', encoding="utf-8")
    _, asked, _ = look(asking.as_uri(), tmp_path)
    assert asked == ["http://elsewhere.example/x.png"]
