"""The page for who programs a controller: what to send, where each field stands, what to do next.

All numbers on it come from the code that answers; left out: the addresses for others.
"""

from functools import cache
from html import escape

from service.problems import ANSWERS, KINDS
from service.web.examples import examples_of, folder
from service.web.live_lines import live_section
from service.web.page_frames import framed
from service.wire import reach_flat, rotation_flat
from service.wire.controller import MOST_SCALE
from service.wire.fixed_text import NUMBER_WIDTH, WIDTHS, places
from service.wire.flat import FLAGS
from service.wire.reach_lines import joint_keys

CLIENTS = {
    "armspan_pose.st": "controller",
    "read_pose.py": "client",
    "pose.sh": "client",
}
"""The clients we give away, and the folder of each."""

_MEANINGS = {
    "ok": "1: the numbers are a pose; 0: a refusal, there are none",
    "code": "0 fine, 1 to 99 a warning, from 100 a refusal; of several the highest",
    "flags": "all warnings at once, added up",
    "seq": "counts the answers of the service",
    "tag": "the whole number that was sent as tag; 0 if none was",
    "t_ms": "time of the answer: milliseconds of Unix time",
    "x": "position of the tool point",
    "r1": "orientation: the three angles of the form, in its order",
    "form": "what the angles mean: xyz-fixed unless another of the 24 was asked for",
    "units": "mm-deg, m-rad or in-deg",
    "tool_no": "number of the tool the pose is of; 0 if it has none",
    "frame_no": "number of the frame it is expressed in; 0 if it has none",
    "state": "regular, near, singular; none without joints",
    "condition": "condition number, at most 999999.9; one decimal",
    "margin": "smallest share of travel left, below 0 outside; 9.9999 without limits",
    "revision": "revision of the stored arm",
    "digest": "changes whenever the arm's table or setup does; send it as expect",
}
_OF_REACH = {
    "ok": "1: the joint values can be used; 0: a no or a refusal, there are none",
    "verdict": "reachable, outside-travel, unreachable, not-found; blank in a refusal",
    "solutions": "how many there are; this is the best of them",
    "q1": "joint values in row order, a field for each driven row",
    "margin": "smallest share of travel left at these joint values; 9.9999 without limits",
    "state": "of these joint values: regular, near, singular",
}
EXAMPLE_JOINTS = {"lean": 20, "dip": 30}
"""Of the arm with a linkage: axis 2 as shown, and axis 3 as shown, degrees."""


def client_text(name: str) -> bytes:
    """Return a client's text."""
    return (folder() / CLIENTS[name] / name).read_bytes()


@cache
def controllers_html() -> bytes:
    """Return the page."""
    case = examples_of("pose")["txt"]
    query = "&".join(f"{name}={value}" for name, value in case.query.items())
    turn = examples_of("rotation")["txt"]
    turning = "&".join(f"{name}={value}" for name, value in turn.query.items())
    there = examples_of("reach")["txt"]
    going = "&".join(f"{name}={value}" for name, value in there.query.items())
    lean, dip = EXAMPLE_JOINTS["lean"], EXAMPLE_JOINTS["dip"]
    page = _PAGE.format(
        question=escape(f"GET /v1/arms/{case.request['path']['arm']}/pose?{query}"),
        line=escape(case.answer.rstrip("\r\n")),
        turning=escape(f"GET /v1/rotations?{turning}"),
        turned=escape(turn.answer.rstrip("\r\n")),
        going=escape(f"GET /v1/arms/{there.request['path']['arm']}/reach?{going}"),
        gone=escape(there.answer.rstrip("\r\n")),
        reach_places=_reach_places(),
        live=live_section(),
        form_width=rotation_flat.WIDTHS["form"],
        units_width=rotation_flat.WIDTHS["units"],
        places=_places(),
        width=NUMBER_WIDTH,
        codes=_codes(),
        flags=_flags(),
        most_scale=MOST_SCALE,
        lean=lean,
        dip=dip,
        variable_2=90 - lean,
        variable_3=-90 - dip + lean,
        elevation=-dip,
    )
    return framed(page, "/docs/controllers", {})


