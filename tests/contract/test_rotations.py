"""POST /v1/rotations: turns one after the other, in every form; what it says and what it refuses.

Left out: the published cases (tests/published), the core's own tests (tests/kinematics).
"""

import json
from typing import Any

import httpx
import mpmath
import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from kinematics.orientation_forms import FORMS, TRIPLES
from tests.contract.refusals import only_entry, refusal, sent

pytestmark = pytest.mark.anyio

PATH = "/v1/rotations"
Body = dict[str, Any]
ABOUT_Z = {"axis": "z", "angle": 30, "about": "fixed"}
EXACT = 1e-12
"""Against scipy, and of all forms to one matrix: LOCK_EXACT moves it by no more."""


async def told(client: httpx.AsyncClient, units: str = "mm-deg", **asked: Any) -> Body:
    answer = await client.post(PATH, json={"units": units, **asked})
    assert answer.status_code == 200, answer.text
    found: Body = answer.json()
    return found


def scipy_of(form: str, values: Any) -> Rotation:
    """Return scipy's rotation of an answer in radians."""
    if form == "matrix":
        return Rotation.from_matrix(values)
    if form.startswith("quaternion"):
        return Rotation.from_quat(values, scalar_first=form.endswith("wxyz"))
    if form == "rotation-vector":
        return Rotation.from_rotvec(values)
    sequence, axes = form.split("-")
    return Rotation.from_euler(sequence.upper() if axes == "current" else sequence, values)


# --- what is answered ----------------------------------------------------------------------


async def test_the_whole_answer(client: httpx.AsyncClient) -> None:
    steps = [ABOUT_Z, {"axis": [0, 2, 0], "angle": 90, "about": "current"}, ABOUT_Z]
    found = await told(client, steps=steps, forms=["zyx-current", "quaternion-xyzw"])
    assert list(found) == ["ok", "code", "units", "orientation", "steps", "findings"]
    assert (found["ok"], found["code"], found["units"]) == (True, 5, "mm-deg")
    assert list(found["orientation"]) == ["zyx-current", "quaternion-xyzw"]
    assert found["orientation"]["zyx-current"] == pytest.approx([60, 90, 0], abs=1e-9)
    turn, tilt = {**ABOUT_Z, "angle": 60.0}, {"axis": "y", "angle": 90.0}
    assert found["steps"] == {
        "merged": [turn, {**tilt, "about": "current"}],
        "all_fixed": [{**tilt, "about": "fixed"}, turn],
        "all_current": [{**turn, "about": "current"}, {**tilt, "about": "current"}],
    }
    (finding,) = found["findings"]
    assert (finding["code"], finding["at"]) == (5, "/orientation/zyx-current")
    assert "first - last" in finding["say"]


async def test_all_forms_come_where_none_is_named(client: httpx.AsyncClient) -> None:
    found = await told(client, steps=[ABOUT_Z])
    assert list(found["orientation"]) == list(FORMS)
    assert len(FORMS) == 28


@pytest.mark.parametrize("seed", range(3))
async def test_all_forms_are_one_orientation(client: httpx.AsyncClient, seed: int) -> None:
    rng = np.random.default_rng(seed)
    steps = [
        {
            "axis": "xyz"[rng.integers(3)],
            "angle": rng.uniform(-4, 4),
            "about": ["fixed", "current"][rng.integers(2)],
        }
        for _ in range(12)
    ]
    rotation = Rotation.identity()
    for step in steps:
        axis = np.eye(3)["xyz".index(step["axis"])]
        turn = Rotation.from_rotvec(axis * step["angle"])
        rotation = turn * rotation if step["about"] == "fixed" else rotation * turn
    found = await told(client, "m-rad", steps=steps)
    for form, values in found["orientation"].items():
        matrix = scipy_of(form, values).as_matrix()
        np.testing.assert_allclose(matrix, rotation.as_matrix(), rtol=0, atol=EXACT)
        again = await told(
            client, "m-rad", start={"form": form, "values": values}, forms=["matrix"]
        )
        back = again["orientation"]["matrix"]
        np.testing.assert_allclose(back, rotation.as_matrix(), rtol=0, atol=EXACT)


