"""Surveys of envelopes: the bits of the answer at once, whoever makes the pieces; tables of them.

Grids are coarser here than they usually are, and cut finer.
"""

import io
from typing import Any

import numpy as np
import orjson
import pytest

from kinematics.envelope import draws, sampled_views, search, searched
from kinematics.errors import KinematicsError
from service.errors import ServiceError
from service.operations.arms import Arms
from service.operations.envelopes import AT_ONCE, EnvelopeQuestion, envelope_question
from service.storage.opening import OpenStorage
from service.storage.ports import GivenPiece, Survey, SurveyStorage
from service.surveys import envelopes
from service.wire.answers import json_bytes
from service.wire.arms import ReadArm
from service.wire.envelopes import EnvelopeRequest
from tests.service.surveys.surveys_made import ARM, ASKEW, AT, SLIDE, made, of_no_survey, told

SAMPLED = {"arm": ASKEW, "within": "travel", "resolution": 90}
SLIDES = {
    **ARM,
    "name": "two-slides",
    "rows": [
        {**SLIDE, "alpha": 90, "travel": [0, 900], "working_travel": [100, 800]},
        {**SLIDE, "travel": [-250, 250]},
    ],
}
EXACT = {"arm": SLIDES}


@pytest.fixture(autouse=True)
def coarse_grids(monkeypatch: pytest.MonkeyPatch) -> None:
    for module, name, value in (
        (sampled_views, "DEFAULT_CELLS", 10),
        (sampled_views, "_STRIPE", 6),
        (draws, "PLACES_DRAWN", 300),
        (searched, "PLACES_DRAWN", 300),
        (draws, "_SLAB", 250),
        (search, "POSTURES", 2048),
    ):
        monkeypatch.setattr(module, name, value)


def question(arms: Arms[ReadArm], request: dict[str, Any]) -> EnvelopeQuestion:
    return envelope_question(arms, EnvelopeRequest.model_validate(request), AT_ONCE)


def at_once(arms: Arms[ReadArm], request: dict[str, Any]) -> Any:
    """Return what ``/v1/reach/envelope`` answers."""
    asked = question(arms, request)
    return orjson.loads(json_bytes(asked.answer({one: asked.found(one) for one in asked.within})))


@pytest.mark.parametrize("request_", [SAMPLED, EXACT], ids=["sampled", "exact"])
def test_it_is_the_answer_at_once_to_the_last_bit(
    opened: OpenStorage, arms: Arms[ReadArm], request_: dict[str, Any]
) -> None:
    store = opened.surveys
    survey = made(store, arms, envelopes.Envelopes(), request_, seed=1)
    given = [store.given(survey.id, number).decode() for number in range(survey.total)]
    assert given[-1] == "whole"
    views = [name.rsplit(" ", 1)[0] for name in given[:-1]]
    if request_ is SAMPLED:
        assert len(set(views)) == 4
        for view in ("section", "plan", "volume"):
            assert views.count(f"travel {view}") > 1
    else:
        assert views == ["travel extremes", "working-travel extremes"]
    answer = of_no_survey(told(store, survey, "json"))
    assert answer == at_once(arms, request_)
    drawing = told(store, survey, "svg")
    assert drawing == envelopes.sheet_of(survey, envelopes._kept(survey, store))
    assert b"<svg" in drawing[:200]
    assert_tables_have_every_point(store, survey)
    sizes = envelopes.Envelopes().reported(survey, store).tables[0].lines
    assert len(sizes) == 3 * len([name for name in ("travel", "working_travel") if name in answer])
    assert all(" \u00b1 " in str(line[2]) or line[2] == "0" for line in sizes)


