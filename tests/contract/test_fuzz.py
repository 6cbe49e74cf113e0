"""Every address met with requests drawn from its own OpenAPI document, right ones and wrong ones.

Held: no 5xx, no status, media type or shape beyond the document, one shape of refusal. Left out:
whether the numbers are right. Seeds are fixed, so a run that fails fails again.
"""

from collections.abc import Callable
from typing import Any

import pytest
import schemathesis
from fastapi.routing import APIRoute
from hypothesis import HealthCheck, Phase, given, seed, settings
from hypothesis import strategies as st
from schemathesis import GenerationMode
from schemathesis.checks import not_a_server_error
from schemathesis.config import SchemathesisConfig
from schemathesis.generation.case import Case
from schemathesis.specs.openapi.checks import (
    content_type_conformance,
    negative_data_rejection,
    response_headers_conformance,
    response_schema_conformance,
    status_code_conformance,
)

from kinematics.warm_up import warm_up
from service.app import ROUTERS, create_app
from service.problems import KINDS, MEDIA_TYPE
from service.settings import Settings
from service.web.document import openapi_document

CHECKS: list[Any] = [
    not_a_server_error,
    status_code_conformance,
    content_type_conformance,
    response_headers_conformance,
    response_schema_conformance,
]
OPERATIONS = sorted(
    {
        (method, route.path)
        for router in ROUTERS
        for route in router.routes
        if isinstance(route, APIRoute) and route.include_in_schema
        for method in route.methods or ()
    }
)
EXAMPLES = 25
FLAT_MEDIA = ("application/json", "text/plain; charset=us-ascii", "text/csv; charset=utf-8")
REFUSALS = sorted({kind.status for kind in KINDS.values() if kind.status < 500})
ROW = {"joint": "revolute", "a": 100, "alpha": 90, "d": 10, "theta": 0, "travel": [-170, 170]}
PLACED = {"position": [0, 0, 50], "orientation": {"form": "xyz-fixed", "values": [0, 0, 0]}}
ARM: dict[str, Any] = {
    "name": "shelf-arm",
    "convention": "standard",
    "units": "mm-deg",
    "rows": [ROW, ROW, {**ROW, "joint": "prismatic"}],
    "tools": {"gripper": {**PLACED, "number": 1}},
    "default_tool": "gripper",
    "frames": {"tray": {**PLACED, "number": 1}},
}

CELL: dict[str, Any] = {
    "name": "shelf-cell",
    "units": "mm-deg",
    "arms": {"shelf-arm": {"in": "shelf", "pose": PLACED}},
    "frames": {"shelf": {**PLACED, "number": 1}},
}


def examples(count: int) -> Callable[[Any], Any]:
    return settings(
        max_examples=count,
        deadline=None,
        database=None,
        derandomize=False,
        phases=(Phase.explicit, Phase.generate, Phase.shrink),
        suppress_health_check=list(HealthCheck),
    )


@pytest.fixture(scope="module")
def schema() -> Any:
    """The service with one arm and one cell, and its document as the fuzzer reads it."""
    # The fuzzer gives up after 10 s, and a compiler may take longer than that.
    warm_up()
    app = create_app(Settings(database=":memory:"))
    # Each stream ends at once, and nobody waits: no drawn request goes on for ever.
    app.state.streams.stop()
    config = SchemathesisConfig.from_dict(
        {"checks": {"negative_data_rejection": {"expected-statuses": REFUSALS}}}
    )
    made = schemathesis.openapi.from_asgi("/openapi.json", app, config=config)
    for path, body in (("/v1/cells", CELL), ("/v1/arms", ARM)):
        stored = made[path]["POST"].Case(body=body, media_type="application/json").call()
        assert stored.status_code == 201
    sent = made["/v1/arms/{arm}/joints"]["PUT"].Case(
        path_parameters={"arm": "shelf-arm"},
        body={"joints": [10, 20, 30], "period_ms": 3_600_000},
        media_type="application/json",
    )
    assert sent.call().json()["accepted"]
    return made


def held(case: Case, *more: Any) -> Any:
    response = case.call()
    # With errors=inline a refusal comes with status 200, as is asked for.
    inline = "inline" in str((case.query or {}).get("errors"))
    case.validate_response(response, checks=[*CHECKS, *(() if inline else more)])
    if response.status_code >= 400 and case.method != "HEAD":
        (media,) = response.headers["content-type"]
        assert media in (MEDIA_TYPE, *FLAT_MEDIA)
        if media == MEDIA_TYPE:
            told = response.json()
            assert told["number"] == KINDS[told["code"]].number
            assert told["status"] == response.status_code
        elif media == FLAT_MEDIA[0]:
            assert response.json()["ok"] == 0
        else:
            assert response.text.removeprefix("ok,").split("\r\n")[-2][:2] in ("0;", "0,")
    return response


