"""What a screen shows, asked over HTTP: every form is found, every bad question is refused.

The screens, what they show and what it means are scipy's.
"""

import math
from itertools import chain
from typing import Any

import httpx
import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from service.web.examples import examples_of
from tests.contract.refusals import Body, only_entry, refusal, sent
from tests.kinematics.screens import SHOWN_FORMS, Screen, has_unit, noisy, screen, tilted

pytestmark = pytest.mark.anyio

PATH = "/v1/rotations/guesses"
NAN, INFINITY = math.nan, math.inf
LEVEL = {"form": "xyz-fixed", "values": [0, 0, 0]}
DOWN = {"of": "z", "is": "down"}
SHOWN = {"shown": [10, 20, 30]}
READOUT: Body = {"shown": [0, 0, 0], "orientation": LEVEL}


def question(*readouts: Body, **more: Any) -> Body:
    return {"units": "mm-deg", "readouts": list(readouts), **more}


async def answered(client: httpx.AsyncClient, body: Body) -> Body:
    answer = await client.post(PATH, json=body)
    assert answer.status_code == 200, answer.text
    found: Body = answer.json()
    assert found["ok"] is True
    return found


def readings_of(group: Body) -> list[Body]:
    return [group["reading"], *group["same"]]


def as_screen(reading: Body) -> Screen:
    """A reading as answered, for scipy to work out."""
    return Screen(
        reading["form"],
        tuple(reading["order"]),
        tuple(reading["signs"]),
        reading["unit"],
        reading["inverse"],
    )


# --- what is found -------------------------------------------------------------------------


@pytest.mark.parametrize("form", SHOWN_FORMS)
async def test_every_form_is_found(client: httpx.AsyncClient, form: str) -> None:
    rng = np.random.default_rng(sum(map(ord, form)))
    made = screen(form, rng, str(rng.choice(["deg", "rad", "half-turns"])))
    tools = [tilted(made, rng, 10.0) for _ in range(4)]
    readouts = [
        {
            "shown": noisy(made, tool, rng).tolist(),
            "orientation": {
                "form": "quaternion-xyzw",
                "values": tool.as_quat().tolist(),
            },
        }
        for tool in tools[:3]
    ]
    found = await answered(client, question(*readouts))
    assert (found["verdict"], found["fitting"], found["plainest"]) == ("settled", 1, 1)
    (group,) = found["groups"]
    assert group["fits"]
    assert 0.0 < group["rms"] <= group["largest"] < 0.5
    assert found["next"] is None
    assert found["nearest_miss"]["largest"] > 0.5
    # Each reading, used as the document says, explains a readout that was not given.
    shown = made.shows(tools[3])
    for reading in readings_of(group):
        assert (as_screen(reading).meaning(shown).inv() * tools[3]).magnitude() < 1e-9
        assert (reading["unit"] is not None) == has_unit(form)
    assert any(reading["form"] == form for reading in readings_of(group))
    assert group["reading"]["say"] in found["say"]


async def test_fixed_and_current_are_told_together(client: httpx.AsyncClient) -> None:
    case = examples_of("rotations-guesses")["three-readouts"]
    found = await answered(client, case.request)
    same = {(r["form"], tuple(r["order"]), r["inverse"]) for r in readings_of(found["groups"][0])}
    assert ("zyz-fixed", (1, 2, 3), False) in same
    assert ("zyz-current", (3, 2, 1), False) in same
    assert len(same) == 4


async def test_radians_in_radians_out(client: httpx.AsyncClient) -> None:
    """The units of the question are those of what is known and of the answer, not of the screen."""
    shown = [10.0, -20.0, 30.0]
    known = Rotation.from_euler("xyz", shown, degrees=True)
    values = known.as_euler("xyz")
    body = question({"shown": shown, "orientation": {"form": "xyz-fixed", "values": [*values]}})
    found = await answered(client, {**body, "units": "m-rad", "tolerance": 0.01})
    assert found["units"] == "m-rad"
    assert found["tolerance"] == 0.01
    reading = found["groups"][0]["reading"]
    assert (reading["form"], reading["unit"]) == ("xyz-fixed", "deg")
    wrong = await answered(client, {**body, "tolerance": 0.01})
    assert wrong["fitting"] == 0


