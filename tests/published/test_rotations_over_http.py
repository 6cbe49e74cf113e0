"""All cases of data/rotations.json over HTTP, within the tolerance of each case; radians.

Each triple and each conversion is asked in two ways: as turns or a start in every form, and as one
of many. Left out: the same cases through the Python API (test_rotations).
"""

import json
from pathlib import Path
from typing import Any

import httpx
import numpy as np
import pytest

Case = dict[str, Any]
pytestmark = pytest.mark.anyio

FILE = json.loads((Path(__file__).parent / "data" / "rotations.json").read_text())
CASES: dict[str, Case] = {case["id"]: case for case in FILE["cases"]}
NAMES = [f"rot-{number:02d}" for number in range(1, 35)]
TRIPLES, COMPOSITIONS, CONVERSIONS = NAMES[:14], NAMES[14:17], NAMES[17:23]
LOCKS, MATRICES_OFF, PASSIVE = NAMES[23:27], NAMES[27:31], NAMES[33]
UNITS = "m-rad"
FORMS_OF_CASES = {
    "matrix": "matrix",
    "quaternion_wxyz": "quaternion-wxyz",
    "rotation_vector": "rotation-vector",
}


def test_every_case_of_the_file_is_asked() -> None:
    assert list(CASES) == NAMES
    assert len(NAMES) == FILE["count"] == 34
    asked = [*TRIPLES, *COMPOSITIONS, *CONVERSIONS, *LOCKS, *MATRICES_OFF, "rot-32", "rot-33"]
    assert [*asked, PASSIVE] == NAMES


async def rotations(client: httpx.AsyncClient, **asked: Any) -> Case:
    answer = await client.post("/v1/rotations", json={"units": UNITS, **asked})
    assert answer.status_code == 200, answer.text
    told: Case = answer.json()
    assert told["units"] == UNITS
    return told


async def converted(client: httpx.AsyncClient, form: str, values: Any, to: str) -> Case:
    asked = {"from": form, "to": to, "values": [values], "units": UNITS}
    answer = await client.post("/v1/rotations/conversions", json=asked)
    assert answer.status_code == 200, answer.text
    (item,) = answer.json()["orientations"]
    found: Case = item
    return found


def within(case: Case, actual: Any, expected: Any) -> None:
    np.testing.assert_allclose(actual, expected, rtol=0.0, atol=case["tolerance"]["abs"])


def same_up_to_sign(case: Case, actual: Any, expected: Any) -> None:
    actual, expected = np.array(actual), np.array(expected)
    within(case, actual * np.sign(actual @ expected), expected)


def form_of(values: Case) -> str:
    return f"{values['seq']}-{values['axes']}"


def steps_of(values: Case) -> list[Case]:
    return [
        {"axis": axis, "angle": angle, "about": values["axes"]}
        for axis, angle in zip(values["seq"], values["angles"], strict=True)
    ]


@pytest.mark.parametrize("name", TRIPLES)
async def test_triples(client: httpx.AsyncClient, name: str) -> None:
    case = CASES[name]
    given, expected = case["input"], case["expected"]
    assert given["unit"] == "rad"
    start = {"form": form_of(given), "values": given["angles"]}
    as_start, as_steps = (
        await rotations(client, start=start),
        await rotations(client, steps=steps_of(given)),
    )
    for told in (as_start, as_steps):
        within(case, told["orientation"]["matrix"], expected["matrix"])
    item = await converted(client, form_of(given), given["angles"], "matrix")
    within(case, item["values"], expected["matrix"])
    other = {"form": "matrix", "values": CASES["rot-13"]["expected"]["matrix"]}
    if "angle_to_rot_13" in expected:
        between = (await rotations(client, start=start, goal=other))["between"]
        for turn in between.values():
            within(case, turn["angle"], expected["angle_to_rot_13"])
    if "canonical_angles" in expected:
        twin = expected["fixed_axis_equivalent"]
        for told in (as_start, as_steps):
            orientation = told["orientation"]
            within(case, orientation[form_of(given)], expected["canonical_angles"])
            within(case, orientation[form_of(twin)], twin["angles"])
            same_up_to_sign(case, orientation["quaternion-wxyz"], expected["quaternion_wxyz"])
            within(case, orientation["rotation-vector"], expected["rotation_vector"])
        # Read backwards about fixed axes, in the same words as the file has it.
        said = as_steps["steps"]["all_fixed"]
        assert "".join(step["axis"] for step in said) == twin["seq"]
        within(case, [step["angle"] for step in said], twin["angles"])
        second = await converted(client, form_of(given), expected["second_triple"], form_of(given))
        within(case, second["values"], expected["canonical_angles"])


@pytest.mark.parametrize(
    ("name", "given", "expected"),
    [(name, "operations", "matrix") for name in COMPOSITIONS]
    + [("rot-16", "operations_b", "matrix_b")],
)
async def test_compositions(
    client: httpx.AsyncClient, name: str, given: str, expected: str
) -> None:
    case = CASES[name]
    steps = [
        {
            "axis": turn.get("axis") or turn["about"],
            "angle": turn["angle"],
            "about": turn["frame"],
        }
        for turn in case["input"][given]
    ]
    told = await rotations(client, steps=steps)
    matrix = case["expected"][expected]
    within(case, told["orientation"]["matrix"], matrix)
    for rewritten in told["steps"].values():
        again = await rotations(client, steps=rewritten, forms=["matrix"])
        within(case, again["orientation"]["matrix"], matrix)


