"""A survey on paper: one page of HTML with nothing outside of it, for A4 and Letter.

No script; the one style sheet is allowed by its hash. Long lists go on over pages with their heads
again; nothing is told by colour. Left out: what is told (service/surveys), and the drawing of
places (survey_drawing.py).
"""

import base64
import hashlib
from collections.abc import Mapping, Sequence
from datetime import datetime
from html import escape
from typing import Any

from service.cautions import CAUTIONS
from service.web.survey_drawing import two_views

MEDIA_TYPE = "text/html; charset=utf-8"
_STYLE = """@page{margin:14mm 16mm 16mm;
@bottom-right{content:"page " counter(page) " of " counter(pages);font:8pt sans-serif}}
body{font:10pt/1.35 sans-serif;color:#000;background:#fff;max-width:178mm;margin:0 auto}
h1{font-size:16pt;margin:0;overflow-wrap:anywhere}p{margin:1mm 0}
p.sub{margin:.5mm 0 3mm;border-bottom:.5mm solid #000;padding-bottom:2mm}
h2{font-size:11.5pt;margin:6mm 0 1.5mm;break-after:avoid}
table{border-collapse:collapse;width:100%;font-size:9pt}thead{display:table-header-group}
tr{break-inside:avoid}td,th{border:.2mm solid #888;padding:.6mm 1.5mm;text-align:left;
vertical-align:top;overflow-wrap:break-word}thead th{border-bottom:.5mm solid #000}
table.list td:first-child{white-space:nowrap}
table.said td{overflow-wrap:anywhere}table.said th{width:42mm;font-weight:normal}
td.n{text-align:right;font-variant-numeric:tabular-nums}p.note{font-size:8.5pt}
.cautions{border:.5mm solid #000;padding:2mm 3mm;font-size:8.5pt;break-inside:avoid}
.cautions p{margin:.6mm 0}figcaption{font-size:8.5pt}
figure{margin:0;break-inside:avoid}
figure svg{display:block;max-width:100%;height:auto;margin:0 auto}
figure svg.mark{display:inline;width:3.2mm;height:3.2mm;vertical-align:-.5mm}
@media screen{body{padding:4mm}}
@media screen and (max-width:186mm){table.list{display:block;overflow-x:auto}}
@media print{body{max-width:none;padding-right:.5mm}
figure.sheet{position:relative;height:243mm;break-before:page}
figure.sheet svg{position:absolute;top:0;left:4mm;width:236mm;height:auto;max-width:none;
transform-origin:0 0;transform:translate(0,236mm) rotate(-90deg)}
figure.sheet figcaption{position:absolute;bottom:0}}"""
POLICY = (
    "default-src 'none'; style-src 'sha256-"
    + base64.b64encode(hashlib.sha256(_STYLE.encode()).digest()).decode("ascii")
    + "'; base-uri 'none'; form-action 'none'; frame-ancestors 'self'"
)
Lines = Sequence[Sequence[object]]


def report_html(
    survey: Mapping[str, Any],
    arm: Mapping[str, Any],
    asked: Sequence[tuple[str, object]],
    tables: Sequence[tuple[str, Sequence[str], Lines, str]],
    points: Sequence[tuple[tuple[float, float, float], str]],
    drawings: Sequence[tuple[str, str]],
    said: str,
) -> bytes:
    """Return the page.

    Parameters
    ----------
    survey : as ``SurveyDetails``; arm : its document as stored.
    asked, tables, points, drawings, said : as in ``service.surveys.kinds.Report``.
    """
    name = survey["title"] or f"Survey {survey['id']}"
    shown = [
        f'<figure class="sheet">{svg}<figcaption>{escape(below)}</figcaption></figure>'
        for svg, below in drawings
    ]
    if points:
        shown.append("<h2>Where</h2>")
        shown.append(two_views(points, survey["units"].split("-")[0], survey["about"]["frame"]))
    head = f"{survey['kind'].replace('-', ' ')}, arm {arm['name']}"
    finished = f"Finished {_moment(survey['finished_at'])} UTC."
    parts = [
        '<!doctype html><html lang="en"><meta charset="utf-8">',
        f'<meta name="viewport" content="width=device-width"><title>{escape(name)}</title>',
        f"<style>{_STYLE}</style><h1>{escape(name)}</h1>",
        f'<p class="sub">Survey report: {escape(head)}. {finished}</p>',
        _said([*asked, *_survey_lines(survey)]),
        f'<h2>Cautions</h2><div class="cautions">{_paragraphs(CAUTIONS)}</div>',
        *(_told(*table) for table in tables[:1]),
        *shown,
        *(_told(*table) for table in tables[1:]),
        f'<p class="note">{escape(said)}</p>' if said else "",
        f"<h2>Arm {escape(str(arm['name']))}</h2>",
        _said(_arm_lines(survey, arm)),
        f"<h2>Table of rows ({escape(arm['convention'])} convention, {escape(arm['units'])})</h2>",
        _table(*_rows_of(arm)),
        "</html>",
    ]
    return "".join(parts).encode()