def assert_tables_have_every_point(store: SurveyStorage, survey: Survey) -> None:
    """Assert that CSV and NPY tell the curves of the JSON, in its order."""
    answer = orjson.loads(told(store, survey, "json"))
    table = np.load(io.BytesIO(told(store, survey, "npy")))
    head, *lines = told(store, survey, "csv").decode().split("\r\n")
    assert head == "within,view,curve,boundary,radius_or_x_mm,height_or_y_mm"
    assert lines.pop() == ""
    columns = envelopes.Envelopes().told(survey, "npy", store).headers["X-Columns"]
    assert columns == head
    expected = [
        [
            within.replace("_", "-"),
            view["kind"],
            str(number),
            "outer" if curve["outer"] else "inner",
        ]
        + [repr(value + 0.0) for value in point]
        for within in ("travel", "working_travel")
        if within in answer
        for view in (answer[within]["section"], answer[within]["plan"])
        for number, curve in enumerate(view["curves"], start=1)
        for point in curve["points"]
    ]
    rows = [line.split(",") for line in lines]
    assert [[*row[:4], *(repr(float(cell)) for cell in row[4:])] for row in rows] == expected
    words: tuple[tuple[str, ...], ...] = (
        ("travel", "working-travel"),
        ("section", "side", "plan"),
        (),
        ("inner", "outer"),
    )
    for row, numbers in zip(rows, table.tolist(), strict=True):
        for cell, number, known in zip(row, numbers, (*words, (), ()), strict=True):
            assert (known[int(number)] == cell) if known else float(cell) == number


@pytest.mark.parametrize("resolution", [1e-300, 0.4, 500, 900, 0, -1.0])
def test_what_does_not_fit_is_refused_as_at_once(arms: Arms[ReadArm], resolution: float) -> None:
    request = {**SAMPLED, "resolution": resolution}
    refused = []
    with pytest.raises((ServiceError, KinematicsError)) as caught:
        question(arms, request).found("travel")
    refused.append(caught.value)
    with pytest.raises((ServiceError, KinematicsError)) as caught:
        envelopes.Envelopes().accept(arms, request)
    refused.append(caught.value)
    told_of = [(type(one), tuple(one.where), one.value) for one in refused]
    assert told_of[0] == told_of[1]
    assert "survey of kind" not in str(refused[0].way_out)
    if resolution > 0.0:
        fit = refused[1].way_out.split()[2]
        envelopes.Envelopes().accept(arms, {**request, "resolution": float(fit)})


def kept_in_two(store: SurveyStorage, arms: Arms[ReadArm]) -> Survey:
    """Return a survey taken in when each travel was a piece of its own, made now."""
    accepted = envelopes.Envelopes().accept(arms, EXACT)
    about = orjson.loads(json_bytes({**accepted.about, "software": "1"}))
    survey = Survey("0" * 19 + "9", "envelope", "", accepted.request, about, 2, AT)
    within = question(arms, EXACT).within
    pieces = [GivenPiece(n, 1, one.encode()) for n, one in enumerate(within)]
    store.add(survey, pieces, key=None, digest="")
    store.begin(survey.id, AT)
    kind = envelopes.Envelopes()
    prepared = kind.prepare(kind.setup(arms, survey))
    store.keep(survey.id, [kind.make(prepared, pieces[0])])
    # The last piece is taken for the whole.
    store.keep(survey.id, [kind.gather(prepared, pieces[1], [store.made(survey.id, 0)])])
    return survey


def test_what_was_taken_in_before_is_made_and_told_as_ever(
    opened: OpenStorage, arms: Arms[ReadArm]
) -> None:
    store = opened.surveys
    now, before = made(store, arms, envelopes.Envelopes(), EXACT), kept_in_two(store, arms)
    assert of_no_survey(told(store, before, "json")) == of_no_survey(told(store, now, "json"))
    for wanted in ("csv", "npy", "svg"):
        assert told(store, before, wanted) == told(store, now, wanted)


def test_a_survey_that_waits_is_of_as_many_pieces_as_it_will_have(arms: Arms[ReadArm]) -> None:
    request = {"arm": ASKEW, "resolution": 60}
    both = envelopes.Envelopes().accept(arms, request)
    alone = [
        envelopes.Envelopes().accept(arms, {**request, "within": within})
        for within in ("travel", "working-travel")
    ]
    assert both.total - 1 == sum(one.total - 1 for one in alone) > 8
