"""Kinds of surveys: the same bits however work is cut and in whatever order it is made.

Pieces are made here one after the other; the thread and processes that do it otherwise are met in
test_runner.py and tests/contract.
"""

import io
from collections.abc import Sequence
from dataclasses import replace
from typing import Any

import numpy as np
import orjson
import pytest

from kinematics.errors import KinematicsError
from service.convert import UNITS
from service.errors import ServiceError, UnusableValue
from service.operations.arms import Arms
from service.operations.reach import ManyTargets
from service.operations.samples import samples_asked
from service.storage.opening import OpenStorage
from service.storage.ports import Head
from service.surveys import reach_checks, samples
from service.surveys.kinds import Report
from service.surveys.reach_pieces import given_rows, rows_of
from service.surveys.registry import SURVEY_KINDS
from service.wire.arms import ReadArm
from service.wire.reach_request import ReachRequest
from service.wire.reach_targets import read_targets
from service.wire.samples import SamplesRequest
from tests.service.surveys.surveys_made import ARM, ASKEW, ROW, SLIDE, made, of_no_survey, told

SAMPLES = {"arm": "two-turns", "count": 20_000, "seed": 5, "orientations": True, "joints": True}


@pytest.mark.parametrize("size", [777, 4096, 30_000])
def test_samples_are_the_same_however_they_are_cut(
    opened: OpenStorage, arms: Arms[ReadArm], size: int, monkeypatch: pytest.MonkeyPatch
) -> None:
    store, kind = opened.surveys, samples.Samples()
    many = samples_asked(arms, SamplesRequest.model_validate(SAMPLES), "npy")
    monkeypatch.setattr(samples, "_PIECE", size)
    survey = made(store, arms, kind, SAMPLES, seed=size)
    table = np.load(io.BytesIO(told(store, survey, "npy")))
    assert np.array_equal(table, many.numbers(0, many.count))
    lines = told(store, survey, "csv").decode().split("\r\n")
    assert lines[0] == "x,y,z,qw,qx,qy,qz,q1,q2"
    assert [[float(cell) for cell in line.split(",")] for line in lines[1:-1]] == table.tolist()
    answer = of_no_survey(told(store, survey, "json"))
    assert answer["samples"] == many.items(0, many.count)
    summary = orjson.loads(
        orjson.dumps(
            many.summary([many.summary_piece(0, many.count)]), option=orjson.OPT_SERIALIZE_NUMPY
        )
    )
    assert answer["summary"] == summary
    assert answer["seed"] == 5


def test_of_equal_samples_the_first_is_the_farthest(
    opened: OpenStorage, arms: Arms[ReadArm], monkeypatch: pytest.MonkeyPatch
) -> None:
    # A region of no size: whatever the joints do, the tool stays where it is.
    still = {**ARM, "rows": [{**ROW, "a": 0}] * 2}
    monkeypatch.setattr(samples, "_PIECE", 10)
    asked = {"arm": still, "count": 35, "joints": True}
    survey = made(opened.surveys, arms, samples.Samples(), asked, seed=3)
    answer = of_no_survey(told(opened.surveys, survey, "json"))
    for measure in ("x", "y", "radius"):
        ways = answer["summary"]["extremes"][measure]
        assert ways["least"] == ways["greatest"]
        assert ways["least"]["sample"] == 0
        assert ways["least"]["joints"] == answer["samples"][0]["joints"]


TARGETS = [
    {"name": "near", "position": [500, 200, 0]},
    {"name": "far", "position": [900, 0, 0]},
    {"position": [300, -400, 0], "approach": 40},
    {"name": "<b>&", "position": [650, 0, 0], "approach": 200},
]


def test_approaches_count_as_in_reach_checks(opened: OpenStorage, arms: Arms[ReadArm]) -> None:
    request = {"arm": "two-turns", "targets": TARGETS}
    survey = made(opened.surveys, arms, reach_checks.ReachChecks(), request)
    prepared = reach_checks._prepared(arms, ReachRequest.model_validate(request))
    many = ManyTargets(
        prepared.question, read_targets(TARGETS, prepared.question.units), prepared.wanted
    )
    results = of_no_survey(told(opened.surveys, survey, "json"))["results"]
    items: Any = many.items(0, len(TARGETS))
    assert [one["verdict"] for one in results] == [one["verdict"] for one in items]
    assert [one["found"] for one in results] == [one["found"] for one in items]
    # Without approaches more is reached: they were looked at.
    without = [{**row, "approach": None} for row in TARGETS]
    plain = made(
        opened.surveys, arms, reach_checks.ReachChecks(), {**request, "targets": without}, seed=1
    )
    assert [one["found"] for one in results] != [
        one["found"] for one in of_no_survey(told(opened.surveys, plain, "json"))["results"]
    ]


