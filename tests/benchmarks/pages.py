"""Pages in a real browser without a graphics card: how soon, how smooth, how dear, how large.

    python -m tests.benchmarks.pages

Asked: the first useful picture within 300 ms on localhost, 30 frames a second while a drawing is
turned, a board of 50 arms at 10 Hz below 30 % of one core, at most 100 kB in all. A first picture
is there when the page says so (``data-ready``) and the frame after that was painted; nothing is in
the browser's cache. The share of a core is processor time of all processes of the browser, and of
the one that runs the page. Drawing is by software: the browser is started without a GPU.
"""

import gzip
import os
import subprocess
import sys
import tempfile
import time
from pathlib import Path
from statistics import median

import httpx

from tests.browser.chromium import Look, Screen, browsing
from tests.browser.hall import PATTERN

ROOT = Path(__file__).resolve().parents[2]
FOLDER = ROOT / "service/web/static/pages"
TICKS = os.sysconf("SC_CLK_TCK")
ARMS, RATE_HZ, LOOKED_AT_S, TURNED_S, TIMES = 50, 10, 20.0, 4.0, 15
PAGES = {"board": "/", "sheet": "/arms/housing-loader", "reach": "/arms/housing-loader/reach"}
READY = "document.documentElement.dataset.ready"

# Notes when the page is ready and the frame after that has been painted.
WATCH = """
new MutationObserver((_, watching) => {
  if (!document.documentElement || !document.documentElement.dataset.ready) return;
  watching.disconnect();
  const said = performance.now();
  const note = () => { window.firstPicture = [said, performance.now()]; };
  requestAnimationFrame(() => setTimeout(note));
}).observe(document, { subtree: true, attributes: true, childList: true });
"""

# Turns the free view by a pointer that moves once a frame; calls back with the frames a second and
# the slowest frame.
TURN = """
const [view, seconds, done] = arguments;
const box = view.getBoundingClientRect();
const at = (kind, x, y) => view.dispatchEvent(new PointerEvent(kind, { bubbles: true,
  clientX: x, clientY: y, pointerId: 1, isPrimary: true, buttons: kind === "pointerup" ? 0 : 1 }));
const [x, y] = [box.left + box.width / 2, box.top + box.height / 2];
at("pointerdown", x, y);
const begun = performance.now();
let frames = 0, last = begun, slowest = 0;
const step = (now) => {
  frames += 1;
  slowest = Math.max(slowest, now - last);
  last = now;
  at("pointermove", x + 120 * Math.sin(frames / 20), y + 40 * Math.sin(frames / 33));
  if (now - begun < 1000 * seconds) { requestAnimationFrame(step); return; }
  at("pointerup", x, y);
  done([1000 * (frames - 1) / (now - begun), slowest]);
};
requestAnimationFrame(step);
"""


def serve(*options: str) -> tuple[subprocess.Popen[str], str]:
    """Start a server and return it with its address."""
    command = [sys.executable, "-m", "service", "serve", "--port", "0", "--database", ":memory:"]
    process = subprocess.Popen([*command, *options], cwd=ROOT, stdout=subprocess.PIPE, text=True)
    assert process.stdout is not None
    return process, "http://127.0.0.1:" + process.stdout.readline().strip().rsplit(":", 1)[1]


def first_pictures(screen: Screen, url: str) -> None:
    """Print how soon each page shows something that is of use."""
    screen.tell("Page.addScriptToEvaluateOnNewDocument", source=WATCH)
    screen.tell("Network.enable")
    screen.tell("Network.setCacheDisabled", cacheDisabled=True)
    for name, path in PAGES.items():
        said, painted, first = [], [], []
        for _ in range(TIMES):
            screen.open(url + path, Look(1920, 1080))
            ready, after = screen.until("window.firstPicture")
            said.append(ready)
            painted.append(after)
            shown = "performance.getEntriesByName('first-contentful-paint')[0]?.startTime"
            first.append(screen.until(shown))
        print(
            f"{name}: anything {median(first):.0f} ms, ready {median(said):.0f} ms, painted "
            f"{median(painted):.0f} ms, the worst of {TIMES} {max(painted):.0f} ms  (asked: 300)"
        )


