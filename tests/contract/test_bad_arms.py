"""Every way an arm cannot be used: code, place, value as given and way out, wherever it is sent.

Left out: what is asked about an arm (test_bad_questions, test_bad_queries).
"""

import math
from typing import Any

import httpx
import pytest

from kinematics.tolerances import MOST_PLACED
from tests.contract.refusals import (
    AT_ORIGIN,
    ROW,
    STRAIGHT,
    Body,
    arm,
    matrix,
    only_entry,
    refusal,
    row,
    sent,
    turned,
)

pytestmark = pytest.mark.anyio

NAN, INFINITY = math.nan, math.inf


def coupled(axis: int, **changes: Any) -> Body:
    return row(couplings=[{"axis": axis, "ratio": 1}], **changes)


EACH_DRIVES_THE_OTHER = arm(
    rows=[
        {**ROW, "couplings": [{"axis": 2, "ratio": 1}]},
        {**ROW, "couplings": [{"axis": 1, "ratio": 1}]},
    ]
)
PASSIVE_FIRST = arm(
    rows=[
        {**ROW, "passive": True, "couplings": [{"axis": 2, "ratio": 1}]},
        {**ROW, "couplings": [{"axis": 1, "ratio": 1}]},
    ]
)
IN_A_CIRCLE = {"jig": {**AT_ORIGIN, "in": "tray"}, "tray": {**AT_ORIGIN, "in": "jig"}}
SAME_NUMBER = {"jig": {**AT_ORIGIN, "number": 5}, "tray": {**AT_ORIGIN, "number": 5}}

