"""``armspan arms add`` and ``list``: what they store, print and return."""

import io
import json
from contextlib import closing
from pathlib import Path
from typing import Any

import pytest

from service.errors import StorageUnusable
from service.settings import Settings
from service.storage.opening import open_storage
from service.stored_commands import add_stored, list_stored
from service.wire.arms import read_arm
from service.wire.cells import read_cell

ROW = {"joint": "revolute", "a": 100, "alpha": 90, "d": 0.1, "theta": 0}


def document(name: str = "press-arm", **changes: Any) -> dict[str, Any]:
    return {"name": name, "convention": "standard", "units": "mm-deg", "rows": [ROW], **changes}


@pytest.fixture
def settings(tmp_path: Path) -> Settings:
    return Settings(database=str(tmp_path / "data" / "arms.db"))


def file_of(folder: Path, content: object, name: str = "arm.json") -> Path:
    path = folder / name
    path.write_text(content if isinstance(content, str) else json.dumps(content), "utf-8")
    return path


def add(settings: Settings, *files: str | Path) -> tuple[int, list[str]]:
    out = io.StringIO()
    return add_stored(settings, "arm", list(files), out), out.getvalue().splitlines()


def listed(settings: Settings) -> list[str]:
    out = io.StringIO()
    assert list_stored(settings, "arm", out) == 0
    return out.getvalue().splitlines()


def test_each_file_is_stored_and_named(settings: Settings, tmp_path: Path) -> None:
    left = file_of(tmp_path, document("left"), "left.json")
    right = file_of(tmp_path, document("right"), "right.json")
    digest = read_arm(document()).digests.digest
    assert add(settings, left, str(right)) == (
        0,
        [f"{left}: left stored, 1-{digest}", f"{right}: right stored, 1-{digest}"],
    )
    with closing(open_storage(settings)) as opened:
        head = opened.arms.head("left")
    assert head is not None
    assert head.document == document("left")
    assert head.reason == "armspan arms add"


def test_the_same_arm_again_is_no_error_and_no_revision(settings: Settings, tmp_path: Path) -> None:
    file = file_of(tmp_path, document())
    add(settings, file)
    code, (line,) = add(settings, file)
    assert code == 0
    assert "stored already, 1-" in line


def test_another_arm_of_a_taken_name_is_refused_and_the_others_stored(
    settings: Settings, tmp_path: Path
) -> None:
    add(settings, file_of(tmp_path, document()))
    other = file_of(tmp_path, document(rows=[ROW, ROW]), "other.json")
    new = file_of(tmp_path, document("new"), "new.json")
    code, lines = add(settings, other, new)
    assert code == 1
    assert "there is an arm 'press-arm' already" in lines[0]
    assert lines[1].startswith(f"{new}: new stored")
    with closing(open_storage(settings)) as opened:
        assert opened.arms.head_number("press-arm") == 1


@pytest.mark.parametrize(
    ("content", "words"),
    [
        ("", "empty"),
        ("{", "not JSON at line 1"),
        ('{"name": "a", "name": "b"}', 'the key "name" stands twice'),
        (document(rows=[ROW, {**ROW, "alpha": "x"}]), "(at /rows/1/alpha)"),
        (document(convention=None), "(at /convention)"),
        ([document()], ": "),
        (document(base={"matrix": [[0, 0, 0, 0]] * 4}), "(at /base"),
    ],
)
def test_a_file_that_is_no_arm_is_refused_by_place_and_nothing_is_stored(
    settings: Settings, tmp_path: Path, content: object, words: str
) -> None:
    good = file_of(tmp_path, document(), "good.json")
    bad = file_of(tmp_path, content, "bad.json")
    code, lines = add(settings, good, bad)
    assert code == 1
    assert lines[0].startswith(f"{bad}: ")
    assert words in lines[0]
    assert lines[-1] == "nothing was stored"
    assert not Path(settings.database).exists()


def test_a_missing_file_is_refused(settings: Settings, tmp_path: Path) -> None:
    code, lines = add(settings, tmp_path / "none.json")
    assert code == 1
    assert "No such file" in lines[0]


def test_arms_are_added_beside_a_running_server(settings: Settings, tmp_path: Path) -> None:
    with closing(open_storage(settings)) as server:
        assert add(settings, file_of(tmp_path, document()))[0] == 0
        assert server.arms.count() == 1
        assert len(listed(settings)) == 2


