"""What must hold for any arm over HTTP: batch = one by one = query, and units do not matter.

Left out: what holds inside the core (the other property tests).
"""

import asyncio
import math
import re
from collections.abc import Coroutine, Iterator
from typing import Any

import httpx
import numpy as np
import pytest
from hypothesis import HealthCheck, Phase, given, settings
from hypothesis import strategies as st

from service.app import create_app
from service.settings import Settings

Body = dict[str, Any]
Client = httpx.AsyncClient
few = settings(
    max_examples=12,
    deadline=None,
    derandomize=True,
    phases=(Phase.explicit, Phase.generate),
    database=None,
    suppress_health_check=[HealthCheck.too_slow, HealthCheck.data_too_large],
)
UNITS = ("mm-deg", "m-rad", "in-deg")
DIGITS = re.compile(r"-?\d+(?:\.\d+)?(?:e[-+]?\d+)?")
METRES = {"mm": 0.001, "m": 1.0, "in": 0.0254}


class Asking:
    """A service in memory with an event loop of its own, for tests that draw their examples."""

    def __init__(self) -> None:
        self._runner = asyncio.Runner()
        self._app = create_app(Settings(database=":memory:"))
        self._lifespan = self._app.router.lifespan_context(self._app)
        self._runner.run(self._lifespan.__aenter__())
        transport = httpx.ASGITransport(self._app)
        self.client = Client(transport=transport, base_url="http://armspan.test")

    def run(self, coroutine: Coroutine[Any, Any, httpx.Response]) -> Body:
        """Return the body of an answer that is no refusal."""
        answer = self._runner.run(coroutine)
        assert answer.is_success, answer.text
        told: Body = answer.json()
        return told

    def post(self, path: str, **body: Any) -> Body:
        return self.run(self.client.post(path, json=body))

    def put(self, arm: Body) -> Body:
        headers = {"If-Match": "*"}
        answer = self._runner.run(
            self.client.put(f"/v1/arms/{arm['name']}", json=arm, headers=headers)
        )
        if answer.status_code == 412:
            return self.run(self.client.post("/v1/arms", json=arm))
        return self.run(self.client.get(f"/v1/arms/{arm['name']}"))

    def get(self, path: str, **query: str) -> Body:
        return self.run(self.client.get(path, params=query))

    def close(self) -> None:
        self._runner.run(self.client.aclose())
        self._runner.run(self._lifespan.__aexit__(None, None, None))
        self._runner.close()


@pytest.fixture(scope="module")
def asking() -> Iterator[Asking]:
    """One service for the whole file."""
    made = Asking()
    yield made
    made.close()


LENGTHS = st.floats(-1.0, 1.0).map(lambda value: round(value, 6))
ANGLES = st.floats(-3.1, 3.1).map(lambda value: round(value, 6))


@st.composite
def arms(draw: st.DrawFn) -> Body:
    """Draw an arm in metres and radians, with a base, a tool and speeds."""
    rows = []
    for _ in range(draw(st.integers(1, 7))):
        turns = draw(st.booleans())
        row = {"joint": "revolute" if turns else "prismatic"}
        row |= {
            "a": draw(LENGTHS),
            "d": draw(LENGTHS),
            "alpha": draw(ANGLES),
            "theta": draw(ANGLES),
        }
        row |= {"travel": [-3.0, 3.0] if turns else [-1.0, 1.0], "top_speed": 1.5}
        row |= {"direction": draw(st.sampled_from([1, -1]))}
        rows.append(row)
    pose = {
        "position": draw(st.lists(LENGTHS, min_size=3, max_size=3)),
        "orientation": {
            "form": "zyx-current",
            "values": draw(st.lists(ANGLES, min_size=3, max_size=3)),
        },
    }
    return {
        "name": "any-arm",
        "convention": draw(st.sampled_from(["standard", "modified"])),
        "units": "m-rad",
        "rows": rows,
        "base": pose,
        "tools": {"any-tool": {**pose, "number": 1}},
        "default_tool": "any-tool",
    }


@st.composite
def questions(draw: st.DrawFn) -> tuple[Body, list[list[float]]]:
    arm = draw(arms())
    kinds = [row["joint"] == "revolute" for row in arm["rows"]]
    vector = st.tuples(*(ANGLES if turns else LENGTHS for turns in kinds)).map(list)
    return arm, draw(st.lists(vector, min_size=1, max_size=4))