async def test_one_readout_asks_for_another(client: httpx.AsyncClient) -> None:
    found = await answered(
        client, question({"shown": [180, 0, 35], "direction": DOWN}, form="rotation-vector", most=5)
    )
    assert found["verdict"] == "several"
    assert found["fitting"] > len(found["groups"]) == 5
    following = found["next"]
    assert following["told_apart"] <= following["pairs"] == math.comb(found["fitting"], 2)
    assert following["smallest_difference"] >= 10.0
    assert [each["group"] for each in following["predictions"]] == [1, 2, 3, 4, 5]
    for each, group in zip(following["predictions"], found["groups"], strict=True):
        for reading in readings_of(group):
            meant = as_screen(reading).meaning(np.array(following["shown"]))
            assert each["orientation"]["form"] == "rotation-vector"
            said = Rotation.from_rotvec(np.radians(each["orientation"]["values"]))
            assert (meant.inv() * said).magnitude() < 1e-9
    assert str(following["shown"][0]).removesuffix(".0") in following["say"]


async def test_next_tells_when_a_screen_cannot_show_it(client: httpx.AsyncClient) -> None:
    found = await answered(client, question(READOUT, most=100))
    assert found["fitting"] == 3 * 624
    assert found["next"]["left_otherwise"] > 0
    assert "cannot show" in found["next"]["say"]
    kept = await answered(client, question(READOUT, most=100, shown_unit="deg"))
    assert kept["fitting"] == 624
    assert kept["next"]["left_otherwise"] == 0


@pytest.mark.parametrize(
    ("word", "vector"),
    [
        ("up", [0, 0, 2]),
        ("down", [0, 0, -0.1]),
        ("x", [1, 0, 0]),
        ("-y", [0, -1, 0]),
    ],
)
async def test_words_for_directions(
    client: httpx.AsyncClient, word: str, vector: list[float]
) -> None:
    answers = [
        await answered(
            client, question({"shown": [10, 20, 30], "direction": {"of": "-x", "is": at}})
        )
        for at in (word, vector)
    ]
    assert answers[0] == answers[1]
    same = {**SHOWN, "direction": {"of": [-3, 0, 0], "is": word}}
    assert await answered(client, question(same)) == answers[0]


async def test_contradictory_readouts_say_so(client: httpx.AsyncClient) -> None:
    turned = {"form": "xyz-fixed", "values": [0, 0, 40]}
    found = await answered(client, question(READOUT, {"shown": [0, 0, 0], "orientation": turned}))
    assert (found["verdict"], found["fitting"], found["plainest"]) == ("none", 0, None)
    assert [group["fits"] for group in found["groups"]] == [False] * 3
    # All zeros are no rotation in any reading: one of the two is off by all of the 40 degrees.
    assert found["groups"][0]["largest"] == pytest.approx(40.0, abs=1e-6)
    assert found["groups"][0]["readout"] == 2
    (finding,) = found["findings"]
    assert finding["name"] == "nothing-fits"
    assert finding["measure"] == pytest.approx(40.0, abs=1e-6)
    assert finding["threshold"] == found["tolerance"] == 0.5
    assert found["say"].startswith("nothing fits within 0.5 deg")


async def test_the_odd_one_out_is_pointed_at(client: httpx.AsyncClient) -> None:
    found = await answered(client, examples_of("rotations-guesses")["one-typed-wrong"].request)
    odd = found["odd_one_out"]
    assert (odd["readout"], odd["pointer"]) == (3, "/readouts/2")
    assert odd["group"]["reading"]["form"] == "zyx-current"
    assert odd["off"] > 20.0
    assert odd["say"] in found["say"]


async def test_a_constant_turn_is_told(client: httpx.AsyncClient) -> None:
    """The probe of the housing loader stands at 45 degrees about y to the flange."""
    found = await answered(client, examples_of("rotations-guesses")["flange-on-the-screen"].request)
    offset = found["offset"]
    assert offset["side"] == "tool"
    assert offset["orientation"]["form"] == "xyz-fixed"
    assert offset["orientation"]["values"] == pytest.approx([0.0, 45.0, 0.0], abs=0.02)
    assert offset["group"]["fits"]
    assert offset["say"] in found["say"]


async def test_what_was_repaired_is_said_where(client: httpx.AsyncClient) -> None:
    off = {"form": "quaternion-wxyz", "values": [1.01, 0, 0, 0]}
    found = await answered(client, question(READOUT, {"shown": [0, 0, 0], "orientation": off}))
    assert found["code"] == 6
    (finding,) = found["findings"]
    assert (finding["code"], finding["pointer"]) == (6, "/readouts/1/orientation/values")


async def test_a_hundred_readouts_are_answered(client: httpx.AsyncClient) -> None:
    tools = Rotation.random(100, rng=6)
    readouts = [
        {
            "shown": tool.as_euler("XYZ", degrees=True).round(2).tolist(),
            "orientation": {"form": "matrix", "values": tool.as_matrix().tolist()},
        }
        for tool in tools
    ]
    found = await answered(client, question(*readouts))
    assert found["fitting"] == 1
    assert "xyz-current" in {reading["form"] for reading in readings_of(found["groups"][0])}