def test_where_nothing_can_be_stored_the_command_says_so(tmp_path: Path) -> None:
    settings = Settings(database="/proc/armspan/arms.db")
    code, (line,) = add(settings, file_of(tmp_path, document()))
    assert code == 1
    assert "nothing can be stored" in line


def test_a_database_that_cannot_be_used_is_told_to_the_caller(tmp_path: Path) -> None:
    settings = Settings(database=str(file_of(tmp_path, "no database" * 20, "arms.db")))
    with pytest.raises(StorageUnusable):
        add(settings, file_of(tmp_path, document()))
    with pytest.raises(StorageUnusable):
        listed(settings)


def test_the_list_has_a_line_for_each_arm(settings: Settings, tmp_path: Path) -> None:
    assert listed(settings) == [f"no arms in {settings.database}"]
    add(
        settings,
        file_of(tmp_path, document("b-arm", title="Bender", status="draft"), "b.json"),
        file_of(tmp_path, document("a-arm", rows=[]), "a.json"),
    )
    digests = [read_arm(document(rows=rows)).digests.digest for rows in ([], [ROW])]
    assert listed(settings) == [
        "name   version     joints  convention  units   status  title",
        f"a-arm  1-{digests[0]}  0       standard    mm-deg  -",
        f"b-arm  1-{digests[1]}  1       standard    mm-deg  draft   Bender",
    ]


# --- cells, and arms in them ---------------------------------------------------------------

PLACED = {"position": [1, 2, 3], "orientation": {"form": "xyz-fixed", "values": [0, 0, 0]}}
CELL = {
    "name": "press-cell",
    "title": "One press",
    "units": "mm-deg",
    "arms": {"press-arm": PLACED},
    "frames": {"pin": PLACED, "jig": {"in": "pin", **PLACED}},
}


def add_cells(settings: Settings, *files: Path) -> tuple[int, list[str]]:
    out = io.StringIO()
    return add_stored(settings, "cell", list(files), out), out.getvalue().splitlines()


def test_cells_are_added_and_listed(settings: Settings, tmp_path: Path) -> None:
    file = file_of(tmp_path, CELL, "cell.json")
    digest = read_cell(CELL).digests.digest
    assert add_cells(settings, file) == (0, [f"{file}: press-cell stored, 1-{digest}"])
    code, (line,) = add_cells(settings, file)
    assert (code, line) == (0, f"{file}: press-cell is stored already, 1-{digest}")
    out = io.StringIO()
    assert list_stored(settings, "cell", out) == 0
    assert out.getvalue().splitlines() == [
        "name        version     arms  frames  units   title",
        f"press-cell  1-{digest}  1     2       mm-deg  One press",
    ]
    assert listed(settings) == [f"no arms in {settings.database}"]


def test_a_cell_with_a_circle_is_refused_and_no_database_made(
    settings: Settings, tmp_path: Path
) -> None:
    bad = {**CELL, "frames": {"pin": {**PLACED, "in": "pin"}}}
    code, lines = add_cells(settings, file_of(tmp_path, bad, "bad.json"))
    assert code == 1
    assert "pin stands in itself (at /frames/pin/in)" in lines[0]
    assert lines[1] == "nothing was stored"
    assert not Path(settings.database).exists()


def test_an_arm_is_added_in_its_cell_and_refused_without(
    settings: Settings, tmp_path: Path
) -> None:
    alone = file_of(tmp_path, document("alone"), "alone.json")
    file = file_of(tmp_path, document(cell="press-cell"), "arm.json")
    code, lines = add(settings, alone, file)
    assert code == 1
    assert lines == [
        f"{file}: there is no cell 'press-cell' (at /cell): leave it out",
        "nothing was stored",
    ]
    assert listed(settings) == [f"no arms in {settings.database}"]
    add_cells(settings, file_of(tmp_path, CELL, "cell.json"))
    code, lines = add(settings, alone, file)
    assert (code, len(lines)) == (0, 2)
    assert add(settings, file)[1][0].startswith(f"{file}: press-arm is stored already, 1-")
    with closing(open_storage(settings)) as opened:
        head = opened.arms.head("press-arm")
    assert head is not None
    assert head.cell == ("press-cell", 1)
