"""A survey on paper: one page of HTML with nothing outside of it, for A4 and Letter.

Drawn in two views in first-angle projection: seen from the front (x, z), and below it from above
(x, y); verdicts are told apart by the form of their marks, so that black and white will do. No
script; the one style sheet is allowed by its hash. Left out: what is told (service/surveys).
"""

import base64
import hashlib
from collections.abc import Mapping, Sequence
from datetime import datetime
from html import escape
from typing import Any

from service.cautions import CAUTIONS

MEDIA_TYPE = "text/html; charset=utf-8"
_STYLE = """@page{margin:16mm}
body{font:10pt/1.35 sans-serif;color:#000;background:#fff;max-width:178mm;margin:0 auto}
h1{font-size:15pt;margin:0 0 2mm}h2{font-size:11.5pt;margin:6mm 0 1.5mm;break-after:avoid}
table{border-collapse:collapse;width:100%;font-size:9pt}thead{display:table-header-group}
tr{break-inside:avoid}td,th{border:.2mm solid #888;padding:.6mm 1.5mm;text-align:left;
vertical-align:top;overflow-wrap:anywhere}td.n{text-align:right;font-variant-numeric:tabular-nums}
.cautions{border:.5mm solid #000;padding:2mm 3mm;font-size:8.5pt}.cautions p{margin:.6mm 0}
figure{margin:0;break-inside:avoid}svg{width:100%;height:auto}svg.mark{width:3.2mm;height:3.2mm}figcaption{font-size:8.5pt}"""
POLICY = (
    "default-src 'none'; style-src 'sha256-"
    + base64.b64encode(hashlib.sha256(_STYLE.encode()).digest()).decode("ascii")
    + "'; base-uri 'none'; form-action 'none'; frame-ancestors 'self'"
)
_MARKS = {
    "reachable": '<circle r="3" fill="none" stroke="#000"/>',
    "outside-travel": '<rect x="-3" y="-3" width="6" height="6" fill="none" stroke="#000"/>',
    "unreachable": '<path d="M-3-3L3 3M-3 3L3-3" stroke="#000"/>',
    "not-found": '<path d="M0-4L4 3H-4Z" fill="none" stroke="#000"/>',
    "refused": '<path d="M-3 0H3" stroke="#000"/>',
}
_WIDE, _HIGH, _EDGE = 700.0, 420.0, 40.0


def report_html(
    survey: Mapping[str, Any],
    arm: Mapping[str, Any],
    tables: Sequence[tuple[str, Sequence[str], Sequence[Sequence[object]]]],
    points: Sequence[tuple[tuple[float, float, float], str]],
    said: str,
) -> bytes:
    """Return the page.

    Parameters
    ----------
    survey : as ``SurveyDetails``; arm : its document as stored.
    """
    name = survey["title"] or f"Survey {survey['id']}"
    parts = [
        f'<!doctype html><html lang="en"><meta charset="utf-8"><title>{escape(name)}</title>',
        f"<style>{_STYLE}</style><h1>{escape(name)}</h1>",
        _table((), _survey_lines(survey)),
        f'<h2>Cautions</h2><div class="cautions">{_paragraphs(CAUTIONS)}</div>',
        f"<h2>Arm {escape(str(arm['name']))}</h2>",
        _table((), _arm_lines(survey, arm)),
        f"<h2>Table of rows ({escape(arm['convention'])} convention)</h2>",
        _table(*_rows_of(arm)),
        _drawings(points, survey["units"].split("-")[0]) if points else "",
    ]
    for title, head, lines in tables:
        parts += [f"<h2>{escape(title)}</h2>", _table(head, lines) if lines else "<p>None.</p>"]
    parts.append(f"<p>{escape(said)}</p></html>")
    return "".join(parts).encode()


def _survey_lines(survey: Mapping[str, Any]) -> list[tuple[str, object]]:
    return [
        ("survey", f"{survey['id']} ({survey['kind']})"),
        ("taken in, begun, finished (UTC)", "; ".join(map(_moment, _times_of(survey)))),
        ("targets", survey["total"]),
        ("tool, frame", f"{survey['about']['tool']}, {survey['about']['frame']}"),
        ("answers rest on", survey["about"]["method"]["say"]),
        ("units", survey["units"]),
        ("software", f"armspan {survey['software']}"),
    ]


