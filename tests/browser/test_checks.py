"""The checks see what they are there to see: each is shown a page with one fault, and one without.

Left out: whether the faults matter; WCAG 2.2 says so.
"""

from collections.abc import Callable
from pathlib import Path

import pytest

from tests.browser import checks
from tests.browser.chromium import Look, Screen

SOUND = """<!doctype html>
<html lang="en"><head><meta charset="utf-8"><title>Sheet</title>
<meta name="viewport" content="width=device-width">
<style>
body {{ background: #fbfaf7; color: #14181c; }}
:focus-visible {{ outline: 3px solid #14181c; }}
button, input {{ min-height: 24px; min-width: 24px; border: 1px solid #14181c; background: #fff; }}
</style></head>
<body><main><h1>Sheet</h1><h2>Joints</h2>
<label for="value">Joint 1</label> <input id="value" value="12.5">
<button>minus</button> <button>plus</button>
<p>Words <span>42.0</span></p>
<svg role="img" aria-label="An arm" width="40" height="40"><text y="20">A</text></svg>
{fault}
</main></body></html>"""

FAULTS: list[tuple[Callable[[Screen], list[str]], str, str]] = [
    (checks.contrast_faults, '<p style="color:#8a8a8a">faint</p>', "3.31 < 4.5"),
    (checks.contrast_faults, '<p style="color:#14181c80">half</p>', "< 4.5"),
    (checks.contrast_faults, '<p style="opacity:0.4">veiled</p>', "< 4.5"),
    (checks.contrast_faults, '<p style="color:#666">−17.25</p>', "< 7"),
    (checks.contrast_faults, '<p style="background:#445;color:#14181c">dark</p>', "< 4.5"),
    (
        checks.contrast_faults,
        '<svg role="img" aria-label="x" width="90" height="30">'
        '<text y="20" fill="#aaa">drawn</text></svg>',
        "< 4.5",
    ),
    (
        checks.contrast_faults,
        '<style>::placeholder{color:#aaa}</style><label>b <input placeholder="b"></label>',
        "< 4.5",
    ),
    (
        checks.contrast_faults,
        '<label>b <input style="border:1px solid #ddd;background:#fbfaf7" value="b"></label>',
        "a field is not seen",
    ),
    (checks.contrast_faults, '<p style="filter:invert(1)">turned</p>', "cannot be weighed"),
    (checks.structure_faults, "<h1>Another</h1>", "2 headings of the first level"),
    (checks.structure_faults, "<h4>Too deep</h4>", "h4 below h2"),
    (checks.structure_faults, '<p id="value">again</p>', "two of id value"),
    (checks.structure_faults, '<p aria-labelledby="gone">x</p>', "points nowhere: gone"),
    (checks.structure_faults, "<table><tr><td>1</td></tr></table>", "no heads"),
    (checks.structure_faults, "<canvas></canvas>", "a drawing without a name"),
    (checks.structure_faults, '<img src="data:," width="9" height="9">', "no alt"),
    (checks.structure_faults, '<p tabindex="3">first</p>', "order of focus set by hand"),
    (checks.structure_faults, "<main>second</main>", "not one main part"),
    (checks.name_faults, "<button></button>", "a button without a name"),
    (checks.name_faults, "<input>", "a textbox without a name"),
    (checks.name_faults, "<button>plus</button>", '2 buttons are called "plus"'),
    (checks.width_faults, '<p style="width:2000px">long</p>', "wide on 390"),
    (
        checks.width_faults,
        '<p style="width:60px;overflow:hidden;white-space:nowrap">words that go on</p>',
        "cut off",
    ),
    (
        checks.size_faults,
        '<button style="min-height:0;height:12px;min-width:0">x</button>',
        "too small to press",
    ),
    (checks.focus_faults, '<button style="outline:none">blind</button>', "focus not seen"),
    (
        checks.focus_faults,
        '<button style="outline:3px solid #eee">faint</button>',
        "focus not seen",
    ),
    (
        checks.focus_faults,
        "<button onfocus=\"document.querySelector('#value').focus()\">trap</button>",
        "out of order",
    ),
]


@pytest.fixture(scope="module")
def made(tmp_path_factory: pytest.TempPathFactory) -> Callable[[str], str]:
    """Write a page with something put into it and return its address."""
    file: Path = tmp_path_factory.mktemp("pages") / "page.html"

    def make(fault: str) -> str:
        file.write_text(SOUND.format(fault=fault), encoding="utf-8")
        return file.as_uri()

    return make


@pytest.mark.parametrize(("check", "fault", "said"), FAULTS)
def test_a_fault_is_seen(
    screen: Screen,
    made: Callable[[str], str],
    check: Callable[[Screen], list[str]],
    fault: str,
    said: str,
) -> None:
    screen.open(made(fault), Look(390, 800))
    found = check(screen)
    assert [one for one in found if said in one], found


def test_a_sound_page_has_no_faults(screen: Screen, made: Callable[[str], str]) -> None:
    screen.open(made(""), Look(390, 800))
    assert checks.looks_faults(screen) == []
    assert checks.focus_faults(screen) == []
    assert screen.console() == []
    assert checks.host_faults(screen, "file://") == []


def test_contrast_is_that_of_the_recommendation(screen: Screen, made: Callable[[str], str]) -> None:
    """Black on white is 21; #767676 on white is the well-known 4.54, #777 the failing 4.48."""
    screen.open(made(""))
    white = [255, 255, 255]
    for grey, ratio in ((0, 21.0), (0x76, 4.54), (0x77, 4.48), (255, 1.0)):
        told = checks.measured(screen, f"contrast({[grey] * 3}, {white})")
        assert abs(told - ratio) < 0.005


def test_the_look_is_what_was_asked_for(screen: Screen, made: Callable[[str], str]) -> None:
    screen.open(made(""), Look(390, 844, "dark", still=True))
    asked = "[innerWidth, innerHeight, matchMedia('(prefers-color-scheme: dark)').matches, "
    asked += "matchMedia('(prefers-reduced-motion: reduce)').matches]"
    assert screen.run(f"return {asked}") == [390, 844, True, True]


def test_another_host_is_seen(screen: Screen, made: Callable[[str], str]) -> None:
    screen.open(made('<img alt="" src="http://elsewhere.example/x.png">'))
    assert checks.host_faults(screen, "file://") == ["http://elsewhere.example/x.png"]
    assert [line for line in screen.console() if "ERR_NAME_NOT_RESOLVED" in line]


def test_what_the_console_says_is_heard(screen: Screen, made: Callable[[str], str]) -> None:
    screen.open(made("<script>console.warn('quiet'); Promise.reject(new Error('lost'))</script>"))
    said = "\n".join(screen.console())
    assert "quiet" in said
    assert "lost" in said