def in_units(arm: Body, units: str) -> Body:
    """Return an arm of metres and radians written in other units."""
    length, angle = scales(units)

    def pose(given: Body) -> Body:
        values = [value * angle for value in given["orientation"]["values"]]
        position = [value * length for value in given["position"]]
        return given | {
            "position": position,
            "orientation": {**given["orientation"], "values": values},
        }

    rows = []
    for row in arm["rows"]:
        own = angle if row["joint"] == "revolute" else length
        rows.append(
            row
            | {name: row[name] * length for name in ("a", "d")}
            | {name: row[name] * angle for name in ("alpha", "theta")}
            | {"travel": [bound * own for bound in row["travel"]]}
            | {"top_speed": row["top_speed"] * own}
        )
    tools = {name: pose(tool) for name, tool in arm["tools"].items()}
    return arm | {"units": units, "rows": rows, "base": pose(arm["base"]), "tools": tools}


def scales(units: str) -> tuple[float, float]:
    """Return lengths per metre and angles per radian."""
    length, angle = units.split("-")
    return 1.0 / METRES[length], 180.0 / math.pi if angle == "deg" else 1.0


def joint_scales(arm: Body, units: str) -> np.ndarray:
    length, angle = scales(units)
    return np.array([angle if row["joint"] == "revolute" else length for row in arm["rows"]])


@few
@given(question=questions())
def test_batch_is_one_by_one_is_by_query(asking: Asking, question: tuple[Body, Any]) -> None:
    arm, joints = question
    asking.put(arm)
    for what in ("poses", "jacobians"):
        together = asking.post(f"/v1/{what}", arm=arm, joints=joints)[what]
        stored = asking.post(f"/v1/{what}", arm="any-arm", joints=joints)[what]
        assert stored == together
        for vector, item in zip(joints, together, strict=True):
            (alone,) = asking.post(f"/v1/{what}", arm=arm, joints=[vector])[what]
            assert_same(alone, item)
            told = asking.get(f"/v1/arms/any-arm/{what[:-1]}", q=",".join(map(repr, vector)))
            assert_same(told[what], [alone])
            by_joint = {f"q{n}": repr(value) for n, value in enumerate(vector, start=1)}
            assert asking.get(f"/v1/arms/any-arm/{what[:-1]}", **by_joint)[what] == told[what]


@few
@given(question=questions())
def test_flat_says_the_same(asking: Asking, question: tuple[Body, Any]) -> None:
    arm, joints = question
    asking.put(arm)
    q = ",".join(map(repr, joints[0]))
    nested = asking.get("/v1/arms/any-arm/pose", q=q, form="xyz-fixed")["poses"][0]
    flat = asking.get("/v1/arms/any-arm/pose", q=q, format="flat")
    assert [flat[key] for key in ("x", "y", "z")] == nested["position"]
    assert [flat[key] for key in ("r1", "r2", "r3")] == nested["orientation"]["values"]
    assert (flat["state"], flat["code"]) == (nested["singularity"]["state"], nested["code"])
    item = asking.get("/v1/arms/any-arm/jacobian", q=q)["jacobians"][0]
    flat = asking.get("/v1/arms/any-arm/jacobian", q=q, format="flat")
    entries = [flat[f"j{r}{c}"] for r in range(1, 7) for c in range(1, len(arm["rows"]) + 1)]
    np.testing.assert_allclose(entries, np.ravel(item["matrix"]), atol=1e-8)


@few
@given(question=questions())
def test_units_of_the_arm_do_not_matter(asking: Asking, question: tuple[Body, Any]) -> None:
    """The arm typed in other units answers the same in metres and radians."""
    arm, joints = question
    expected = asking.post("/v1/jacobians", arm=arm, joints=joints)
    poses = asking.post("/v1/poses", arm=arm, joints=joints, form="matrix", links=True)
    for units in UNITS:
        other = in_units(arm, units)
        told = asking.post("/v1/jacobians", arm=other, joints=joints, units="m-rad")
        assert told["units"] == "m-rad"
        for item, wanted in zip(told["jacobians"], expected["jacobians"], strict=True):
            np.testing.assert_allclose(item["matrix"], wanted["matrix"], atol=1e-12)
            same_judgement(item["singularity"], wanted["singularity"], 1e-9)
        told = asking.post(
            "/v1/poses", arm=other, joints=joints, units="m-rad", form="matrix", links=True
        )
        for item, wanted in zip(told["poses"], poses["poses"], strict=True):
            same_pose(item, wanted)
            for link, wanted_link in zip(item["links"], wanted["links"], strict=True):
                same_pose(link, wanted_link)


