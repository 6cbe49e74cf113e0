"""The clients we give away: their positions are those of the service, and they work.

The Structured Text is read as text, for there is nothing here to run it; read_pose.py takes the
same steps and is run. Left out: the answers themselves (test_text_answers).
"""

import re
import shutil
import socket
import subprocess
import sys
from pathlib import Path
from typing import Any

import httpx
import pytest

from service.cautions import CAUTIONS
from service.problems import ANSWERS, KINDS
from service.web.examples import folder
from service.wire.fixed_text import WIDTHS, places
from tests.conftest import ServerProcess
from tests.contract.test_controller import ADDRESS, BENT, largest_arm

TEXT = (folder() / "controller" / "armspan_pose.st").read_text(encoding="ascii")
CODE = re.sub(r"\(\*.*?\*\)", "", TEXT, flags=re.DOTALL)
PYTHON = folder() / "client" / "read_pose.py"
SHELL = folder() / "client" / "pose.sh"
CONSTANT = re.compile(r"\b([A-Z]\w*)\s*: INT :=\s*(\d+);")
ROW = {"joint": "revolute", "a": 400, "alpha": 0, "d": 0, "theta": 0, "travel": [-170, 170]}
LYING = {"position": [0, 0, 120], "orientation": {"form": "xyz-fixed", "values": [0, 0, 0]}}
ARM: dict[str, Any] = {
    "name": "asked-by-clients",
    "convention": "standard",
    "units": "mm-deg",
    "rows": [ROW, ROW],
    "tools": {"gripper": {**LYING, "number": 3}},
    "default_tool": "flange",
    "frames": {"tray": {**LYING, "position": [100, 0, 0], "in": "base", "number": 5}},
}


def read_pose() -> dict[str, Any]:
    """Return what the Python client defines."""
    found: dict[str, Any] = {"__name__": "read_pose"}
    exec(compile(PYTHON.read_text(encoding="utf-8"), str(PYTHON), "exec"), found)
    return found


CLIENT = read_pose()


@pytest.fixture(scope="module")
def url(server: ServerProcess) -> str:
    """The address of a server that holds the arm."""
    assert httpx.post(f"{server.url}/v1/arms", json=ARM).status_code == 201
    return server.url


@pytest.fixture
def deaf() -> str:
    """An address where nobody listens."""
    with socket.socket() as taken:
        taken.bind(("127.0.0.1", 0))
        return f"http://127.0.0.1:{taken.getsockname()[1]}"


# --- Structured Text -----------------------------------------------------------------------


def constants() -> dict[str, int]:
    return {name: int(value) for name, value in CONSTANT.findall(CODE)}


def test_positions_in_structured_text_are_those_of_the_service() -> None:
    found = constants()
    for key, (first, width) in places(WIDTHS).items():
        assert (found[f"P_{key.upper()}"], found[f"W_{key.upper()}"]) == (first, width)
    assert len([name for name in found if name.startswith(("P_", "W_"))]) == 2 * len(WIDTHS) == 42
    last = places(WIDTHS)["digest"]
    assert found["LINE_LENGTH"] == last.first + last.width - 1


def test_every_field_is_cut_by_its_own_constants() -> None:
    cuts = re.findall(r"MID\(sAnswer, W_(\w+), P_(\w+)\)", CODE)
    assert len(cuts) == 13
    assert all(width == first for width, first in cuts)
    needed = {"OK", "CODE", "FLAGS", "TAG", "X", "Y", "Z", "R1", "R2", "R3", "STATE", "MARGIN"}
    assert {first for _, first in cuts} == needed | {"DIGEST"}
    for target, field in re.findall(r"(\w+) := [\w(]*MID\(sAnswer, W_\w+, P_(\w+)\)", CODE):
        assert target.lower()[1:] == field.lower()


def test_the_text_is_balanced_and_plain() -> None:
    assert TEXT.isascii()
    assert TEXT.count("(*") == TEXT.count("*)")
    for word in ("IF", "FOR", "CASE", "VAR", "FUNCTION", "FUNCTION_BLOCK"):
        opened = len(re.findall(rf"(?<![\w_]){word}(?:_INPUT|_OUTPUT)?\b", CODE))
        assert opened == len(re.findall(rf"\bEND_{word}\b", CODE)) > 0, word
    assert max(map(len, TEXT.splitlines())) <= 110
    assigned = set(re.findall(r"^\s*(\w+) := ", CODE, re.MULTILINE)) - {"F_Trimmed"}
    declared = set(re.findall(r"^\s*(\w+)\s*: (?!=)", CODE, re.MULTILINE))
    assert assigned <= declared


def test_the_address_has_room_for_255_characters() -> None:
    assert re.search(r"sUrl\s*: STRING\[255\];", CODE)
    assert re.search(r"sAnswer\s*: STRING\[254\];", CODE)
    assert "> 255 THEN" in CODE
    for name in ("/v1/arms/", "/pose?format=txt&tag=", "&tool=", "&frame=", "&q="):
        assert f"'{name}'" in CODE


def test_every_caution_is_at_its_head() -> None:
    head = " ".join(TEXT.split("FUNCTION F_Trimmed")[0].split())
    assert [caution for caution in CAUTIONS if caution not in head] == []


def test_its_own_codes_are_none_of_the_service() -> None:
    found = constants()
    codes = {kind.number for kind in KINDS.values()} | set(ANSWERS)
    assert not codes & {found["NO_ANSWER"], found["TOO_LONG"]}


# --- Python --------------------------------------------------------------------------------