def turning(screen: Screen, url: str) -> None:
    """Print how many frames a second are drawn while the free view is turned."""
    for look in (Look(1920, 1080), Look(390, 844)):
        screen.open(url + PAGES["sheet"], look, ready=READY)
        time.sleep(1.0)
        view = screen.run("return document.querySelector('[data-view=free]')")
        screen.run("arguments[0].scrollIntoView({ block: 'center' })", view)
        rate, slowest = screen.driver.execute_async_script(TURN, view, TURNED_S)
        print(
            f"turning at {look.width} px: {rate:.0f} frames/s, slowest {slowest:.0f} ms"
            "  (asked: 30)"
        )


def processes_below(parent: int) -> dict[int, str]:
    """Return the processes that descend from one, with their command lines."""
    children: dict[int, list[int]] = {}
    for entry in Path("/proc").iterdir():
        if entry.name.isdigit():
            try:
                stat = (entry / "stat").read_text("ascii", errors="replace")
            except OSError:
                continue
            children.setdefault(int(stat.rsplit(")", 1)[1].split()[1]), []).append(int(entry.name))
    found, left = {}, [parent]
    while left:
        for one in children.get(left.pop(), []):
            found[one] = Path(f"/proc/{one}/cmdline").read_text("utf-8", errors="replace")
            left.append(one)
    return found


def seconds_of(process: int) -> float:
    """Return the processor time a process has used."""
    stat = Path(f"/proc/{process}/stat").read_text("ascii", errors="replace").rsplit(")", 1)[1]
    return sum(map(int, stat.split()[11:13])) / TICKS


def busy_board(screen: Screen, look: Look) -> None:
    """Print the share of a core that a board of many arms takes while all of them move."""
    server, url = serve()
    with httpx.Client(base_url=url) as client:
        for number in range(ARMS):
            document = {**PATTERN, "name": f"arm-{number:02d}"}
            client.post("/v1/arms", json=document).raise_for_status()
    feeder = subprocess.Popen(
        [sys.executable, "-m", "service", "simulate", "--url", url, "--rate", str(RATE_HZ)],
        cwd=ROOT,
        stdout=subprocess.DEVNULL,
    )
    try:
        screen.open(url + "/", look, ready=READY)
        time.sleep(8.0)
        running = processes_below(screen.driver.service.process.pid)
        before = {one: seconds_of(one) for one in running}
        begun = time.monotonic()
        time.sleep(LOOKED_AT_S)
        took = time.monotonic() - begun
        used = {one: (seconds_of(one) - before[one]) / took for one in running}
        page = sum(share for one, share in used.items() if "--type=renderer" in running[one])
        changed = screen.run("return document.querySelectorAll('[data-arm]').length")
        print(
            f"board of {changed} arms at {RATE_HZ} Hz, {look.width} px {look.theme}: "
            f"{100 * sum(used.values()):.0f} % of a core for the whole browser, "
            f"{100 * page:.0f} % for the page  (asked: 30)"
        )
    finally:
        feeder.terminate()
        feeder.wait(10)
        server.terminate()
        server.wait(10)


def main() -> None:
    """Print all figures beside what was asked."""
    files = [file.read_bytes() for file in FOLDER.iterdir() if file.suffix != ".py"]
    sent = sum(len(gzip.compress(content, 9)) for content in files)
    print(
        f"all pages together: {sent / 1000:.1f} kB as sent, "
        f"{sum(map(len, files)) / 1000:.1f} kB as they stand  (asked: 100)"
    )
    server, url = serve("--demo")
    with tempfile.TemporaryDirectory() as folder, browsing(Path(folder)) as screen:
        try:
            httpx.get(f"{url}/v1/arms/housing-loader/pose?q=0,0,0,0,0,0", timeout=120)
            turning(screen, url)
            first_pictures(screen, url)
        finally:
            server.terminate()
            server.wait(10)
    with tempfile.TemporaryDirectory() as folder, browsing(Path(folder)) as screen:
        for look in (Look(1920, 1080), Look(390, 844, "dark")):
            busy_board(screen, look)


if __name__ == "__main__":
    main()
