"""What is put on paper of an envelope: the drawing, areas and volume, the farthest postures.

Left out: the page (web/survey_report.py).
"""

from collections.abc import Sequence
from typing import Any

from service.storage.ports import Document, Survey
from service.surveys.kinds import Report, ReportTable

_REACHES = {"travel": "travel", "working_travel": "working travel"}


def report_of(survey: Survey, answer: Document, sheet: str) -> Report:
    """Return the tables and the drawing of an envelope that was found."""
    about = survey.about
    length, angle = about["units"].split("-")
    told = {say: answer[key] for key, say in _REACHES.items() if answer.get(key)}
    joints = len(next(iter(told.values()))["extremes"][0]["joints"])
    tables = [
        ReportTable(
            "Areas and volume",
            ("within", "of", "value", "off by at most", "found"),
            [line for say, reach in told.items() for line in _sizes(say, reach)],
        ),
        ReportTable(
            "How far the point gets",
            ("within", f"measure ({length})", "value", *(f"q{n}" for n in range(1, joints + 1))),
            [_extreme(say, one) for say, reach in told.items() for one in reach["extremes"]],
            f"Joint values as the controller shows them, in {angle}, of joints that slide in "
            f"{length}.",
        ),
    ]
    asked = [("point", about["point"]), ("within", " and ".join(told))]
    if about["resolution"] is not None:
        asked.append(("resolution", f"{about['resolution']:g} {length}"))
    notes = {f"{note[0].upper()}{note[1:]}." for reach in told.values() for note in reach["notes"]}
    below = "Shrunk to this page: read its dimensions, not its scale."
    return Report(asked, tables, drawings=[(sheet, below)], said=" ".join(sorted(notes)))


def _sizes(say: str, reach: Document) -> Sequence[Sequence[object]]:
    found = "exact" if reach["exact"] else "sampled"
    sizes = [(reach[view]["kind"], reach[view]["area"]) for view in ("section", "plan")]
    return [
        (
            say,
            of,
            _size(size["value"], size["unit"]),
            _size(size["error_bound"], size["unit"]),
            found,
        )
        for of, size in (*sizes, ("volume", reach["volume"]))
    ]


def _size(value: float, unit: str) -> str:
    """Return an area or a volume as it is read, in groups of three digits.

    Examples
    --------
    >>> _size(922021.4, "mm^2").split(), _size(0.25, "m^3")
    (['922', '021', 'mm²'], '0.25 m³')
    """
    shown = f"{value:,.0f}".replace(",", "\N{NO-BREAK SPACE}") if value >= 1e4 else f"{value:.4g}"
    return f"{shown} {unit.replace('^2', '²').replace('^3', '³')}"


def _extreme(say: str, one: dict[str, Any]) -> Sequence[object]:
    way = "greatest" if one["greatest"] else "least"
    values = (f"{round(value, 3) + 0.0:.3f}" for value in (one["value"], *one["joints"]))
    return (say, f"{way} {one['measure']}", *values)
