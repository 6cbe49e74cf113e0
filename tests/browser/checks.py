"""What every page must keep to, whatever it shows: contrast, names, order of focus, hosts, console.

Idea: each check returns the list of faults in plain words, so that a test says ``== []`` and a
failure reads as a list of what to mend. Measured by WCAG 2.2 (W3C Recommendation, 2023): 1.4.3 and
1.4.6 contrast, 1.4.10 reflow, 1.4.11 fields, 2.4.3 and 2.4.7 focus, 2.5.8 size of what is pressed,
4.1.2 names and roles. Left out: what a canvas paints, and whether words are good.
"""

from pathlib import Path
from typing import Any

from tests.browser.chromium import Screen

WORDS = 4.5
NUMBERS = 7.0
"""Least contrast, asked of all text whatever its size: level AA, and AAA for numbers."""

RING_PX = 3.0
RING = 3.0
"""Width and least contrast of the ring around what has the focus."""

_INSPECTION = Path(__file__).with_name("inspection.js").read_text(encoding="utf-8")
# The last expression of the file is the object of its functions; a page is given it once.
_GIVEN = "window.inspection = " + _INSPECTION[_INSPECTION.index("(() =>") :]
_NAMED = frozenset(
    [
        "button",
        "link",
        "textbox",
        "searchbox",
        "combobox",
        "listbox",
        "checkbox",
        "radio",
        "switch",
        "slider",
        "spinbutton",
        "img",
        "navigation",
        "region",
        "form",
        "table",
        "grid",
        "tab",
        "tabpanel",
        "dialog",
        "group",
        "meter",
        "progressbar",
        "option",
    ]
)
# Named only where it was meant as a landmark or a group of its own.
_UNLESS_PLAIN = frozenset({"region", "form", "table", "grid", "group", "option"})


def measured(screen: Screen, call: str, *values: Any) -> Any:
    """Return what a function of inspection.js says of the page."""
    if not screen.run("return 'inspection' in window"):
        screen.run(_GIVEN)
    return screen.run(f"return inspection.{call};", *values)


def contrast_faults(screen: Screen) -> list[str]:
    """Return text that is too faint for its ground."""
    found = measured(screen, f"contrasts({WORDS}, {NUMBERS})")
    assert found["looked"] > 0, "no text was found on the page"
    return [
        *found["faults"],
        *(f"a field is not seen: {one}" for one in measured(screen, "fields()")),
    ]


def structure_faults(screen: Screen) -> list[str]:
    """Return what is wrong with language, title, headings, landmarks, ids, tables, drawings."""
    faults: list[str] = measured(screen, "structure()")
    return faults


def name_faults(screen: Screen) -> list[str]:
    """Return what a screen reader could only call by its role."""
    told = screen.told()
    faults = [
        f"a {one.role} without a name"
        for one in told
        if one.role in _NAMED - _UNLESS_PLAIN and not one.name.strip()
    ]
    links: dict[str, int] = {}
    for one in told:
        if one.role == "button":
            links[one.name] = links.get(one.name, 0) + 1
    faults += [f'{count} buttons are called "{name}"' for name, count in links.items() if count > 1]
    return faults


def width_faults(screen: Screen) -> list[str]:
    """Return what makes the page wider than the window, and text that is cut off."""
    return [*measured(screen, "wide()"), *(f"cut off: {one}" for one in measured(screen, "cut()"))]


def size_faults(screen: Screen) -> list[str]:
    """Return what is too small to be pressed."""
    return [f"too small to press: {one}" for one in measured(screen, "small()")]


def focus_faults(screen: Screen, most: int = 400) -> list[str]:
    """Go through the page by Tab; return what was left out, out of order or not seen."""
    expected = measured(screen, "begin()")
    assert expected < most, f"{expected} things to press on one page"
    faults = []
    for _ in range(expected):
        screen.press("Tab")
        seen = screen.run("return inspection.focused()")
        if seen is None:
            faults.append("the focus left the page early")
            break
        if seen["width"] < RING_PX or seen["contrast"] < RING:
            faults.append(
                f"focus not seen ({seen['width']} px, {seen['contrast']:.1f}): {seen['where']}"
            )
        if not seen["within"]:
            faults.append(f"focus outside of the window: {seen['where']}")
    missed = measured(screen, "missed()")
    return [*faults, *(f"out of order or not reached: {one}" for one in missed)]


def host_faults(screen: Screen, url: str) -> list[str]:
    """Return addresses asked for on other hosts than ``url``."""
    asked = [one for one in screen.requests() if not one.startswith(("data:", "blob:", "about:"))]
    assert asked, "nothing was asked for"
    return [one for one in asked if not one.startswith(f"{url}/")]


def looks_faults(screen: Screen) -> list[str]:
    """Return all faults that are seen without pressing anything."""
    return [
        *contrast_faults(screen),
        *structure_faults(screen),
        *name_faults(screen),
        *width_faults(screen),
        *size_faults(screen),
    ]
