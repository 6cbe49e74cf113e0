"""The way out of an unknown name: the nearest, or all there are if they are few."""

import pytest

from kinematics.known_names import folded, nearest, way_out_of_unknown


@pytest.mark.parametrize(
    ("name", "known", "expected"),
    [
        ("fixtrue", ["fixture", "tray"], "fixture"),
        ("loader.flnge", ["loader.base", "loader.flange"], "loader.flange"),
        ("zzz", ["fixture", "tray"], None),
        ("x" * 100_000, ["fixture"], None),
        ("tray", [], None),
    ],
)
def test_the_nearest(name: str, known: list[str], expected: str | None) -> None:
    assert nearest(name, known) == expected


def test_where_none_is_near_all_are_told_and_of_many_some() -> None:
    assert way_out_of_unknown("zzz", ["b", "a"]) == "known here: a, b"
    assert way_out_of_unknown("zzz", []) == "leave it out"
    told = way_out_of_unknown("0", [chr(97 + n // 26) + chr(97 + n % 26) for n in range(600)])
    assert told.endswith(", ...")
    assert len(told.split(", ")) == 41


def test_runs_of_numbered_names_are_folded() -> None:
    assert folded(["q1", "q2", "q3", "q5", "tool"]) == ["q1 ... q3", "q5", "tool"]
