"""What is put on paper of a survey of samples: how far they get, with which joint values, where.

Left out: the page (web/survey_report.py).
"""

from collections.abc import Mapping, Sequence
from typing import Any

from service.storage.ports import Survey, SurveyStorage
from service.surveys.kinds import Point, Report, ReportTable
from service.surveys.sample_extremes import extremes_length
from service.surveys.sample_results import summary_of, table_from

MOST_DRAWN = 3000
SAMPLE = "sample"
"""Stands for the verdict of a place that is a sample."""

_WAYS = ("least", "greatest")


def report_of(survey: Survey, store: SurveyStorage) -> Report:
    """Return the tables and points of a survey that succeeded."""
    about = survey.about
    summary: Any = summary_of(survey, store)
    told = {key: value for key, value in summary["extremes"].items() if value is not None}
    length = about["units"].split("-")[0]
    joints = [f"q{joint}" for joint in range(1, about["joints"] + 1)]
    points = _points(survey, store)
    tables = [
        ReportTable(
            "How far the tool gets",
            (f"measure ({length})", *_WAYS, "sample of the least", "of the greatest"),
            [_extreme(measure, ways) for measure, ways in told.items()],
            "Samples come a little short of the true extremes: keep a distance. Radius and height "
            "are about axis 1, height from the base's origin.",
        ),
        ReportTable(
            "Postures that get there",
            ("measure", *joints),
            [_posture(measure, way, ways) for measure, ways in told.items() for way in _WAYS],
            f"Joint values as the controller shows them, in {about['units'].split('-')[1]}, of "
            f"joints that slide in {length}.",
        ),
        ReportTable("Near singular postures", ("of the samples judged", "share"), _shares(summary)),
    ]
    asked = [
        ("samples", survey.total),
        ("seed", about["seed"]),
        ("within", about["within"].replace("-", " ")),
    ]
    said = f"The first {len(points)} of {survey.total} samples are drawn." if points else ""
    return Report(asked, tables, points, said=said)


def _extreme(measure: str, ways: Mapping[str, Any]) -> Sequence[object]:
    values = [f"{ways[way]['value']:.3f}" for way in _WAYS]
    return (measure, *values, *(ways[way]["sample"] for way in _WAYS))


def _posture(measure: str, way: str, ways: Mapping[str, Any]) -> Sequence[object]:
    return (f"{way} {measure}", *(f"{round(value, 3) + 0.0:.3f}" for value in ways[way]["joints"]))


def _shares(summary: Mapping[str, Any]) -> Sequence[Sequence[object]]:
    found = summary["singularity"]
    return [
        ("judged", found["judged"]),
        ("near singular", f"{100 * found['near']:.2f} %"),
        ("singular", f"{100 * found['singular']:.2f} %"),
    ]


def _points(survey: Survey, store: SurveyStorage) -> list[Point]:
    columns = survey.about["columns"]
    if "x" not in columns:
        return []
    head = extremes_length(survey.about["joints"])
    table = table_from(store.made(survey.id, 0), head, len(columns))
    return [Point((x, y, z), SAMPLE) for x, y, z in table[:MOST_DRAWN, :3].tolist()]