# --- what is refused -----------------------------------------------------------------------


def shown(*numbers: Any) -> Body:
    return question({"shown": list(numbers), "orientation": LEVEL})


def means(**meaning: Any) -> Body:
    return question({"shown": [0, 0, 0], **meaning})


def direction(of: Any, at: Any) -> Body:
    return means(direction={"of": of, "is": at})


def turned(form: str, *values: Any) -> Body:
    return means(orientation={"form": form, "values": list(values)})


# name: (body, code, pointer, words said, words of the way out)
# fmt: off
BAD: dict[str, tuple[Any, str, str, str, str]] = {
    "no body of ours": ([], "unusable-value", "", "", "object"),
    "nothing": ({}, "missing-field", "/readouts", "readouts", "add"),
    "no units": ({"readouts": [READOUT]}, "missing-field", "/units", "units", "mm-deg"),
    "unknown units": ({**question(READOUT), "units": "deg"}, "unusable-value", "/units", "",
        "mm-deg"),
    "no readout": (question(), "unusable-value", "/readouts", "no readout", "three"),
    "too many readouts": (question(*[READOUT] * 101), "too-large", "/readouts", "101", "three"),
    "readouts are no list": ({"units": "m-rad", "readouts": 3}, "unusable-value", "/readouts",
        "list", "list"),
    "a readout is no object": (question([0, 0, 0]), "unusable-value", "/readouts/0", "", "object"),  # type: ignore[arg-type]
    "nothing shown": (question({"orientation": LEVEL}), "missing-field",
        "/readouts/0/shown", "shown", "add"),
    "shown is no list": (question({"shown": 5, "orientation": LEVEL}), "unusable-value",
        "/readouts/0/shown", "list", "list"),
    "no number": (shown(), "unusable-value", "/readouts/0/shown", "0 numbers", "3 numbers"),
    "two numbers": (shown(0, 0), "unusable-value", "/readouts/0/shown", "2 numbers", "quaternion"),
    "five numbers": (shown(0, 0, 0, 0, 1), "unusable-value", "/readouts/0/shown", "5 num", "4 "),
    "a thousand numbers": (shown(*[0] * 1000), "unusable-value", "/readouts/0/shown", "1000", "9"),
    "rows of no matrix": (shown([1, 0, 0], [0, 1, 0], [0, 0]), "unusable-value",
        "/readouts/0/shown", "3 x 3 numbers", "rows"),
    "rows of nan": (shown([1, 0, 0], [0, NAN, 0], [0, 0, 1]), "not-finite",
        "/readouts/0/shown/1/1", "nan", "finite"),
    "a row": (shown([0, 0, 0], 0, 0), "unusable-value", "/readouts/0/shown", "3 numbers",
        "3 numbers"),
    "text": (shown(0, "90", 0), "unusable-value", "/readouts/0/shown/1", "no number", "quotes"),
    "a truth": (shown(0, 0, True), "unusable-value", "/readouts/0/shown/2", "no number", "plain"),
    "nan": (shown(0, NAN, 0), "not-finite", "/readouts/0/shown/1", "nan", "finite"),
    "infinity": (shown(INFINITY, 0, 0), "not-finite", "/readouts/0/shown/0", "inf", "finite"),
    "huge": (shown(0, 0, 1e12), "out-of-range", "/readouts/0/shown/2", "beyond", "units"),
    "beyond two turns": (shown(0, 0, 5000), "unusable-value", "/readouts/0", "two turns", "unit"),
    "no quaternion": (shown(0.1, 0.1, 0.1, 0.1), "unusable-value", "/readouts/0", "quaternion",
        "decimals"),
    "a zero quaternion": (question(*({"shown": numbers, "orientation": LEVEL}
        for numbers in ([0, 0, 0, 0], [1, 0, 0, 0], [5, 5, 5, 5]))),
        "unusable-value", "/readouts/2", "neither", "decimals"),
    "a mirrored matrix": (shown(1, 0, 0, 0, 1, 0, 0, 0, -1), "unusable-value", "/readouts/0",
        "no rotation matrix", "row by row"),
    "other counts": (question(READOUT, {"shown": [1, 0, 0, 0], "orientation": LEVEL}),
        "unusable-value", "/readouts/1/shown", "4 numbers, and 3", "one screen"),
    "no meaning": (means(), "missing-field", "/readouts/0/orientation", "direction", "down"),
    "two meanings": (means(orientation=LEVEL, direction=DOWN), "unusable-value",
        "/readouts/0/direction", "either", "once more"),
    "an unknown form": (turned("zyx", 0, 0, 0), "unusable-value", "/readouts/0/orientation/form",
        "zyx", "zyx-fixed"),
    "a wrong count": (turned("zyx-fixed", 0, 0), "unusable-value",
        "/readouts/0/orientation/values", "3 numbers", "3"),
    "a nan orientation": (turned("zyx-fixed", 0, NAN, 0), "not-finite",
        "/readouts/0/orientation/values/1", "nan", "finite"),
    "a zero orientation": (turned("quaternion-wxyz", 0, 0, 0, 0), "unusable-value",
        "/readouts/0/orientation/values", "norm 0", "norm 1"),
    "a sheared orientation": (turned("matrix", [1, 0.1, 0], [0, 1, 0], [0, 0, 1]), "not-rigid",
        "/readouts/0/orientation/values", "no rotation", "form"),
    "half a direction": (means(direction={"of": "z"}), "missing-field", "/readouts/0/direction/is",
        "is", "add"),
    "a zero direction": (direction("z", [0, 0, 0]), "unusable-value", "/readouts/0/direction/is",
        "length zero", "not 0"),
    "a zero tool direction": (direction([0, 0.0, 0], "up"), "unusable-value",
        "/readouts/0/direction/of", "length zero", "not 0"),
    "a nan direction": (direction("z", [0, NAN, 1]), "not-finite", "/readouts/0/direction/is/1",
        "nan", "finite"),
    "a short direction": (direction([1, 0], "up"), "unusable-value", "/readouts/0/direction/of",
        "3 numbers", "3"),
    "a misspelt word": (direction("z", "dwon"), "unusable-value", "/readouts/0/direction/is",
        "dwon", '"down"'),
    "an unknown word": (direction("z", "sideways"), "unusable-value", "/readouts/0/direction/is",
        "sideways", "-x"),
    "down in the tool": (direction("down", "z"), "unusable-value", "/readouts/0/direction/of",
        "down", "x, y, z"),
    "a number for a direction": (direction(3, "z"), "unusable-value", "/readouts/0/direction/of",
        "3 numbers", "list"),
    "no tolerance": (question(READOUT, tolerance=0), "unusable-value", "/tolerance", "0",
        "more than 0"),
    "a nan tolerance": (question(READOUT, tolerance=NAN), "not-finite", "/tolerance", "", "finite"),
    "a wide tolerance": (question(READOUT, tolerance=31), "unusable-value", "/tolerance", "30 deg",
        "at most 30"),
    "an unknown unit": (question(READOUT, shown_unit="gon"), "unusable-value", "/shown_unit", "",
        "deg"),
    "an unknown answer": (question(READOUT, form="euler"), "unusable-value", "/form", "euler",
        "xyz"),
    "none of them": (question(READOUT, most=0), "unusable-value", "/most", "1", "1 or more"),
    "all of them": (question(READOUT, most=10**6), "unusable-value", "/most", "100", "100 or less"),
    "an unknown field": (question(READOUT, tolerence=1), "unknown-field", "/tolerence", "",
        "tolerance"),
    "an unknown field of a readout": (question({**READOUT, "direktion": DOWN}), "unknown-field",
        "/readouts/0/direktion", "direktion", '"direction"'),
    "an unknown field of a direction": (means(direction={**DOWN, "form": 1}), "unknown-field",
        "/readouts/0/direction/form", "form", "of"),
}
# fmt: on