@pytest.mark.parametrize("distance", [1e-9, 1e-11, 1e-12])
async def test_near_gimbal_lock_against_forty_digits(
    client: httpx.AsyncClient, distance: float
) -> None:
    """The angles swing there; what they say together must not."""
    for form in TRIPLES:
        proper = form[0] == form[2]
        middle = (0.0 if proper else np.pi / 2) + (distance if proper else -distance)
        start = {"form": form, "values": [0.3, middle, -1.1]}
        found = await told(client, "m-rad", start=start, forms=[form])
        assert found["code"] == 5
        with mpmath.workdps(40):
            said, given = (
                in_mpmath(form, values) for values in (found["orientation"][form], start["values"])
            )
            apart = max(abs(entry) for entry in said - given)
        assert apart < EXACT, form


def in_mpmath(form: str, angles: list[float]) -> Any:
    sequence, axes = form.split("-")
    rotation = mpmath.eye(3)
    for axis, angle in zip(sequence, angles, strict=True):
        i = "xyz".index(axis)
        j, k = (i + 1) % 3, (i + 2) % 3
        turn = mpmath.eye(3)
        turn[j, j] = turn[k, k] = mpmath.cos(mpmath.mpf(angle))
        turn[k, j] = mpmath.sin(mpmath.mpf(angle))
        turn[j, k] = -turn[k, j]
        rotation = turn * rotation if axes == "fixed" else rotation * turn
    return rotation


async def test_fixed_turns_are_current_turns_read_backwards(client: httpx.AsyncClient) -> None:
    turns = [("x", 20), ("y", -50), ("z", 130)]
    fixed = [{"axis": axis, "angle": angle, "about": "fixed"} for axis, angle in turns]
    current = [{"axis": axis, "angle": angle, "about": "current"} for axis, angle in turns[::-1]]
    one, other = await told(client, steps=fixed), await told(client, steps=current)
    for form in FORMS:
        np.testing.assert_allclose(
            one["orientation"][form], other["orientation"][form], rtol=0, atol=1e-12
        )
    assert one["steps"]["all_current"] == current == other["steps"]["all_current"]
    assert one["steps"]["all_fixed"] == fixed == other["steps"]["all_fixed"]


async def test_every_list_of_steps_leads_to_the_same_place(client: httpx.AsyncClient) -> None:
    start = {"form": "zyx-current", "values": [20, -40, 70]}
    steps = [
        ABOUT_Z,
        {"axis": [1, 1, 0], "angle": 25, "about": "current"},
        ABOUT_Z,
        {"axis": [-2, -2, 0], "angle": 5, "about": "current"},
        {"axis": "x", "angle": -100, "about": "fixed"},
    ]
    found = await told(client, start=start, steps=steps, forms=["matrix"])
    assert [len(said) for said in found["steps"].values()] == [3, 3, 3]
    for said in found["steps"].values():
        again = await told(client, start=start, steps=said, forms=["matrix"])
        matrix = again["orientation"]["matrix"]
        np.testing.assert_allclose(matrix, found["orientation"]["matrix"], rtol=0, atol=1e-14)


