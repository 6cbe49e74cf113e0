"""Lines about travels: one for each leg, empty cells for what is not known, why a way breaks."""

import csv
import io
from typing import Any

from service.wire.reach_lines import SameInAll
from service.wire.travel_lines import travel_head, travel_lines

SAME = SameInAll(7, 8, 9, "mm-deg", 3, "0123abcd")
LEG: dict[str, Any] = {
    "part": "leg",
    "end": {"joints": [10.5, -20.0], "branch": 'elbow "up", ahead'},
    "length": 300.0,
    "gone": 300.0,
    "margin": {"value": None, "at": 0.0},
    "smallest_singular_value": {"value": 0.125, "at": 1.0},
    "share_of_top_speed": {"value": 0.5, "at": 1.0, "joint": 1},
    "top_speed": None,
    "duration_s": 1.5,
    "shortest_s": None,
    "findings": [],
}
NEAR = {"code": 1}
BREAKS = {"leg": 2, "say": "leg 2 breaks, at once"}


def lines(*ways: dict[str, Any], **item: Any) -> list[dict[str, str]]:
    told = {"name": "a", "code": 0, "verdict": "reachable", "breaks": None, "ways": ways, **item}
    text = (travel_head(2) + travel_lines([told], 2, SAME)).decode()
    assert text.endswith("\r\n")
    return list(csv.DictReader(io.StringIO(text)))


def test_a_line_for_each_leg() -> None:
    way = {"code": 1, "breaks": None, "legs": [LEG, {**LEG, "findings": [NEAR]}]}
    first, second = lines(way)
    assert first == {
        "ok": "1", "code": "0", "flags": "0", "seq": "7", "tag": "8", "t_ms": "9",
        "verdict": "reachable", "way": "1", "leg": "1", "part": "leg", "q1": "10.5", "q2": "-20.0",
        "length": "300.0", "gone": "300.0", "margin": "", "singular_value": "0.125",
        "share_of_top_speed": "0.5", "top_speed": "", "duration_s": "1.5", "shortest_s": "",
        "units": "mm-deg", "revision": "3", "digest": "0123abcd", "branch": 'elbow "up", ahead',
        "reason": "", "name": "a",
    }  # fmt: skip
    assert (second["leg"], second["code"], second["flags"]) == ("2", "1", "1")


def test_the_leg_that_breaks_says_why() -> None:
    whole = {"code": 0, "breaks": None, "legs": [LEG]}
    broken = {"code": 201, "breaks": BREAKS, "legs": [LEG, LEG]}
    told = lines(whole, broken)
    assert [(row["way"], row["leg"], row["ok"], row["code"]) for row in told] == [
        ("1", "1", "1", "0"),
        ("2", "1", "1", "0"),
        ("2", "2", "0", "201"),
    ]
    assert [row["reason"] for row in told] == ["", "", "leg 2 breaks, at once"]


def test_a_leg_that_does_not_begin_has_a_line_without_numbers() -> None:
    _, second = lines({"code": 200, "breaks": BREAKS, "legs": [LEG]})
    assert (second["leg"], second["ok"], second["code"], second["part"]) == ("2", "0", "200", "")
    assert {second[key] for key in ("q1", "q2", "length", "margin", "shortest_s")} == {""}


def test_a_travel_without_ways_has_one_line() -> None:
    (far,) = lines(code=200, verdict="unreachable", breaks={"say": "too far"})
    assert (far["ok"], far["code"], far["verdict"], far["way"]) == ("0", "200", "unreachable", "0")
    assert (far["reason"], far["name"], far["q2"]) == ("too far", "a", "")
    (bad,) = lines(name=None, code=105, verdict=None, problem={"say": "no, such"})
    assert (bad["code"], bad["verdict"], bad["reason"], bad["name"]) == ("105", "", "no, such", "")
