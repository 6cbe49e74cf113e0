"""A real browser with one tab, looked at through its driver: Debian's chromium and chromedriver.

Idea: every page is opened in a look that is said (width, height, theme, motion), waited for by what
it shows, and asked afterwards what its console said, which addresses it asked for and what a screen
reader would be told. Left out: what is a fault (checks.py).
"""

import base64
import json
import os
import shutil
import time
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import Any
from urllib.parse import urlsplit

BROWSER = shutil.which("chromium") or shutil.which("chromium-browser")
DRIVER = shutil.which("chromedriver")
MISSING = (
    "no chromium is installed here"
    if BROWSER is None
    else "no chromedriver is installed here"
    if DRIVER is None
    else ""
)
"""Why these tests cannot run here; empty where they can."""

PICTURES = "ARMSPAN_TEST_PICTURES"
"""Names the folder that pictures of all pages and states are written to, for a person to judge."""

PATIENCE_S = 30.0
KEYS = {
    "Tab": (9, ""),
    "Enter": (13, "\r"),
    "Escape": (27, ""),
    " ": (32, " "),
    "End": (35, ""),
    "Home": (36, ""),
    "ArrowLeft": (37, ""),
    "ArrowUp": (38, ""),
    "ArrowRight": (39, ""),
    "ArrowDown": (40, ""),
    "+": (187, "+"),
    "-": (189, "-"),
}
SHIFT = 8
_OPTIONS = (
    "--headless=new",
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--disable-dev-shm-usage",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
    "--hide-scrollbars",
    "--force-color-profile=srgb",
    # The browser has business of its own with other hosts; it stays on this machine.
    "--host-resolver-rules=MAP * ~NOTFOUND, EXCLUDE 127.0.0.1",
)


@dataclass(frozen=True, slots=True)
class Look:
    """How a page is looked at.

    Attributes
    ----------
    width, height : of the window, CSS pixels.
    theme : ``light`` or ``dark``, what the system asks for.
    still : whether the system asks for less motion.
    """

    width: int = 1280
    height: int = 800
    theme: str = "light"
    still: bool = False

    def __str__(self) -> str:
        return f"{self.width}-{self.theme}"


@dataclass(frozen=True, slots=True)
class Told:
    """One thing on a page as a screen reader is told it."""

    role: str
    name: str
    properties: dict[str, Any]


class Screen:
    """One tab of the browser."""

    def __init__(self, driver: Any) -> None:
        self.driver = driver
        self._url = "what the browser begins with"

    def open(
        self, url: str, look: Look | None = None, *, ready: str = "", fresh: bool = True
    ) -> None:
        """Open a page in a look and wait until the expression ``ready`` holds in it.

        What a page of this origin kept in the browser is forgotten, unless not ``fresh``.
        """
        look = look or Look()
        self.forget()
        parts = urlsplit(url)
        if fresh and parts.scheme.startswith("http"):
            origin = f"{parts.scheme}://{parts.netloc}"
            self.tell("Storage.clearDataForOrigin", origin=origin, storageTypes="local_storage")
        self.look(look)
        self._url = url
        self.driver.get(url)
        if ready:
            self.until(ready)

    def look(self, look: Look) -> None:
        """Look at the page that is open in another way."""
        self.tell(
            "Emulation.setDeviceMetricsOverride",
            width=look.width,
            height=look.height,
            deviceScaleFactor=1,
            mobile=False,
        )
        features = [
            {"name": "prefers-color-scheme", "value": look.theme},
            {"name": "prefers-reduced-motion", "value": "reduce" if look.still else ""},
        ]
        self.tell("Emulation.setEmulatedMedia", features=features)

    def forget(self) -> None:
        """Leave the page and forget what it said and asked for."""
        if not self._url:
            return
        self._url = ""
        self.driver.get("about:blank")
        self.driver.get_log("browser")
        self.driver.get_log("performance")

    def tell(self, command: str, **parameters: Any) -> Any:
        """Send the browser a command of its own protocol."""
        return self.driver.execute_cdp_cmd(command, parameters)

    def run(self, script: str, *values: Any) -> Any:
        """Run the body of a function in the page and return what it returns."""
        return self.driver.execute_script(script, *values)

    def until(self, expression: str, seconds: float = PATIENCE_S) -> Any:
        """Wait until an expression holds in the page, and return it."""
        end = time.monotonic() + seconds
        while not (value := self.run(f"return ({expression})")):
            assert time.monotonic() < end, f"never came true: {expression}\n{self.text()[:2000]}"
            time.sleep(0.02)
        return value

    def text(self) -> str:
        """Return the text that is shown."""
        shown: str = self.run("return document.body.innerText")
        return shown

    def press(self, *keys: str, shift: bool = False) -> None:
        """Press keys, one after another, as on a keyboard."""
        for key in keys:
            code, text = KEYS[key] if key in KEYS else (ord(key.upper()), key)
            said = {
                "key": key,
                "code": key,
                "windowsVirtualKeyCode": code,
                "modifiers": SHIFT if shift else 0,
            }
            kind = "keyDown" if text else "rawKeyDown"
            self.tell("Input.dispatchKeyEvent", type=kind, text=text, **said)
            self.tell("Input.dispatchKeyEvent", type="keyUp", **said)

    def write(self, text: str) -> None:
        """Type a text into what has the focus."""
        self.tell("Input.insertText", text=text)

    def console(self) -> list[str]:
        """Return what the console said since it was asked last, of whatever weight."""
        return [entry["message"] for entry in self.driver.get_log("browser")]

    def requests(self) -> list[str]:
        """Return the addresses asked for since they were told last, by any frame of the page."""
        found = []
        for entry in self.driver.get_log("performance"):
            message = json.loads(entry["message"])["message"]
            if message["method"] == "Network.requestWillBeSent":
                found.append(message["params"]["request"]["url"])
            elif message["method"] == "Network.webSocketCreated":
                found.append(message["params"]["url"])
        return found

    def told(self) -> list[Told]:
        """Return what a screen reader is told, in its order."""
        nodes = self.tell("Accessibility.getFullAXTree")["nodes"]
        return [
            Told(
                node.get("role", {}).get("value", ""),
                node.get("name", {}).get("value", "") or "",
                {one["name"]: one["value"].get("value") for one in node.get("properties", ())},
            )
            for node in nodes
            if not node.get("ignored")
        ]

    def picture(self, name: str, *, whole: bool = False) -> None:
        """Write a picture of the page where a person asked for them, or else do nothing."""
        folder = os.environ.get(PICTURES)
        if not folder:
            return
        file = Path(folder) / f"{name}.png"
        file.parent.mkdir(parents=True, exist_ok=True)
        taken = self.tell("Page.captureScreenshot", captureBeyondViewport=whole)
        file.write_bytes(base64.b64decode(taken["data"]))


@contextmanager
def browsing(folder: Path, *further: str) -> Iterator[Screen]:
    """Start the browser with a profile of its own in ``folder``, and end it afterwards."""
    from selenium.webdriver import Chrome, ChromeOptions
    from selenium.webdriver.chrome.service import Service

    options = ChromeOptions()
    options.binary_location = str(BROWSER)
    for option in (*_OPTIONS, f"--user-data-dir={folder / 'profile'}", *further):
        options.add_argument(option)
    options.set_capability("goog:loggingPrefs", {"browser": "ALL", "performance": "ALL"})
    # Both programs are named: nothing is looked for on the network.
    driver = Chrome(options, Service(str(DRIVER)))
    try:
        driver.set_page_load_timeout(30)
        driver.set_script_timeout(30)
        yield Screen(driver)
    finally:
        driver.quit()