async def test_start_and_goal(client: httpx.AsyncClient) -> None:
    start = {"form": "xyz-fixed", "values": [90, 0, 0]}
    goal = {"form": "xyz-fixed", "values": [90, 0, 30]}
    found = await told(client, start=start, goal=goal, forms=["rotation-vector"])
    assert "left" not in found
    assert found["steps"] == {"merged": [], "all_fixed": [], "all_current": []}
    fixed, current = found["between"]["fixed"], found["between"]["current"]
    assert fixed["angle"] == pytest.approx(30, abs=1e-12)
    assert current["angle"] == pytest.approx(30, abs=1e-12)
    np.testing.assert_allclose(fixed["axis"], [0, 0, 1], rtol=0, atol=1e-14)
    # What points up outside is the start's own y turned away from it.
    np.testing.assert_allclose(current["axis"], [0, 1, 0], rtol=0, atol=1e-14)
    np.testing.assert_allclose(
        current["orientation"]["rotation-vector"], [0, 30, 0], rtol=0, atol=1e-12
    )
    for name, turn in found["between"].items():
        step = {"axis": turn["axis"], "angle": turn["angle"], "about": name}
        there = await told(client, start=start, steps=[step], goal=goal)
        assert there["left"]["fixed"]["angle"] == pytest.approx(0, abs=1e-12)


async def test_what_is_left_after_the_steps(client: httpx.AsyncClient) -> None:
    goal = {"form": "xyz-fixed", "values": [0, 0, 50]}
    found = await told(client, steps=[ABOUT_Z], goal=goal)
    assert found["between"]["fixed"]["angle"] == pytest.approx(50, abs=1e-12)
    assert found["left"]["fixed"]["angle"] == pytest.approx(20, abs=1e-12)


async def test_nothing_turns_and_a_half_turn(client: httpx.AsyncClient) -> None:
    same = {"form": "xyz-fixed", "values": [10, 20, 30]}
    found = await told(client, start=same, goal=same, forms=["matrix"])
    assert [turn["axis"] for turn in found["between"].values()] == [None, None]
    half = {"form": "rotation-vector", "values": [0, -180, 0]}
    found = await told(client, goal=half, forms=["matrix"])
    assert found["between"]["fixed"]["axis"] == [0, 1, 0]
    (finding,) = found["findings"]
    assert (finding["code"], finding["name"], found["code"]) == (0, "axis-sign-free", 0)


async def test_repairs_say_where(client: httpx.AsyncClient) -> None:
    found = await told(
        client,
        start={"form": "quaternion-wxyz", "values": [1, 0, 0, 0.01]},
        goal={"form": "matrix", "values": [[1.001, 0, 0], [0, 1, 0], [0, 0, 1]]},
        forms=["matrix"],
    )
    assert found["code"] == 6
    places = [(finding["code"], finding["pointer"]) for finding in found["findings"]]
    assert places == [(6, "/start/values"), (6, "/goal/values")]


async def test_the_same_in_other_units(client: httpx.AsyncClient) -> None:
    turn = {**ABOUT_Z, "angle": np.pi / 6}
    degrees = await told(client, "in-deg", steps=[ABOUT_Z], forms=["xyz-fixed"])
    radians = await told(client, "m-rad", steps=[turn], forms=["xyz-fixed"])
    assert degrees["orientation"]["xyz-fixed"][2] == pytest.approx(30, abs=1e-12)
    assert radians["orientation"]["xyz-fixed"][2] == pytest.approx(np.pi / 6, abs=1e-14)
    assert radians["steps"]["merged"] == [turn]


async def test_a_thousand_steps(client: httpx.AsyncClient) -> None:
    found = await told(client, steps=[{**ABOUT_Z, "angle": 1}] * 1000, forms=["xyz-fixed"])
    assert found["orientation"]["xyz-fixed"][2] == pytest.approx(-80, abs=1e-9)
    assert found["steps"]["merged"] == [{**ABOUT_Z, "angle": pytest.approx(-80, abs=1e-9)}]


async def test_a_form_asked_for_twice_comes_once(client: httpx.AsyncClient) -> None:
    found = await told(client, steps=[ABOUT_Z], forms=["matrix", "matrix"])
    assert list(found["orientation"]) == ["matrix"]


# --- what is refused -----------------------------------------------------------------------

START = {"form": "xyz-fixed", "values": [0, 0, 0]}