# name: (arm, code, pointer, value as given, words of what is said, words of the way out)
# fmt: off
ARMS: dict[str, tuple[Body, str, str, Any, str, str]] = {
    "unknown convention": (arm(convention="classic"), "unusable-value", "/convention", "classic",
        "standard", "'standard' or 'modified'"),
    "missing unit": (arm(units=None), "missing-field", "/units", None, "units", 'add "units"'),
    "unknown units": (arm(units="cm"), "unusable-value", "/units", "cm", "mm-deg", "'in-deg'"),
    "text for a number": (row(a="400"), "unusable-value", "/rows/1/a", "400", "number",
        "without quotes"),
    "a truth for a number": (row(d=True), "unusable-value", "/rows/1/d", True, "number", "number"),
    "null for a number": (row(d=None), "unusable-value", "/rows/1/d", None, "number", "number"),
    "nan": (row(alpha=NAN), "not-finite", "/rows/1/alpha", "NaN", "finite", "finite number"),
    "infinity": (row(d=INFINITY), "not-finite", "/rows/1/d", "Infinity", "finite", "finite"),
    "minus infinity": (row(d=-INFINITY), "not-finite", "/rows/1/d", "-Infinity", "finite", "fini"),
    "1e308": (row(a=1e308), "out-of-range", "/rows/1/a", 1e308, "beyond 1e9", "units"),
    "an angle of 1e308": (row(theta=1e308), "out-of-range", "/rows/1/theta", 1e308, "1e9", "units"),
    "a speed of 1e308": (row(top_speed=1e308), "out-of-range", "/rows/1/top_speed", 1e308, "",
        "un"),
    "travel reversed": (row(travel=[170, -170]), "unusable-value", "/rows/1/travel", [170, -170],
        "row 2 is reversed", "lower limit first"),
    "travel of next to nothing": (row(travel=[0, 1e-300]), "unusable-value", "/rows/1/travel",
        [0, 1e-300], "reversed or empty", "lower limit first"),
    "working travel reversed": (row(working_travel=[17, -17]), "unusable-value",
        "/rows/1/working_travel", [17, -17], "reversed", "lower limit first"),
    "working travel beyond travel": (row(working_travel=[-171, 0]), "unusable-value",
        "/rows/1/working_travel", [-171, 0], "beyond its travel", "inside travel"),
    "travel of three": (row(travel=[1, 2, 3]), "unusable-value", "/rows/1/travel", [1, 2, 3], "",
        "2"),
    "a speed below zero": (row(top_speed=-90), "unusable-value", "/rows/1/top_speed", -90,
        "below 1e-09", "above 0"),
    "a speed of next to nothing": (row(top_speed=1e-300), "unusable-value", "/rows/1/top_speed",
        1e-300, "1e-09", "leave it out"),
    "direction of two": (row(direction=2), "unusable-value", "/rows/1/direction", 2, "1",
        "1 or -1"),
    "unknown joint": (row(joint="rotary"), "unusable-value", "/rows/1/joint", "rotary", "revolute",
        "'revolute' or 'prismatic'"),
    "coupled to itself": (coupled(2), "unusable-value", "/rows/1/couplings/0/axis", 2,
        "coupled to itself", "driven row: 1"),
    "coupled to a missing row": (coupled(3), "unusable-value", "/rows/1/couplings/0/axis", 3,
        "row 3, which is missing", "driven row: 1"),
    "coupled to a passive row": (PASSIVE_FIRST, "unusable-value", "/rows/1/couplings/0/axis", 1,
        "row 1, which is passive", "driven row"),
    "a singular drive map": (EACH_DRIVES_THE_OTHER, "unusable-value", "/rows", [[1, 1], [1, 1]],
        "dependent", "coupling ratios"),
    "33 rows": (arm(rows=[ROW] * 33), "too-large", "/rows", 33, "33 rows", "at most 32"),
    "a name with spaces": (arm(name="my arm"), "unusable-value", "/name", "my arm", "match", "a-z"),
    "a name of 300": (arm(name="a" * 300), "unusable-value", "/name", "a" * 197 + "...", "match",
        "0,47"),
    "a tool name with spaces": (arm(tools={"a b": AT_ORIGIN}, default_tool=None), "unusable-value",
        "/tools/a b", "a b", "match", "a-z"),
    "a cell": (arm(cell="north"), "unknown-arm", "/cell", "north", "no cell", "leave it out"),
    "a default tool that is missing": (arm(default_tool="saw"), "unknown-tool", "/default_tool",
        "saw", "no tool 'saw'", "gripper (3), pen, flange"),
    "a reserved name": (arm(frames={"link-7": AT_ORIGIN}), "unusable-value", "/frames/link-7",
        "link-7", "reserved", "link-0 ... link-32"),
    "tool and frame of one name": (arm(frames={"pen": AT_ORIGIN}), "unusable-value", "/frames/pen",
        "pen", "tool and of a frame", "rename one"),
    "frames in a circle": (arm(frames=IN_A_CIRCLE), "unusable-value", "/frames/jig/in", "tray",
        "circle: jig in tray in jig", "world or base"),
    "a frame in a missing one": (arm(frames={"jig": {**AT_ORIGIN, "in": "table"}}), "unknown-frame",
        "/frames/jig/in", "table", "no frame 'table'", "world, base"),
    "numbers shared": (arm(frames=SAME_NUMBER), "unusable-value", "/frames/tray/number", 5,
        "same number 5", "of its own"),
    "number 1000": (arm(tools={"pen": {**AT_ORIGIN, "number": 1000}}, default_tool="pen"),
        "unusable-value", "/tools/pen/number", 1000, "999", "999 or less"),
    "a sheared base": (arm(base=matrix((0, 1, 0.1))), "not-rigid", "/base/matrix",
        [[1, 0.1, 0], [0, 1, 0], [0, 0, 1]], "0.1", "another form"),
    "a mirrored tool": (arm(tools={"pen": matrix((2, 2, -1.0))}, default_tool="pen"), "not-rigid",
        "/tools/pen/matrix", [[1, 0, 0], [0, 1, 0], [0, 0, -1]], "mirrored", "right-handed"),
    "a matrix that scales": (arm(base=matrix((3, 3, 2.0))), "not-rigid", "/base/matrix/3",
        [0, 0, 0, 2], "last row", "last column"),
    "a base at 1e308": (arm(base=matrix((0, 3, 1e308))), "out-of-range", "/base/matrix/0/3", 1e308,
        "beyond", "units"),
    "a zero quaternion": (arm(base=turned("quaternion-wxyz", 0, 0, 0, 0)), "unusable-value",
        "/base/orientation/values", [0, 0, 0, 0], "norm 0", "norm 1"),
    "an unknown form": (arm(base=turned("zyx", 0, 0, 0)), "unusable-value",
        "/base/orientation/form", "zyx", "no orientation form 'zyx'", "zyx-current"),
    "four angles": (arm(base=turned("zyx-fixed", 1, 2, 3, 4)), "unusable-value",
        "/base/orientation/values", [1, 2, 3, 4], "takes 3 numbers", "3 numbers"),
    "matrix and position": (arm(base={**matrix(), "position": [0, 0, 0]}), "unusable-value",
        "/base/matrix", matrix()["matrix"], "either", "leave one"),
    "no position": (arm(base={"orientation": STRAIGHT}), "missing-field", "/base/position", None,
        "position", "position and orientation"),
    "combined travel of a missing row": (
        arm(combined_travel=[{"ratios": {"3": 1}, "travel": [0, 90]}]), "unusable-value",
        "/combined_travel/0/ratios/3", 1, "row 3", "driven rows: 1, 2"),
    "combined travel reversed": (arm(combined_travel=[{"ratios": {"1": 1}, "travel": [90, 0]}]),
        "unusable-value", "/combined_travel/0/travel", [90, 0], "reversed", "lower limit first"),
    "thresholds that fall": (arm(singularity_thresholds={"near": 1e-12, "singular": 1e-9}),
        "unusable-value", "/singularity_thresholds", {"near": 1e-12, "singular": 1e-9}, "rise",
        "defaults"),
    "a characteristic length of nothing": (arm(characteristic_length=0), "unusable-value",
        "/characteristic_length", 0, "not positive", "leave it out"),
    "a characteristic length of next to nothing": (arm(characteristic_length=1e-300),
        "unusable-value", "/characteristic_length", 1e-300, "1e-09", "leave it out"),
    "too few uncertainties": (arm(joint_uncertainty=[0.1]), "unusable-value", "/joint_uncertainty",
        [0.1], "1 joint uncertainties for 2", "each driven row"),
    "an uncertainty below zero": (arm(joint_uncertainty=[0.1, -0.1]), "unusable-value",
        "/joint_uncertainty/1", -0.1, "negative", "0 or more"),
}
# fmt: on

