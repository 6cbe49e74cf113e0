"""What README.md says is so: its length, its commands, its answers, its settings, its cautions.

Left out: installing, which .ci/run does with the commands as they stand there.
"""

import doctest
import json
import math
import os
import re
import shutil
import subprocess
import sys
from collections.abc import Callable, Iterator
from dataclasses import dataclass, fields
from pathlib import Path
from typing import Any

import pytest

from service.cautions import CAUTIONS
from service.settings import ENVIRONMENT_PREFIX, Settings

ROOT = Path(__file__).resolve().parents[1]
README = (ROOT / "README.md").read_text(encoding="utf-8")
DOCKERFILE = (ROOT / "Dockerfile").read_text(encoding="utf-8")
INSTALL = "python3 -m venv .venv && .venv/bin/pip install -q ."
SERVE = f"    {INSTALL} && .venv/bin/armspan serve --demo"
TEST = (
    "    python3 -m venv .venv && .venv/bin/pip install -q -e '.[test]' "
    "&& .venv/bin/python -m pytest -n auto"
)
OUR_ADDRESS = "http://127.0.0.1:8017"
CUT = "..."
CLOSE = 1e-9
"""Relative and absolute, as for the examples of the documentation."""

NUMBER = re.compile(r"(?<![\w.-])-?\d+(?:\.\d+)?(?:e[-+]?\d+)?(?![\w.])")
OF_THE_MOMENT = re.compile(r'"(?:seq|t_ms)":\d+|"created_at":"[^"]+"|\d{4}-\d\d-\d\dT[\d:.]+Z')
CALL_COUNT = 7


@dataclass(frozen=True)
class Call:
    """A call that README shows, and the answer it shows below."""

    command: str
    answer: str


def blocks(language: str) -> list[str]:
    return re.findall(rf"^```{language}\n(.*?)^```$", README, re.MULTILINE | re.DOTALL)


def calls() -> list[Call]:
    found = re.findall(
        r"^```sh\n(.*?)^```\n```(?:json|text)\n(.*?)^```$", README, re.MULTILINE | re.DOTALL
    )
    return [Call(command, answer.rstrip("\n")) for command, answer in found]


def assert_shown(shown: str, got: str) -> None:
    """Require the pieces that stand between cuts in ``got``, in order; numbers may round."""
    shown, got = (OF_THE_MOMENT.sub("now", text.strip()) for text in (shown, got))
    place = 0
    pieces = shown.split(CUT)
    for index, piece in enumerate(pieces):
        spans = [found.span() for found in found_in(got, piece, place)]
        if index == 0:
            spans = [span for span in spans if span[0] == 0]
        if index == len(pieces) - 1 and piece:
            spans = [span for span in spans if span[1] == len(got)]
        assert spans, f"README shows\n{piece}\nbut the answer is\n{got}"
        place = spans[0][1]


def found_in(text: str, piece: str, start: int) -> Iterator[re.Match[str]]:
    """Yield where ``piece`` stands in ``text`` from ``start`` on, with numbers that are close."""
    said = [float(number) for number in NUMBER.findall(piece)]
    pattern = f"({NUMBER.pattern})".join(map(re.escape, NUMBER.split(piece)))
    for found in re.compile(pattern).finditer(text, start):
        pairs = zip(said, map(float, found.groups()), strict=True)
        if all(math.isclose(*pair, rel_tol=CLOSE, abs_tol=CLOSE) for pair in pairs):
            yield found


def run(command: str, folder: Path, url: str) -> str:
    """Run a command of README in a shell, against a server, and return what it says."""
    here = f"'{sys.executable}' -m service"
    command = command.replace(OUR_ADDRESS, url).replace(".venv/bin/armspan", here)
    plain = {k: v for k, v in os.environ.items() if not k.startswith(ENVIRONMENT_PREFIX)}
    database = {f"{ENVIRONMENT_PREFIX}DATABASE": str(folder / "arms.db"), "PYTHONPATH": str(ROOT)}
    done = subprocess.run(
        ["bash", "-c", command],
        cwd=folder,
        env=plain | database,
        capture_output=True,
        text=True,
        timeout=60,
    )
    assert done.returncode == 0, done.stderr
    return done.stdout


@pytest.fixture(scope="module")
def demonstration(launch: Callable[..., Any]) -> str:
    """The address of a server with the demonstration cell."""
    url: str = launch("--demo").url
    return url