def start(form: str, *values: Any) -> Body:
    return {"start": {"form": form, "values": list(values)}}


@pytest.mark.parametrize(
    ("asked", "code", "pointer", "way_out"),
    [
        ({}, "missing-field", "/start", "steps"),
        ({"steps": []}, "missing-field", "/start", "steps"),
        ({"start": START, "units": None}, "unusable-value", "/units", "mm-deg"),
        ({"start": START, "units": "deg"}, "unusable-value", "/units", "mm-deg"),
        (start("xyx-fixd", 0, 0, 0), "unusable-value", "/start/form", '"xyx-fixed"'),
        (start("xxy-fixed", 0, 0, 0), "unusable-value", "/start/form", "-fixed"),
        (start("ZYX", 0, 0, 0), "unusable-value", "/start/form", '"zyx-current"'),
        (start("zyx_intrinsic", 0, 0, 0), "unusable-value", "/start/form", '"zyx-current"'),
        (start("axis-angle", 0, 0, 0), "unusable-value", "/start/form", '"rotation-vector"'),
        (start("nonsense", 0, 0, 0), "unusable-value", "/start/form", "xyz-fixed"),
        (start("xyz-fixed", 0, 0), "unusable-value", "/start/values", "3 numbers"),
        (start("xyz-fixed", 0, 0, "0"), "unusable-value", "/start/values/2", "quotes"),
        (start("xyz-fixed", 0, float("nan"), 0), "not-finite", "/start/values/1", "finite"),
        (start("xyz-fixed", 1e11, 0, 0), "out-of-range", "/start/values/0", "units"),
        (start("quaternion-wxyz", 0, 0, 0, 0), "unusable-value", "/start/values", "norm 1"),
        (start("matrix", [1, 0.05, 0], [0, 1, 0], [0, 0, 1]), "not-rigid", "/start/values", "four"),
        (start("matrix", [1, 0, 0], [0, 1, 0], [0, 0, -1]), "not-rigid", "/start/values", "right"),
        (start("matrix", [1, 0, 0], [0, 1, 0]), "unusable-value", "/start/values", "3 x 3"),
        ({"goal": {"form": "zyz-fixed"}}, "missing-field", "/goal/values", "values"),
        ({"start": [1, 0, 0, 0]}, "unusable-value", "/start", "object"),
        ({"start": START, "forms": []}, "unusable-value", "/forms", "at least 1"),
        ({"start": START, "forms": ["matrix"] * 29}, "unusable-value", "/forms", "at most 28"),
        ({"start": START, "forms": ["zyz"]}, "unusable-value", "/forms/0", '"zyz-fixed"'),
        ({"start": START, "forms": "matrix"}, "unusable-value", "/forms", "list"),
        ({"start": START, "form": "matrix"}, "unknown-field", "/form", '"forms"'),
        ({"start": {**START, "value": 1}}, "unknown-field", "/start/value", '"values"'),
        ({"steps": [{**ABOUT_Z, "axis": "w"}]}, "unusable-value", "/steps/0/axis", "'x', 'y'"),
        ({"steps": [{**ABOUT_Z, "axis": [0, 0, 0]}]}, "unusable-value", "/steps/0/axis", "not 0"),
        ({"steps": [{**ABOUT_Z, "axis": [1, 0]}]}, "unusable-value", "/steps/0/axis", "at least 3"),
        (
            {"steps": [ABOUT_Z, {**ABOUT_Z, "axis": [0, float("inf"), 0]}]},
            "not-finite",
            "/steps/1/axis/1",
            "finite",
        ),
        ({"steps": [{**ABOUT_Z, "axis": [2e9, 0, 0]}]}, "out-of-range", "/steps/0/axis/0", ""),
        (
            {"steps": [{**ABOUT_Z, "angle": float("nan")}]},
            "not-finite",
            "/steps/0/angle",
            "finite",
        ),
        ({"steps": [{**ABOUT_Z, "angle": 1e12}]}, "out-of-range", "/steps/0/angle", "units"),
        ({"steps": [{**ABOUT_Z, "angle": "30"}]}, "unusable-value", "/steps/0/angle", "quotes"),
        (
            {"steps": [{**ABOUT_Z, "about": "moving"}]},
            "unusable-value",
            "/steps/0/about",
            "'fixed' or 'current'",
        ),
        (
            {"steps": [{"axis": "z", "angle": 3}]},
            "missing-field",
            "/steps/0/about",
            "fixed, current",
        ),
        ({"steps": [{**ABOUT_Z, "aixs": 1}]}, "unknown-field", "/steps/0/aixs", '"axis"'),
        ({"steps": [ABOUT_Z] * 1001}, "too-large", "/steps", "1000 steps"),
    ],
)
async def test_what_cannot_be_used_is_refused(
    client: httpx.AsyncClient, asked: Body, code: str, pointer: str, way_out: str
) -> None:
    body = {"units": "mm-deg", **asked}
    answer = await sent(client, PATH, body)
    status = 422 if code == "too-large" else None
    problem = refusal(answer, code, status)
    entry = problem["errors"][0]
    assert entry["pointer"] == pointer, problem
    assert way_out in entry["way_out"]