@pytest.mark.parametrize("case", BAD)
async def test_a_question_that_cannot_be_used(client: httpx.AsyncClient, case: str) -> None:
    body, code, pointer, said, way_out = BAD[case]
    answer = await sent(client, PATH, body)
    problem = refusal(answer, code, 422)
    entry = problem["errors"][0]
    assert entry["pointer"] == pointer
    assert said in entry["say"]
    assert way_out in entry["way_out"]


async def test_a_query_is_refused(client: httpx.AsyncClient) -> None:
    answer = await client.post(f"{PATH}?units=mm-deg", json=question(READOUT))
    assert only_entry(answer, "unknown-field")["in"] == "query"


async def test_a_matrix_may_stand_in_rows(client: httpx.AsyncClient) -> None:
    rows = Rotation.from_euler("zyx", [40, 50, 60], degrees=True).as_matrix().round(4).tolist()
    meaning = {"orientation": {"form": "zyx-fixed", "values": [40, 50, 60]}}
    in_rows = await answered(client, question({"shown": rows, **meaning}))
    flat = await answered(client, question({"shown": [*chain(*rows)], **meaning}))
    assert in_rows == flat
    assert in_rows["fitting"] == 1
    assert in_rows["groups"][0]["reading"]["say"].endswith("lists it row by row")


async def test_a_stated_unit_takes_any_angle(client: httpx.AsyncClient) -> None:
    found = await answered(client, {**shown(0, 0, 3600), "shown_unit": "deg"})
    assert found["fitting"] > 0