def _times_of(survey: Mapping[str, Any]) -> list[str | None]:
    return [survey[key] for key in ("created_at", "started_at", "finished_at")]


def _moment(text: str | None) -> str:
    return "-" if text is None else f"{datetime.fromisoformat(text):%Y-%m-%d %H:%M:%S}"


def _arm_lines(survey: Mapping[str, Any], arm: Mapping[str, Any]) -> list[tuple[str, object]]:
    identity = survey["arm"]
    revision = identity["revision"]
    return [
        ("title", arm.get("title") or "-"),
        ("revision", "given whole in the request" if revision is None else revision),
        ("digest", identity["digest"]),
        ("table digest", identity["table_digest"]),
        ("set-up digest", identity["setup_digest"]),
        ("status", arm.get("status") or "-"),
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
    return "-" if value is None else value


def _table(head: Sequence[str], lines: Sequence[Sequence[object]]) -> str:
    shown = "".join(f"<th>{escape(cell)}</th>" for cell in head)
    begin = f"<thead><tr>{shown}</tr></thead>" if head else ""
    return f"<table>{begin}{''.join(map(_line, lines))}</table>"


def _line(cells: Sequence[object]) -> str:
    shown = (
        f'<td class="n">{cell}</td>' if isinstance(cell, int) else f"<td>{escape(str(cell))}</td>"
        for cell in cells
    )
    return f"<tr>{''.join(shown)}</tr>"


def _paragraphs(texts: Sequence[str]) -> str:
    return "".join(f"<p>{escape(text)}</p>" for text in texts)


def _drawings(points: Sequence[tuple[tuple[float, float, float], str]], length: str) -> str:
    """Return both views at one scale, x to the right in both."""
    front = [(place[0], place[2], verdict) for place, verdict in points]
    above = [(place[0], place[1], verdict) for place, verdict in points]
    spans = [_span(axis) for axis in zip(*(place for place, _ in points), strict=True)]
    wide = max(high - low for low, high in spans) or 1.0
    # A round length that is a tenth of the drawing or more, and less than all of it.
    bar = 10 ** (len(str(int(wide))) - 1) if wide >= 1 else wide
    there = {verdict for _, verdict in points}
    legend = " ".join(
        f'<svg class="mark" viewBox="-6 -6 12 12">{mark}</svg> {verdict.replace("-", " ")};'
        for verdict, mark in _MARKS.items()
        if verdict in there
    )
    views = _view(front, spans[0], spans[2], wide, bar, f"z over x, bar {bar:g} {length}")
    views += _view(above, spans[0], spans[1], wide, bar, f"y over x, bar {bar:g} {length}")
    return (
        "<h2>Where the targets are</h2>"
        f"<figure>{views}<figcaption>{legend} first-angle projection: seen from the front, and "
        "below it from above; one scale.</figcaption></figure>"
    )


def _span(numbers: Sequence[float]) -> tuple[float, float]:
    return min(numbers), max(numbers)


def _view(
    points: Sequence[tuple[float, float, str]],
    across: tuple[float, float],
    upward: tuple[float, float],
    wide: float,
    bar: float,
    title: str,
) -> str:
    scale = min(_WIDE, _HIGH) / wide
    height = (upward[1] - upward[0]) * scale + 2 * _EDGE
    marks = "".join(
        f'<g transform="translate({_EDGE + (x - across[0]) * scale:.1f} '
        f'{height - _EDGE - (y - upward[0]) * scale:.1f})">{_MARKS[verdict]}</g>'
        for x, y, verdict in points
    )
    return (
        f'<svg viewBox="0 0 {_WIDE + 2 * _EDGE:.0f} {height:.0f}" role="img">'
        f"<title>{escape(title)}</title>{marks}"
        f'<path d="M{_EDGE} {height - 12:.1f}h{bar * scale:.1f}" stroke="#000" stroke-width="2"/>'
        f'<text x="{_EDGE}" y="{height - 18:.1f}" '
        f'font-size="12">{escape(title)}</text></svg>'
    )