async def test_units_are_never_guessed(client: httpx.AsyncClient) -> None:
    answer = await sent(client, PATH, {"start": START})
    entry = only_entry(answer, "missing-field")
    assert entry["pointer"] == "/units"
    assert "mm-deg, m-rad, in-deg" in entry["way_out"]


@pytest.mark.parametrize(
    ("content", "code", "status"),
    [
        (b"", "unparseable", 400),
        (b"[", "unparseable", 400),
        (b"[]", "unusable-value", 422),
        (b'"start"', "unusable-value", 422),
        (b'{"units": "mm-deg", "units": "m-rad"}', "duplicate-key", 400),
        (b'{"start": ' + b"[" * 100_000, "unparseable", 400),
        (b'{"units": "' + b"x" * 2**20 + b'"}', "too-large", 422),
    ],
)
async def test_bodies_that_say_nothing(
    client: httpx.AsyncClient, content: bytes, code: str, status: int
) -> None:
    headers = {"content-type": "application/json"}
    answer = await client.post(PATH, content=content, headers=headers)
    assert (answer.status_code, answer.json()["code"]) == (status, code)


@pytest.mark.parametrize("depth", [5, 500, 980])
async def test_what_is_nested_deeply_is_refused(client: httpx.AsyncClient, depth: int) -> None:
    nested = "[" * depth + "1" + "]" * depth
    headers = {"content-type": "application/json"}
    for asked in (
        '"start": {"form": "matrix", "values": %s}',
        '"goal": {"form": "xyz-fixed", "values": [0, 0, %s]}',
        '"steps": [{"axis": %s, "angle": 1, "about": "fixed"}]',
        '"steps": %s',
        '"forms": %s',
    ):
        content = '{"units": "mm-deg", %s}' % (asked % nested)
        answer = await client.post(PATH, content=content, headers=headers)
        assert (answer.status_code, answer.json()["code"]) == (422, "unusable-value")


async def test_a_thousand_long_steps_fit_into_the_body(client: httpx.AsyncClient) -> None:
    step = {"axis": [-1 / 3, -2 / 3, 2 / 3], "angle": -0.12345678901234567, "about": "current"}
    body = {"steps": [step] * 1000, "units": "mm-deg", "forms": list(FORMS)}
    assert len(json.dumps(body, indent=4)) < 2**20 / 2
    assert (await client.post(PATH, json=body)).status_code == 200


async def test_a_query_is_refused(client: httpx.AsyncClient) -> None:
    answer = await client.post(PATH, params={"form": "matrix"}, json={"units": "mm-deg"})
    assert only_entry(answer, "unknown-field")["in"] == "query"