@pytest.mark.parametrize("name", CONVERSIONS)
async def test_conversions(client: httpx.AsyncClient, name: str) -> None:
    case = CASES[name]
    expected = case["expected"]
    ((key, values),) = case["input"].items()
    for form, given in ((FORMS_OF_CASES[key], values), ("matrix", expected["matrix"])):
        told = await rotations(client, start={"form": form, "values": given})
        orientation = told["orientation"]
        assert [finding for finding in told["findings"] if finding["code"] == 6] == []
        within(case, orientation["matrix"], expected["matrix"])
        same_up_to_sign(case, orientation["quaternion-wxyz"], expected["quaternion_wxyz"])
        vector = orientation["rotation-vector"]
        within(case, np.outer(vector, vector), np.outer(*[expected["rotation_vector"]] * 2))
        within(case, np.linalg.norm(vector), expected["angle"])
        for sequence in ("zyx", "zyz"):
            angles = expected[f"euler_{sequence}_current"]
            within(case, orientation[f"{sequence}-current"], angles)
            item = await converted(client, form, given, f"{sequence}-current")
            within(case, item["values"], angles)


@pytest.mark.parametrize("name", LOCKS)
async def test_gimbal_locks(client: httpx.AsyncClient, name: str) -> None:
    case = CASES[name]
    given, expected = case["input"], case["expected"]
    assert expected["gimbal_lock"] is True
    form = form_of(given)
    told = await rotations(
        client, start={"form": "matrix", "values": given["matrix"]}, forms=[form]
    )
    item = await converted(client, "matrix", given["matrix"], form)
    for code, values, findings in (
        (told["code"], told["orientation"][form], told["findings"]),
        (item["code"], item["values"], item["findings"]),
    ):
        assert code == 5
        first, middle, last = values
        assert last == 0.0  # so that sum and difference are both the first
        within(case, [middle, first], [expected["middle"], expected["combination_value"]])
        (finding,) = findings
        combination = expected["combination"].replace("third", "last")
        assert f"{combination} = {expected['combination_value']:.9g} rad" in finding["say"]


@pytest.mark.parametrize("name", MATRICES_OFF)
async def test_matrices_that_are_no_rotations(client: httpx.AsyncClient, name: str) -> None:
    case = CASES[name]
    matrix, expected = case["input"]["matrix"], case["expected"]
    size = expected["max_abs_of_RtR_minus_I"]
    start = {"form": "matrix", "values": matrix}
    if name == "rot-28":  # repaired, and said so
        told = await rotations(client, start=start, forms=["matrix"])
        within(case, told["orientation"]["matrix"], expected["nearest_rotation_frobenius"])
        (finding,) = told["findings"]
        assert (told["code"], finding["pointer"]) == (6, "/start/values")
        within(case, finding["measure"], size)
        return
    for path, asked, pointer in (
        ("/v1/rotations", {"start": start}, "/start/values"),
        ("/v1/rotations/conversions", {"from": "matrix", "values": [matrix]}, "/values/0"),
    ):
        answer = await client.post(path, json={"units": UNITS, **asked})
        problem = answer.json()
        assert (answer.status_code, problem["code"]) == (422, "not-rigid")
        (entry,) = problem["errors"]
        assert (entry["pointer"], entry["value"]) == (pointer, matrix)
        assert ("mirrored" in entry["say"]) == (name == "rot-29")
        assert name == "rot-29" or f"{size:.6g}" in entry["say"]


async def test_a_zero_quaternion(client: httpx.AsyncClient) -> None:
    case = CASES["rot-32"]
    start = {"form": "quaternion-wxyz", "values": case["input"]["quaternion_wxyz"]}
    answer = await client.post("/v1/rotations", json={"units": UNITS, "start": start})
    assert (answer.status_code, answer.json()["code"]) == (422, "unusable-value")
    assert "no direction" in answer.json()["detail"]


async def test_a_quaternion_of_norm_1_1(client: httpx.AsyncClient) -> None:
    case = CASES["rot-33"]
    expected = case["expected"]
    start = {"form": "quaternion-wxyz", "values": case["input"]["quaternion_wxyz"]}
    told = await rotations(client, start=start, forms=["matrix", "quaternion-wxyz"])
    within(case, told["orientation"]["matrix"], expected["matrix"])
    within(case, told["orientation"]["quaternion-wxyz"], expected["normalised_wxyz"])
    (finding,) = told["findings"]
    assert finding["code"] == told["code"] == 6
    within(case, 1.0 + finding["measure"], expected["norm"])


async def test_matrices_are_active(client: httpx.AsyncClient) -> None:
    case = CASES[PASSIVE]
    expected = case["expected"]
    start = {"form": "xyz-fixed", "values": case["input"]["roll_pitch_yaw"]}
    told = await rotations(client, start=start, goal={"form": "xyz-fixed", "values": [0, 0, 0]})
    within(case, told["orientation"]["matrix"], expected["active_body_to_world"])
    # The turn back is the transpose, which is what passive books print.
    back = told["between"]["current"]["orientation"]["matrix"]
    within(case, back, expected["passive_world_to_body"])