def test_the_python_client_takes_the_same_steps() -> None:
    assert CLIENT["PLACES"] == {key: tuple(place) for key, place in places(WIDTHS).items()}
    assert CLIENT["LINE_LENGTH"] == constants()["LINE_LENGTH"]
    assert CLIENT["MOST_ASKED"] == constants()["MOST_ASKED"]
    texts = re.findall(r"'(/[^']*|&[^']*)'", CODE)
    assert "".join(texts) == "/v1/arms//pose?format=txt&tag=&tool=&frame=&q="
    built = CLIENT["pose_url"]("http://a", "b", [1.5, -2], 7, 3, 5)
    assert built == "http://a/v1/arms/b/pose?format=txt&tag=7&tool=3&frame=5&q=1.5,-2"


def test_the_address_stays_within_255_characters() -> None:
    joints = [float(text) for text in BENT.split(",")]
    longest = CLIENT["pose_url"](ADDRESS, largest_arm()["name"], joints, 10**9 - 1, 999, 999)
    assert 190 < len(longest) <= 255
    with pytest.raises(ValueError, match="more than 255"):
        CLIENT["pose_url"](ADDRESS, "a" * 100, joints, 10**9 - 1, 999, 999)


def run(*command: str | Path) -> subprocess.CompletedProcess[str]:
    return subprocess.run([*map(str, command)], capture_output=True, text=True, timeout=30)


def test_the_python_client_reads_a_pose(url: str) -> None:
    done = run(sys.executable, PYTHON, url, ARM["name"], "0,90", "--tool", "3", "--frame", "5")
    assert (done.returncode, done.stderr) == (0, "")
    told = dict(line.partition(" ")[::2] for line in done.stdout.splitlines())
    assert list(told) == list(WIDTHS)
    assert [float(told[key]) for key in ("x", "y", "z", "r1", "r2", "r3")] == [
        300, 400, 120, 0, 0, 90,
    ]  # fmt: skip
    assert (told["ok"], told["form"], told["state"]) == ("1", "xyz-fixed", "regular")
    assert (told["tool_no"], told["frame_no"], told["units"]) == ("3", "5", "mm-deg")


def test_the_python_client_tells_refusal_from_no_answer(url: str, deaf: str) -> None:
    done = run(sys.executable, PYTHON, url, ARM["name"], "0,90,0")
    told = dict(line.partition(" ")[::2] for line in done.stdout.splitlines())
    assert (done.returncode, told["ok"], told["code"], told["x"]) == (1, "0", "101", "-999999.9999")
    done = run(sys.executable, PYTHON, deaf, ARM["name"], "0,90")
    assert (done.returncode, done.stdout) == (2, "")
    assert "no answer" in done.stderr


def test_the_python_client_asks_again_where_that_can_help() -> None:
    client = read_pose()
    late = "0;103;0    ;1         ;0         ;".ljust(client["LINE_LENGTH"], "0").replace(" ", "0")
    for first, count, outcome in [
        ((0, ""), 3, ConnectionError),
        ((503, "{}"), 3, ConnectionError),
        ((429, "{}"), 3, ConnectionError),
        ((500, "{}"), 1, ValueError),
        ((404, "{}"), 1, ValueError),
        ((200, late), 3, ConnectionError),
    ]:
        seen: list[str] = []

        def asked(
            address: str, seen: list[str] = seen, first: tuple[int, str] = first
        ) -> tuple[int, str]:
            seen.append(address)
            return first

        client["asked"] = asked
        with pytest.raises(outcome):
            client["read_pose"]("http://a", "b", [0.0])
        # Each with a tag of its own, so that a late answer is not taken for the current one.
        assert len(seen) == len(set(seen)) == count, first


# --- shell ---------------------------------------------------------------------------------

needs_curl = pytest.mark.skipif(
    not (shutil.which("curl") and shutil.which("sh")), reason="no curl or no sh is installed here"
)


def test_positions_in_the_shell_client_are_those_of_the_service() -> None:
    cuts = re.findall(r"\$\(field (\d+)(?:-(\d+))?\)", SHELL.read_text(encoding="ascii"))
    found = [(int(first), int(last or first)) for first, last in cuts]
    said = {key: (first, first + width - 1) for key, (first, width) in places(WIDTHS).items()}
    keys = ("tag", "ok", "code", "x", "y", "z", "r1", "r2", "r3", "state")
    assert found == [said[key] for key in keys]


@needs_curl
def test_the_shell_client_reads_a_pose(url: str) -> None:
    done = run("sh", SHELL, url, ARM["name"], "0,90", "3", "5")
    assert (done.returncode, done.stderr) == (0, "")
    *numbers, state = done.stdout.split()
    assert [float(number) for number in numbers] == [300, 400, 120, 0, 0, 90]
    assert state == "regular"
    done = run("sh", SHELL, url, ARM["name"], "0,90")
    assert done.stdout.split()[:3] == ["+000400.0000", "+000400.0000", "+000000.0000"]


@needs_curl
def test_the_shell_client_tells_refusal_from_no_answer(url: str, deaf: str) -> None:
    done = run("sh", SHELL, url, ARM["name"], "0,90,0")
    assert (done.returncode, done.stdout, done.stderr) == (1, "", "refused with code 101\n")
    done = run("sh", SHELL, deaf, ARM["name"], "0,90")
    assert (done.returncode, done.stdout) == (2, "")
    assert "no answer" in done.stderr
    done = run("sh", SHELL, url, "a" * 250, "0,90")
    assert (done.returncode, done.stdout) == (2, "")
    assert "more than 255" in done.stderr