def test_the_operations_are_all_here(schema: Any) -> None:
    documented = {
        (operation.ok().method.upper(), operation.ok().path)
        for operation in schema.get_all_operations()
    }
    assert documented == set(OPERATIONS)
    assert len(OPERATIONS) >= 20


def takes_something(method: str, path: str) -> bool:
    """Whether an address has a query or a body, which is where a drawn request can be wrong."""
    operation = DOCUMENT["paths"][path][method.lower()]
    in_query = any(given["in"] == "query" for given in operation.get("parameters", ()))
    return in_query or "requestBody" in operation


DOCUMENT = openapi_document(
    [route for router in ROUTERS for route in router.routes if isinstance(route, APIRoute)],
    version="0",
)
WRONGLY_ASKED = [each for each in OPERATIONS if takes_something(*each)]
DRAWN = [
    *((*each, GenerationMode.POSITIVE) for each in OPERATIONS),
    *((*each, GenerationMode.NEGATIVE) for each in WRONGLY_ASKED),
]


def test_what_can_be_asked_wrongly_is_all_here(schema: Any) -> None:
    assert len(OPERATIONS) == 83
    assert len(WRONGLY_ASKED) == 57
    for method, path in OPERATIONS:
        operation = schema[path][method]
        assert bool(operation.query or operation.body) == ((method, path) in WRONGLY_ASKED)


@pytest.mark.parametrize(("method", "path", "mode"), DRAWN)
def test_drawn_requests(schema: Any, method: str, path: str, mode: GenerationMode) -> None:
    operation = schema[path][method]
    names = {"arm": "shelf-arm", "cell": "shelf-cell"}
    asked = {name: stored for name, stored in names.items() if f"{{{name}}}" in path}
    known = asked if asked and method in ("GET", "HEAD") else None
    more = [negative_data_rejection] if mode is GenerationMode.NEGATIVE else []

    @seed(20260101)
    @examples(EXAMPLES)
    @given(case=operation.as_strategy(generation_mode=mode, path_parameters=known))
    def hold(case: Case) -> None:
        held(case, *more)

    hold()


# Values at which arithmetic goes wrong first: the largest an arm may have, and beyond it.
EDGES = (0, -0.0, 1e-300, -1e-12, 1e-6, 90, -180, 360, 1e9, -1e9)
NUMBERS = st.one_of(
    st.sampled_from(EDGES),
    st.floats(-1000, 1000, allow_nan=False),
    st.integers(-180, 180),
)
BEYOND = st.one_of(NUMBERS, st.sampled_from([1e12, -1e154, 1e308]))
UNITS = st.sampled_from(["mm-deg", "m-rad", "in-deg"])
Bodies = st.SearchStrategy[dict[str, Any]]
FORMS = {"quaternion-wxyz": 4, "zyx-current": 3, "rotation-vector": 3, "xyx-fixed": 3}


def vectors(count: int, numbers: st.SearchStrategy[Any] = NUMBERS) -> st.SearchStrategy[Any]:
    return st.lists(numbers, min_size=count, max_size=count)


@st.composite
def rows(draw: st.DrawFn) -> dict[str, Any]:
    row: dict[str, Any] = {"joint": draw(st.sampled_from(["revolute", "prismatic"]))}
    row |= {name: draw(NUMBERS) for name in ("a", "alpha", "d", "theta")}
    if draw(st.booleans()):
        lower, least, most, upper = sorted(draw(vectors(4)))
        row |= {"travel": [lower, upper], "working_travel": [least, most]}
    optional = {
        "direction": st.sampled_from([1, -1]),
        "working_reason": st.text(max_size=5),
        "top_speed": st.sampled_from([1e-6, 90, 1e9]),
        "couplings": vectors(1, st.fixed_dictionaries({"axis": AXES, "ratio": NUMBERS})),
        "passive": st.booleans(),
    }
    return row | draw(st.fixed_dictionaries({}, optional=optional))