@pytest.fixture(scope="module")
def folder(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A folder that holds the reader's own arm."""
    made = tmp_path_factory.mktemp("reader")
    (own,) = [text for text in blocks("json") if text.startswith('{"name": "my-arm"')]
    (made / "my-arm.json").write_text(own, encoding="utf-8")
    return made


def test_it_is_short() -> None:
    assert len(README.splitlines()) <= 150


def test_two_commands_do_all_the_set_up() -> None:
    lines = README.splitlines()
    assert lines.count(SERVE) == 1
    assert lines.count(TEST) == 1
    assert lines.index(SERVE) < lines.index(TEST) < 25
    assert sum(re.match(" {4}[^ ]", line) is not None for line in lines) == 2


def test_the_calls_are_all_found() -> None:
    assert len(calls()) == CALL_COUNT
    assert README.count("```sh\n") == CALL_COUNT


@pytest.mark.skipif(
    not (shutil.which("bash") and shutil.which("curl")), reason="bash or curl is not installed"
)
@pytest.mark.parametrize("index", range(CALL_COUNT))
def test_a_call_answers_what_is_shown(index: int, demonstration: str, folder: Path) -> None:
    call = calls()[index]
    assert OUR_ADDRESS in call.command or ".venv/bin/armspan" in call.command
    assert_shown(call.answer, run(call.command, folder, demonstration))


def test_the_python_example_runs() -> None:
    (text,) = blocks("python")
    test = doctest.DocTestParser().get_doctest(text, {}, "README", "README.md", 0)
    assert len(test.examples) == 7
    results = doctest.DocTestRunner().run(test)
    assert results.failed == 0


def test_every_setting_is_there_with_its_default() -> None:
    for field in fields(Settings):
        (row,) = [
            line
            for line in README.splitlines()
            if line.startswith("|") and f"`{ENVIRONMENT_PREFIX}{field.name.upper()}`" in line
        ]
        default = {
            "database": "the user data folder",
            "demo": "no",
            "body_timeout_s": "20",
            "cluster": "none",
            "frame_ancestors": "none",
        }
        assert default.get(field.name, str(field.default)) in row


def test_every_caution_is_there() -> None:
    assert len(CAUTIONS) >= 7
    lines = README.splitlines()
    for caution in CAUTIONS:
        assert lines.count(f"- {caution}") == 1


def test_what_is_missing_is_said() -> None:
    (missing,) = re.findall(r"## What it cannot do\n(.*?)\n## ", README, re.DOTALL)
    for word in ("searched", "keys", "uncertainty"):
        assert word in missing


def test_the_dockerfile_takes_the_same_steps() -> None:
    lines = DOCKERFILE.splitlines()
    assert lines.count(f"RUN {INSTALL}") == 1
    (base,) = [line for line in lines if line.startswith("FROM ")]
    version = re.fullmatch(r"FROM python:3\.(\d+)-slim", base)
    assert version
    assert int(version[1]) >= 11


def test_what_the_dockerfile_copies_is_there_and_enough() -> None:
    copied = [
        source
        for line in DOCKERFILE.splitlines()
        if line.startswith("COPY ")
        for source in line.split()[1:-1]
    ]
    assert copied
    assert all((ROOT / source).exists() for source in copied)
    needed = {"kinematics", "service", "openapi_examples", "pyproject.toml", "README.md", "LICENSE"}
    assert set(copied) == needed


def test_the_container_is_reachable_unprivileged_and_keeps_its_arms() -> None:
    environment = dict(re.findall(r"(ARMSPAN_[A-Z_]+)=(\S+)", DOCKERFILE))
    chosen = Settings.from_environment(environment=environment)
    assert chosen.host == "0.0.0.0"
    (port,) = re.findall(r"^EXPOSE (\d+)$", DOCKERFILE, re.MULTILINE)
    assert chosen.port == int(port)
    (volume,) = re.findall(r"^VOLUME (\S+)$", DOCKERFILE, re.MULTILINE)
    assert chosen.database.startswith(f"{volume}/")
    lines = DOCKERFILE.splitlines()
    (user,) = [line for line in lines if line.startswith("USER ")]
    assert user != "USER root"
    assert lines.index(user) < lines.index('ENTRYPOINT [".venv/bin/armspan"]')
    assert 'CMD ["serve"]' in lines


def test_the_health_check_asks_the_port_that_is_set(demonstration: str) -> None:
    (said,) = re.findall(r"^HEALTHCHECK .*\\\n +CMD (\[.*\])$", DOCKERFILE, re.MULTILINE)
    python, *arguments = json.loads(said)
    assert python == ".venv/bin/python"
    port = demonstration.rsplit(":", 1)[1]
    for asked, answers in ((port, True), ("1", False)):
        environment = {**os.environ, "ARMSPAN_PORT": asked}
        done = subprocess.run(
            [sys.executable, *arguments], env=environment, capture_output=True, timeout=20
        )
        assert (done.returncode == 0) is answers, done.stderr


@pytest.mark.parametrize(
    ("shown", "got"),
    [
        ('{"x":1.5, ... "z":2}', '{"x":1.5, "y":3, "z":2.1}'),
        ('{"x":1.5, ...}', '{"x":1.6, "z":2}'),
        ('{"x":1.5, ...}', '{"u":1.5, "z":2}'),
        ('{"x":1.5}', '{"x":1.5, "z":2}'),
        ('"digest":"3d88128f"', '"digest":"3d88128e"'),
    ],
)
def test_a_stale_answer_is_seen(shown: str, got: str) -> None:
    with pytest.raises(AssertionError):
        assert_shown(shown, got)


def test_a_cut_and_rounded_answer_is_accepted() -> None:
    got = '{"seq":4,"x":1.50000000001,"y":3,"z":-2.8e-14,"digest":"3d88128f"}'
    assert_shown('{"seq":1,"x":1.5,...,"z":0.0,"digest":"3d88128f"}', got)
