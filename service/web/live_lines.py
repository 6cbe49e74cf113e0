"""What the page for controllers says of live values: what to send, what comes back, and where.

Left out: the rest of the page (controllers_page.py).
"""

from collections.abc import Iterable, Mapping
from html import escape

from service.wire import fixed_text, joints_answers, live_told
from service.wire.fixed_text import places

_STAMP = ("ok", "code", "flags", "seq", "tag", "t_ms")
_TOLD = (*_STAMP, "accepted", "quality", "reason", "revision", "digest")
_MEANINGS = {
    "accepted": "1: it stands; 0: it was dropped or is doubted, and reason says why",
    "age_ms": "milliseconds since it was so, at most 9999999",
    "quality": "good; uncertain: the last values were doubted; bad: none come any more",
    "reason": "blank, stale, outside-travel, jump, not-finite, time-in-future, time-too-old, "
    "joints-changed; of a value that was dropped repeated, out-of-order, superseded",
}

_SECTION = """<h2 id="live">Joint values in, the live pose out</h2>
<pre>POST /v1/arms/housing-loader/joints?q=25,-70,95,30,-40,15&amp;sequence=7&amp;format=txt
GET /v1/arms/housing-loader/live?tool=1&amp;format=txt</pre>
<p>Send what the controller shows, by query or as a form, at an even pace. <code>sequence</code> is
a number that rises: what comes twice or late is dropped, so asking again does no harm.
<code>sampled_ms</code> is the time of measuring by the controller's own clock, in milliseconds of
Unix time; how far it is off is found out, and an old value shows its age. A value outside travel,
faster than top speed or not a number (<code>q=nan,...</code>) is doubted: the last good pose
stays, its <code>quality</code> is uncertain. After three periods without a value it is bad. The
line that comes back, after <code>ok</code> to <code>t_ms</code>:</p>
<table>
<tr><th>field</th><th>first character</th><th>characters</th><th>meaning</th></tr>
{told}
</table>
<p>The live pose is the line of a pose with two fields more before <code>revision</code>:</p>
<table>
<tr><th>field</th><th>first character</th><th>characters</th><th>meaning</th></tr>
{live}
</table>
<p><code>wait=5</code> answers as soon as something changes, after 5 seconds at the latest;
<code>at=</code> and a time asks about the last ten minutes. A live pose may be late, stale or
simulated, and is for display alone.</p>"""


def live_section() -> str:
    """Return the section of the page."""
    of_pose = list(fixed_text.WIDTHS)
    before = of_pose.index("revision")
    of_live = (*of_pose[:before], "age_ms", "quality", *of_pose[before:])
    return _SECTION.format(
        told=_rows("joints-place", _TOLD, joints_answers.WIDTHS, _TOLD[len(_STAMP) :]),
        live=_rows("live-place", of_live, live_told.WIDTHS, of_live[before:]),
    )


def _rows(name: str, keys: Iterable[str], widths: Mapping[str, int], shown: Iterable[str]) -> str:
    """Return the rows of those fields of a line that are shown."""
    found = places(keys, widths)
    return "\n".join(
        f'<tr id="{name}-{key}"><td>{key}</td><td>{found[key].first}</td>'
        f"<td>{found[key].width}</td><td>{escape(_MEANINGS.get(key, 'as above'))}</td></tr>"
        for key in shown
    )