AXES = st.integers(1, 4)
POSES = st.one_of(
    *(
        st.fixed_dictionaries(
            {
                "position": vectors(3),
                "orientation": st.fixed_dictionaries(
                    {"form": st.just(form), "values": vectors(count)}
                ),
            }
        )
        for form, count in FORMS.items()
    )
)
TRAVEL = st.fixed_dictionaries(
    {"ratios": st.dictionaries(st.just("1"), NUMBERS), "travel": vectors(2).map(sorted)}
)
ARMS = st.fixed_dictionaries(
    {
        "name": st.just("wild-arm"),
        "convention": st.sampled_from(["standard", "modified"]),
        "units": UNITS,
        "rows": st.lists(rows(), max_size=7),
    },
    optional={
        "base": POSES,
        "tools": st.dictionaries(st.sampled_from(["pen", "saw"]), POSES, max_size=2),
        "default_tool": st.just("flange"),
        "frames": st.dictionaries(st.sampled_from(["bench", "tray"]), POSES, max_size=2),
        "combined_travel": vectors(1, TRAVEL),
        "characteristic_length": NUMBERS,
    },
)


@st.composite
def questions(draw: st.DrawFn, *, moving: bool) -> dict[str, Any]:
    """Draw a body that is right in shape and count, with values at the edges."""
    arm = draw(ARMS)
    count = sum(not row.get("passive", False) for row in arm["rows"])
    joints = draw(st.lists(vectors(count, BEYOND), min_size=1, max_size=3))
    frames = ["base", "world", *arm.get("frames", ()), *(["tool", "flange"] if moving else [])]
    optional: dict[str, st.SearchStrategy[Any]] = {
        "tool": st.one_of(POSES, st.sampled_from(["flange", *arm.get("tools", ())])),
        "frame": st.sampled_from(frames),
        "form": st.sampled_from(["matrix", "zyx-current", "zyz-fixed", "rotation-vector"]),
        "units": UNITS,
        "links": st.booleans(),
        "singularity": st.booleans(),
        "task": st.sampled_from(["pose", "position", "orientation", ["vx", "wz"]]),
    }
    if moving:
        for name, width in (("speeds", count), ("twists", 6), ("loads", 6)):
            optional[name] = vectors(len(joints), vectors(width, BEYOND))
    asked = draw(st.fixed_dictionaries({}, optional=optional))
    return {"arm": arm, "joints": joints, **asked}


@pytest.mark.parametrize("path", ["/v1/poses", "/v1/jacobians"])
def test_postures_at_the_edges(schema: Any, path: str) -> None:
    operation = schema[path]["POST"]
    statuses: list[int] = []

    @seed(20260102)
    @examples(20 * EXAMPLES)
    @given(body=questions(moving=path == "/v1/jacobians"))
    def hold(body: dict[str, Any]) -> None:
        case = operation.Case(body=body, media_type="application/json")
        statuses.append(held(case).status_code)

    hold()
    assert set(statuses) <= {200, 422}
    assert statuses.count(200) >= EXAMPLES


LENGTHS = st.sampled_from([1e-3, 1, 50, 1e4, 1e9])
APPROACHES = st.fixed_dictionaries(
    {"distance": LENGTHS},
    optional={"along": st.one_of(st.just("tool-z"), vectors(3)), "speed": LENGTHS},
)
TARGETS = st.one_of(
    st.fixed_dictionaries(
        {"pose": POSES},
        optional={
            "freedom": st.sampled_from(["none", "spin", "orientation", {"cone": 20}]),
            "tolerance": st.fixed_dictionaries({}, optional={"position": st.just(0.5)}),
            "approach": APPROACHES,
        },
    ),
    st.fixed_dictionaries({"position": vectors(3, BEYOND)}),
)


@st.composite
def reaches(draw: st.DrawFn) -> dict[str, Any]:
    """Draw a question about targets that is right in shape, with values at the edges."""
    arm = draw(ARMS)
    optional: dict[str, st.SearchStrategy[Any]] = {
        "tool": st.one_of(POSES, st.sampled_from(["flange", *arm.get("tools", ())])),
        "frame": st.sampled_from(["base", "world", *arm.get("frames", ())]),
        "units": UNITS,
        "solutions": st.sampled_from(["best", "all"]),
        "order": st.sampled_from(["margin", "singularity"]),
    }
    asked = draw(st.fixed_dictionaries({}, optional=optional))
    return {"arm": arm, "targets": draw(st.lists(TARGETS, min_size=1, max_size=3)), **asked}