UNKNOWN_FIELDS: list[tuple[Body, str, str]] = [
    (arm(covention=1), "/covention", "convention"),
    (row(alhpa=1), "/rows/1/alhpa", "alpha"),
    (row(couplings=[{"axis": 1, "ratoi": 1}]), "/rows/1/couplings/0/ratoi", "ratio"),
    (arm(base={**AT_ORIGIN, "positon": 1}), "/base/positon", "position"),
    (arm(tools={"pen": {**AT_ORIGIN, "nmber": 1}}), "/tools/pen/nmber", "number"),
    (arm(frames={"jig": {**AT_ORIGIN, "orientaton": 1}}), "/frames/jig/orientaton", "orientation"),
    (
        arm(frames={"jig": {"position": [0, 0, 0], "orientation": {**STRAIGHT, "value": 1}}}),
        "/frames/jig/orientation/value",
        "values",
    ),
    (
        arm(combined_travel=[{"ratios": {"1": 1}, "travle": 1}]),
        "/combined_travel/0/travle",
        "travel",
    ),
    (arm(singularity_thresholds={"neer": 1}), "/singularity_thresholds/neer", "near"),
]


@pytest.mark.parametrize("case", ARMS)
async def test_an_arm_that_cannot_be_used(client: httpx.AsyncClient, case: str) -> None:
    given, code, pointer, value, say, way_out = ARMS[case]
    for path, body, prefix in [
        ("/v1/arms", given, ""),
        ("/v1/poses", {"arm": given, "joints": [[0, 0]]}, "/arm"),
        ("/v1/jacobians", {"arm": given, "joints": [[0, 0]]}, "/arm"),
        ("/v1/tables/conversions", {"arm": given, "to": "modified"}, "/arm"),
    ]:
        entry = only_entry(await sent(client, path, body), code, 422)
        assert (entry["pointer"], entry["in"]) == (prefix + pointer, "body")
        assert entry["value"] == value
        assert say in entry["say"]
        assert way_out in entry["way_out"]
    assert (await client.get("/v1/arms")).json()["arms"] == []


@pytest.mark.parametrize(("given", "pointer", "nearest"), UNKNOWN_FIELDS)
async def test_an_unknown_field_in_an_arm(
    client: httpx.AsyncClient, given: Body, pointer: str, nearest: str
) -> None:
    for path, body, prefix in [
        ("/v1/arms", given, ""),
        ("/v1/poses", {"arm": given, "joints": [[0, 0]]}, "/arm"),
    ]:
        problem = refusal(await sent(client, path, body), "unknown-field")
        # Of several codes the highest stands first.
        entry = problem["errors"][0]
        assert (entry["pointer"], entry["in"]) == (prefix + pointer, "body")
        assert entry["value"] == 1
        assert entry["way_out"] == f'did you mean "{nearest}"?'


async def test_all_that_is_wrong_is_said_at_once(client: httpx.AsyncClient) -> None:
    given = arm(units=None, covention="classic", rows=[{**ROW, "a": "1"}, {**ROW, "d": NAN}])
    problem = refusal(
        await sent(client, "/v1/poses", {"arm": given, "joints": [[0, 0]]}), "unknown-field"
    )
    assert [entry["pointer"] for entry in problem["errors"]] == [
        "/arm/covention",
        "/arm/units",
        "/arm/rows/0/a",
        "/arm/rows/1/d",
    ]


def test_the_lists_are_whole() -> None:
    assert (len(ARMS), len(UNKNOWN_FIELDS)) == (53, 9)


@pytest.mark.parametrize("field", ["tools", "frames", "combined_travel"])
async def test_an_arm_has_no_more_of_anything_than_a_cell(
    client: httpx.AsyncClient, field: str
) -> None:
    many: object = {f"at-{number}": AT_ORIGIN for number in range(MOST_PLACED + 1)}
    if field == "combined_travel":
        many = [{"ratios": {"1": 1}, "travel": [0, 1]}] * (MOST_PLACED + 1)
    answer = await client.post("/v1/arms", json=arm(**{field: many}))
    assert answer.status_code == 422
    problem = answer.json()
    assert (problem["code"], problem["errors"][0]["pointer"]) == ("too-large", f"/{field}")