def _places() -> str:
    rows = []
    meaning = ""
    for key, (first, width) in places(WIDTHS).items():
        meaning = _MEANINGS.get(key, meaning)  # y and z, r2 and r3 are as the first of them
        rows.append(
            f'<tr id="place-{key}"><td>{key}</td><td>{first}</td><td>{width}</td>'
            f"<td>{escape(meaning)}</td></tr>"
        )
    return "\n".join(rows)


def _reach_places() -> str:
    """Return the places of a line about an arm of six joints, where they are not a pose's."""
    keys = (*reach_flat.BEGIN, *joint_keys(6), *reach_flat.END)
    rows = []
    meaning = ""
    for key, (first, width) in places(keys, reach_flat.WIDTHS).items():
        # q2 to q6 are as q1.
        meaning = meaning if key.startswith("q") and key != "q1" else _OF_REACH.get(key, "as above")
        rows.append(
            f'<tr id="reach-place-{key}"><td>{key}</td><td>{first}</td><td>{width}</td>'
            f"<td>{escape(meaning)}</td></tr>"
        )
    return "\n".join(rows)


def _codes() -> str:
    by_number: dict[int, list[str]] = {number: [text] for number, text in ANSWERS.items()}
    for kind in KINDS.values():
        by_number.setdefault(kind.number, []).append(kind.title)
    return "\n".join(
        f'<tr id="code-{number}"><td>{number}</td><td>{escape("; ".join(texts))}</td></tr>'
        for number, texts in sorted(by_number.items())
    )


def _flags() -> str:
    return "\n".join(
        f'<tr id="flag-{bit}"><td>{bit}</td><td>{code}</td><td>{escape(ANSWERS[code])}</td></tr>'
        for code, bit in FLAGS.items()
    )