@st.composite
def ways(draw: st.DrawFn) -> dict[str, Any]:
    """Draw a question about travels that is right in shape and count, with values at the edges."""
    arm = draw(ARMS)
    count = sum(not row.get("passive", False) for row in arm["rows"])
    at = st.fixed_dictionaries({"joints": vectors(count, BEYOND)})
    # Joint values first: most poses drawn are out of reach, and a travel then has no way.
    places = st.one_of(at, at, st.fixed_dictionaries({"pose": POSES}))
    leg = st.fixed_dictionaries(
        {"end": places},
        optional={
            "move": st.sampled_from(["straight", "joints"]),
            "speed": LENGTHS,
            "turn_speed": LENGTHS,
        },
    )
    travel = st.one_of(
        st.fixed_dictionaries({"start": at, "legs": st.lists(leg, min_size=1, max_size=3)}),
        st.fixed_dictionaries(
            {"target": st.fixed_dictionaries({"pose": POSES}), "approach": APPROACHES},
            optional={"retract": APPROACHES},
        ),
    )
    optional: dict[str, st.SearchStrategy[Any]] = {
        "frame": st.sampled_from(["base", "world", *arm.get("frames", ())]),
        "units": UNITS,
        "solutions": st.sampled_from(["best", "all"]),
        "points": st.sampled_from([1, 2, 5]),
        "near": vectors(count),
    }
    asked = draw(st.fixed_dictionaries({}, optional=optional))
    return {"arm": arm, "travels": draw(st.lists(travel, min_size=1, max_size=2)), **asked}


@pytest.mark.parametrize(
    ("path", "bodies", "drawn"),
    [("/v1/reach/checks", reaches(), 20260104), ("/v1/reach/travels", ways(), 20260105)],
    ids=["targets", "travels"],
)
def test_reach_at_the_edges(schema: Any, path: str, bodies: Bodies, drawn: int) -> None:
    operation = schema[path]["POST"]
    statuses: list[int] = []

    @seed(drawn)
    @examples(8 * EXAMPLES)
    @given(body=bodies)
    def hold(body: dict[str, Any]) -> None:
        case = operation.Case(body=body, media_type="application/json")
        statuses.append(held(case).status_code)

    hold()
    assert set(statuses) <= {200, 422}
    # Most arms drawn are refused; what else is wrong is met with drawn requests.
    assert statuses.count(200) >= 5


@st.composite
def envelopes(draw: st.DrawFn) -> dict[str, Any]:
    """Draw a question about an envelope that is right in shape, with values at the edges."""
    arm = draw(ARMS)
    if draw(st.integers(0, 3)):
        # Slides without travel, and limits without room, are refused at once.
        arm["rows"] = [{**row, "travel": [-150, 170]} for row in arm["rows"]]
        arm.pop("combined_travel", None)
        for row in arm["rows"]:
            row.pop("working_travel", None)
    optional: dict[str, st.SearchStrategy[Any]] = {
        "tool": st.one_of(POSES, st.sampled_from(["flange", *arm.get("tools", ())])),
        "point": st.sampled_from(["tool", "tool", "wrist"]),
        "within": st.sampled_from(["travel", "working-travel"]),
        "resolution": st.sampled_from([1e-300, 1e-3, 5, 500, 1e12]),
        "units": UNITS,
    }
    return {"arm": arm, **draw(st.fixed_dictionaries({}, optional=optional))}


@pytest.mark.parametrize("format_", ["json", "svg"])
def test_envelopes_at_the_edges(schema: Any, format_: str) -> None:
    operation = schema["/v1/reach/envelope"]["POST"]
    statuses: list[int] = []

    @seed(20260106)
    @examples(2 * EXAMPLES)
    @given(body=envelopes())
    def hold(body: dict[str, Any]) -> None:
        query = {"format": format_}
        case = operation.Case(body=body, query=query, media_type="application/json")
        statuses.append(held(case).status_code)

    hold()
    assert set(statuses) <= {200, 422}
    assert statuses.count(200) >= 5


def test_conversions_at_the_edges(schema: Any) -> None:
    operation = schema["/v1/tables/conversions"]["POST"]
    statuses: list[int] = []

    @seed(20260103)
    @examples(10 * EXAMPLES)
    @given(arm=ARMS, to=st.sampled_from(["standard", "modified"]))
    def hold(arm: dict[str, Any], to: str) -> None:
        case = operation.Case(body={"arm": arm, "to": to}, media_type="application/json")
        statuses.append(held(case).status_code)

    hold()
    assert statuses.count(200) >= EXAMPLES