def _survey_lines(survey: Mapping[str, Any]) -> list[tuple[str, object]]:
    about = survey["about"]
    method = about.get("method")
    times = (survey[key] for key in ("created_at", "started_at", "finished_at"))
    return [
        ("arm", f"{survey['arm']['name']}, {_revision(survey)}"),
        ("tool", _tool(about["tool"])),
        ("frame", about["frame"]),
        ("units", survey["units"]),
        *([("answers rest on", method["say"])] if method else []),
        ("survey", f"{survey['id']} ({survey['kind']})"),
        ("taken in, begun, finished (UTC)", "; ".join(map(_moment, times))),
        ("software", f"armspan {survey['software']}"),
    ]


def _tool(shown: object) -> str:
    """Return a tool by its name; one that was given by its numbers, with them."""
    if not isinstance(shown, dict):
        return "flange" if shown is None else str(shown)
    place = ", ".join(f"{number:g}" for number in shown.get("position", ()))
    return f"given in the request, at {place} of the flange" if place else "given in the request"


def _revision(survey: Mapping[str, Any]) -> str:
    revision = survey["arm"]["revision"]
    return "given whole in the request" if revision is None else f"revision {revision}"


def _moment(text: str | None) -> str:
    return "-" if text is None else f"{datetime.fromisoformat(text):%Y-%m-%d %H:%M:%S}"


def _arm_lines(survey: Mapping[str, Any], arm: Mapping[str, Any]) -> list[tuple[str, object]]:
    identity = survey["arm"]
    return [
        ("title", arm.get("title") or "-"),
        ("revision", _revision(survey)),
        ("digest", identity["digest"]),
        ("table digest", identity["table_digest"]),
        ("set-up digest", identity["setup_digest"]),
        ("status", arm.get("status") or "-"),
        *([("notes", arm["notes"])] if arm.get("notes") else []),
    ]


def _rows_of(arm: Mapping[str, Any]) -> tuple[Sequence[str], list[list[object]]]:
    keys = ("joint", "a", "alpha", "d", "theta", "direction", "travel", "working_travel")
    head = ("row", *(key.replace("_", " ") for key in keys))
    return head, [
        [number, *(_cell(row.get(key)) for key in keys)]
        for number, row in enumerate(arm["rows"], start=1)
    ]


def _cell(value: object) -> object:
    if isinstance(value, list):
        return " to ".join(f"{number:g}" for number in value)
    if isinstance(value, float):
        return f"{value:.10g}"
    return "-" if value is None else str(value)


def _told(title: str, head: Sequence[str], lines: Lines, said: str) -> str:
    note = f'<p class="note">{escape(said)}</p>' if said else ""
    return f"<h2>{escape(title)}</h2>{_table(head, lines) if lines else '<p>None.</p>'}{note}"


def _said(lines: Sequence[tuple[str, object]]) -> str:
    shown = "".join(
        f"<tr><th>{escape(name)}</th><td>{escape(str(value))}</td></tr>" for name, value in lines
    )
    return f'<table class="said">{shown}</table>'


def _table(head: Sequence[str], lines: Lines) -> str:
    shown = "".join(f"<th>{escape(cell)}</th>" for cell in head)
    return (
        f'<table class="list"><thead><tr>{shown}</tr></thead>{"".join(map(_line, lines))}</table>'
    )


def _line(cells: Sequence[object]) -> str:
    shown = (
        f'<td class="n">{cell}</td>' if isinstance(cell, int) else f"<td>{escape(str(cell))}</td>"
        for cell in cells
    )
    return f"<tr>{''.join(shown)}</tr>"


def _paragraphs(texts: Sequence[str]) -> str:
    return "".join(f"<p>{escape(text)}</p>" for text in texts)
