"""What is put on paper of an envelope: the drawing, areas and volume, the farthest postures.

Left out: the page (web/survey_report.py).
"""

from collections.abc import Sequence
from typing import Any

from kinematics.envelope.shapes import Envelope
from service.convert import UNITS, Units
from service.drawings.numbers import measure_words
from service.storage.ports import Document, Survey
from service.surveys.kinds import Report, ReportTable

_REACHES = {"travel": "travel", "working_travel": "working travel"}


def report_of(
    survey: Survey, answer: Document, envelopes: Sequence[Envelope], sheet: str
) -> Report:
    """Return the tables and the drawing of an envelope that was found."""
    about = survey.about
    length, angle = about["units"].split("-")
    told = {say: answer[key] for key, say in _REACHES.items() if answer.get(key)}
    joints = len(next(iter(told.values()))["extremes"][0]["joints"])
    tables = [
        ReportTable(
            "Areas and volume",
            ("within", "of", "area or volume", "found"),
            [line for one in envelopes for line in _sizes(_say(one), one, UNITS[about["units"]])],
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


def _sizes(say: str, found: Envelope, units: Units) -> Sequence[Sequence[object]]:
    how = "exact" if found.exact else "sampled"
    views = found.section, found.plan
    sizes = [(view.kind, measure_words(view.area, 2, units)) for view in views]
    sizes.append(("volume", measure_words(found.volume, 3, units)))
    return [(say, of, size, how) for of, size in sizes]


def _say(envelope: Envelope) -> str:
    return _REACHES["working_travel" if envelope.working else "travel"]


def _extreme(say: str, one: dict[str, Any]) -> Sequence[object]:
    way = "greatest" if one["greatest"] else "least"
    values = (f"{round(value, 3) + 0.0:.3f}" for value in (one["value"], *one["joints"]))
    return (say, f"{way} {one['measure']}", *values)