@few
@given(question=questions())
def test_units_of_the_question_do_not_matter(asking: Asking, question: tuple[Body, Any]) -> None:
    """One arm asked in every unit system: the same postures, numbers without unit identical."""
    arm, joints = question
    expected = asking.post("/v1/jacobians", arm=arm, joints=joints)["jacobians"]
    poses = asking.post("/v1/poses", arm=arm, joints=joints)["poses"]
    for units in UNITS:
        length, angle = scales(units)
        per_joint = joint_scales(arm, units)
        asked = (np.array(joints) * per_joint).tolist()
        told = asking.post("/v1/jacobians", arm=arm, joints=asked, units=units)["jacobians"]
        rows = np.array([length] * 3 + [angle] * 3)[:, None]
        for item, wanted in zip(told, expected, strict=True):
            scaled = np.array(wanted["matrix"]) * rows / per_joint
            np.testing.assert_allclose(item["matrix"], scaled, rtol=1e-9, atol=1e-9)
            assert np.allclose(item["singular_values"], wanted["singular_values"], atol=1e-12)
            same_judgement(item["singularity"], wanted["singularity"], 1e-9)
            assert_shown_in(units, item["singularity"], wanted["singularity"])
        told = asking.post("/v1/poses", arm=arm, joints=asked, units=units)["poses"]
        for item, wanted in zip(told, poses, strict=True):
            position = np.array(item["position"]) / length
            np.testing.assert_allclose(position, wanted["position"], atol=1e-12)
            values, others = item["orientation"]["values"], wanted["orientation"]["values"]
            assert abs(np.dot(values, others)) == pytest.approx(1, abs=1e-12)


def assert_same(given: Any, wanted: Any) -> None:
    """Hold two answers: numbers but for rounding, which may go another way in another batch."""
    assert type(given) is type(wanted)
    if isinstance(given, dict):
        assert list(given) == list(wanted)
        for key in given:
            assert_same(given[key], wanted[key])
    elif isinstance(given, list):
        assert len(given) == len(wanted)
        for one, other in zip(given, wanted, strict=True):
            assert_same(one, other)
    elif isinstance(given, str):
        assert DIGITS.sub("#", given) == DIGITS.sub("#", wanted)
    elif isinstance(given, float):
        assert given == pytest.approx(wanted, rel=1e-12, abs=1e-12)
    else:
        assert given == wanted


def same_pose(item: Body, wanted: Body) -> None:
    np.testing.assert_allclose(item["position"], wanted["position"], atol=1e-12)
    given, expected = item["orientation"]["values"], wanted["orientation"]["values"]
    np.testing.assert_allclose(given, expected, atol=1e-12)


def same_judgement(told: Body, wanted: Body, tolerance: float) -> None:
    """Hold the pure numbers: the same in every unit system, up to the rounding of the input."""
    for name in ("state", "kinds", "joints", "task"):
        assert told[name] == wanted[name]
    for name in ("smallest_singular_value", "manipulability", "condition_number"):
        if wanted[name] is None:
            assert told[name] is None
        else:
            assert told[name] == pytest.approx(wanted[name], rel=tolerance, abs=1e-12)
    for lost, other in zip(told["lost_motion"], wanted["lost_motion"], strict=True):
        for part in ("linear", "angular"):
            np.testing.assert_allclose(lost[part], other[part], atol=1e-6)


def assert_shown_in(units: str, told: Body, wanted: Body) -> None:
    length, angle = scales(units)
    expected = wanted["characteristic_length"] * length
    assert told["characteristic_length"] == pytest.approx(expected)
    for part, scale in (("linear", length), ("angular", angle)):
        if wanted["tool_speed"] is not None:
            speed = wanted["tool_speed"][part] * scale
            assert told["tool_speed"][part] == pytest.approx(speed, rel=1e-6, abs=1e-9)


def test_numbers_without_unit_are_identical(asking: Asking) -> None:
    """Where the input is the same double in every system, so is every number without a unit."""
    row: Body = {"joint": "revolute", "alpha": 0, "d": 0, "theta": 0}
    told = []
    for units, a in (("mm-deg", 254), ("in-deg", 10), ("m-rad", 0.254)):
        arm: Body = {"name": "equal", "convention": "standard", "units": units}
        arm["rows"] = [{**row, "a": a}] * 2
        (item,) = asking.post("/v1/jacobians", arm=arm, joints=[[0, 0]])["jacobians"]
        told.append(item["singularity"])
    for name in ("state", "smallest_singular_value", "manipulability", "lost_motion"):
        assert all(each[name] == told[0][name] for each in told)