def test_what_was_asked_means_the_same_after_the_arm_changed(
    opened: OpenStorage, arms: Arms[ReadArm]
) -> None:
    first = made(opened.surveys, arms, samples.Samples(), {"arm": "two-turns", "count": 50})
    assert first.request["arm"] == {"name": "two-turns", "revision": 1}
    arms.replace("two-turns", {**ARM, "rows": [dict(ROW), {**ROW, "a": 250}]}, Head.ANY)
    again = made(opened.surveys, arms, samples.Samples(), first.request, seed=7)
    assert told(opened.surveys, again, "npy") == told(opened.surveys, first, "npy")
    newest = made(
        opened.surveys, arms, samples.Samples(), {"arm": "two-turns", "count": 50}, seed=8
    )
    assert told(opened.surveys, newest, "npy") != told(opened.surveys, first, "npy")


@pytest.mark.parametrize(
    ("kind", "request_", "where"),
    [
        ("samples", {"count": 0}, ("count",)),
        ("samples", {"count": 10**9}, ("count",)),
        ("samples", {"count": 10**30}, ("count",)),
        ("samples", {"count": 5, "seed": -1}, ("seed",)),
        ("samples", {"count": 5, "seed": 10**30}, ("seed",)),
        ("samples", {"count": 5, "form": "roll-pitch"}, ("form",)),
        ("samples", {"count": 5, "positions": False}, ("positions",)),
        ("envelope", {"resolution": 0}, ("resolution",)),
        ("envelope", {"resolution": -3}, ("resolution",)),
        ("envelope", {"arm": ASKEW, "resolution": 0.4}, ("resolution",)),
        ("envelope", {"arm": ASKEW, "resolution": 1e-300}, ("resolution",)),
        ("envelope", {"arm": ASKEW, "resolution": 900}, ("resolution",)),
        ("envelope", {"point": "wrist"}, ("point",)),
        ("envelope", {"arm": {**ARM, "rows": []}}, ("arm", "rows")),
        ("envelope", {"arm": {**ARM, "rows": [SLIDE]}}, ("arm", "rows", 0, "travel")),
    ],
)
def test_what_cannot_be_surveyed_is_refused_at_once(
    arms: Arms[ReadArm], kind: str, request_: dict[str, Any], where: Sequence[str]
) -> None:
    with pytest.raises((ServiceError, KinematicsError)) as refused:
        SURVEY_KINDS[kind].accept(arms, {"arm": "two-turns", **request_})
    assert tuple(refused.value.where) == tuple(where)
    assert refused.value.way_out


@pytest.mark.parametrize("kind", ["samples", "envelope"])
def test_a_table_is_for_targets(arms: Arms[ReadArm], kind: str) -> None:
    with pytest.raises(UnusableValue, match="table"):
        SURVEY_KINDS[kind].accept(arms, {"arm": "two-turns"}, np.zeros((2, 3)))


def test_reports_say_what_was_found(opened: OpenStorage, arms: Arms[ReadArm]) -> None:
    store = opened.surveys
    checks = made(store, arms, reach_checks.ReachChecks(), {"arm": "two-turns", "targets": TARGETS})
    report: Report = SURVEY_KINDS["reach-checks"].reported(checks, store)
    verdicts, _, tight, doubtful, without = report.tables
    assert ("targets", 4, "100.0 %") in verdicts.lines
    assert {line[0] for line in tight.lines} | {line[0] for line in without.lines} == {
        *("near", "far", "no. 3", "<b>&")
    }
    assert doubtful.lines == []
    assert [point.position for point in report.points] == [
        tuple(map(float, row["position"]))  # type: ignore[call-overload]
        for row in TARGETS
    ]
    drawn = made(store, arms, samples.Samples(), {"arm": "two-turns", "count": 5000}, seed=2)
    report = SURVEY_KINDS["samples"].reported(replace(drawn, title="x"), store)
    assert len(report.points) == 3000
    assert [line[0] for line in report.tables[0].lines] == ["x", "y", "z", "radius", "height"]
    assert "3000 of 5000" in report.said


def test_targets_come_back_from_their_piece_whatever_numbers_they_hold() -> None:
    rows = [{"position": [10**400, 0, 1]}, {"name": 10**20, "position": [0.1, -0.0, 2]}]
    assert rows_of(given_rows(rows, UNITS["mm-deg"])) == rows