_PAGE = """<!doctype html>
<html lang="en" data-page="docs">
<head>
{{{{head}}}}
<title>{{{{shell.name}}}}: {{{{shell.controllers}}}}</title>
<link rel="stylesheet" href="/pages/pages.css">
{{{{preload}}}}
<script type="module" src="/pages/plain.js"></script>
</head>
<body>
{{{{header}}}}
<main id="content" class="words" tabindex="-1">
<h1>For controllers</h1>
<p>Clients to take along:
<a href="/docs/files/armspan_pose.st">armspan_pose.st</a> (IEC 61131-3 Structured Text),
<a href="/docs/files/read_pose.py">read_pose.py</a>, <a href="/docs/files/pose.sh">pose.sh</a></p>
<h2>One question, one line</h2>
<pre>{question}
{line}</pre>
<p>Pure ASCII, fields of fixed width filled up with blanks on the right, a semicolon between them,
CR LF at the end. The line has the same length whatever it says, also when it is a refusal: then
<code>ok</code> is 0 and every number of the pose is -999999.9999, at the same place.</p>
<table>
<tr><th>field</th><th>first character</th><th>characters</th><th>meaning</th></tr>
{places}
</table>
<p>The numbers of the pose have a sign, six digits, a point and four decimals. One that is larger is
refused with code 113. A Jacobian comes row by row: <code>/jacobian?row=1&amp;format=txt</code> to
<code>row=6</code>, for vx vy vz wx wy wz; in place of x to form there is one field of {width}
characters for each joint.</p>
<p>One frame in another has the same line:
<code>/v1/arms/housing-loader/relation?of=gripper&amp;in=fixture-a&amp;q=...</code>; there
<code>tool_no</code> and <code>frame_no</code> are the numbers of <code>of</code> and
<code>in</code>, and <code>state</code> is none.</p>
<h2 id="reach">Can it get there, and how</h2>
<pre>{going}
{gone}</pre>
<p>A target by <code>x y z</code> and <code>r1 r2 r3</code> in <code>frame</code>, the base if none
is said; the angles are of the <code>form</code>, xyz-fixed if none is said. Without
<code>r1 r2 r3</code> the orientation is free; <code>freedom=spin</code> frees the turn about tool
z, <code>cone=30</code> its direction too, by so many degrees. With several solutions the one
farthest from its travel limits is told, or with <code>near=</code> and joint values the nearest to
them. With <code>approach=60</code> only what the tool can also come straight to counts, from so far
back along its z, or along <code>along=0,0,-1</code> in the frame. Places for six joints; each joint
more or less moves what follows by 13 characters:</p>
<table>
<tr><th>field</th><th>first character</th><th>characters</th><th>meaning</th></tr>
{reach_places}
</table>
<p>A target that cannot be reached is an answer with status 200: <code>ok</code> is 0,
<code>code</code> 200, 201 or 202, every joint value -999999.9999. Reachable means geometry only.
Joint values from here are proposals.</p>
{live}
<h2 id="orientation">An orientation in another form</h2>
<pre>{turning}
{turned}</pre>
<p><code>ok</code> to <code>t_ms</code> stand as above. Then come the numbers of the form
<code>to</code>, three, four, or nine of a matrix by rows, each in {width} characters: degrees with
four decimals, radians and pure numbers with nine; then <code>form</code> in {form_width} and
<code>units</code> in {units_width}. What is sent as <code>r1</code> and so on are the numbers of
the form <code>from</code>. Neither form nor units are guessed.</p>
<h2>What to send</h2>
<ul>
<li>Joint values in row order: <code>q=0,-90,90</code>, or <code>q1=0&amp;q2=-90&amp;q3=90</code>.
1.5E+01, +3.0 and leading zeros are read; a decimal comma is refused with code 100. No blanks within
the address: write %20.</li>
<li>Actual values, of the drives' encoders, say where the arm is. Commanded values say where the
motion program wants it: ahead of it while it moves, and elsewhere after a fault. Never mix them,
and copy all of them within one scan.</li>
<li>Without real numbers: <code>scale=1000</code> takes thousandths as integers, and answers in
integers (1 to {most_scale}).</li>
<li>A new <code>tag</code> with each question, at most ten characters: an answer with another tag is
a late one and must be dropped.</li>
<li><code>expect=</code> the digest that was checked at commissioning: a changed table is then
refused with code 107 instead of answered from.</li>
<li><code>errors=inline</code> where the HTTP block drops the body of a status other than 200.</li>
</ul>
<h2>How old an answer is</h2>
<p>The joint values are as old as the scan that copied them, plus the time the question took. The
age of a pose is the time since that scan, not since the answer came: note it when the question is
sent. The tool has moved on by speed times age: 10 mm at 250 mm/s after 40 ms.</p>
<h2>No answer</h2>
<ul>
<li>Ask again, with a new tag: each GET is safe to repeat.</li>
<li>Ask again on status 429, 502, 503 and 504, and on no answer. On another 4xx never: it is refused
again until the question is another.</li>
<li>Read until Content-Length: head and body may come in two pieces. Answers are never chunked,
compressed or redirected. HTTP/1.0 and Connection: close will do.</li>
<li>Until an answer comes there is no pose; the last one is not the current one.
<code>/v1/ping</code> answers <code>1;seq;uptime_s</code>.</li>
</ul>
<h2>Codes</h2>
<table>
<tr><th>code</th><th>meaning</th></tr>
{codes}
</table>
<h2>Flags</h2>
<table>
<tr><th>flag</th><th>code</th><th>meaning</th></tr>
{flags}
</table>
<h2 id="linkage">An arm whose axis 3 is shown against the horizontal</h2>
<p>A parallelogram linkage keeps the forearm's direction while the upper arm moves, and the
controller then shows axis 3 against the level, not against the upper arm. A Denavit-Hartenberg
table wants the angle between the two links. A coupling says the difference:</p>
<pre>variable = theta + direction x (value shown) + sum of (ratio x value of another axis)</pre>
<p>In <code>pallet-stacker</code>, axis 2 is shown as the upper arm's lean from upright, axis 3 as
the forearm's dip below level, both positive downwards:</p>
<pre>row 2: "theta": 90,  "direction": -1
row 3: "theta": -90, "direction": -1, "couplings": [{{"axis": 2, "ratio": 1}}]</pre>
<p>Shown {lean} and {dip}: variable 2 = 90 - {lean} = <b id="variable-2">{variable_2}</b>, variable
3 = -90 - {dip} + {lean} = <b id="variable-3">{variable_3}</b>. The forearm's elevation is their
sum,
<b id="elevation">{elevation}</b> deg: {dip} deg below level. With axis 3 left alone and axis 2
moved, the sum stays: that is the check to make at the arm. If the sum moves with axis 2, the
controller shows axis 3 against the upper arm, and there is no coupling.</p>
</main>
{{{{footer}}}}
</body>
</html>
"""
