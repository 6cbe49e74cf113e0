"""Asks Armspan where the tool of an arm is: what armspan_pose.st does, for a computer.

Needs nothing but Python: ``read_pose.py http://127.0.0.1:8017 housing-loader 25,-70,95,30,-40,15``.
Not a safety function; the cautions at the head of armspan_pose.st hold here too.
"""

import argparse
import sys
import time
import urllib.error
import urllib.request
from collections.abc import Sequence

# First character, counted from 1, and number of characters of each field.
PLACES = {
    "ok": (1, 1),
    "code": (3, 3),
    "flags": (7, 5),
    "seq": (13, 10),
    "tag": (24, 10),
    "t_ms": (35, 13),
    "x": (49, 12),
    "y": (62, 12),
    "z": (75, 12),
    "r1": (88, 12),
    "r2": (101, 12),
    "r3": (114, 12),
    "form": (127, 11),
    "units": (139, 6),
    "tool_no": (146, 3),
    "frame_no": (150, 3),
    "state": (154, 8),
    "condition": (163, 9),
    "margin": (173, 7),
    "revision": (181, 6),
    "digest": (188, 8),
}
LINE_LENGTH = 195
NUMBERS = ("x", "y", "z", "r1", "r2", "r3", "condition", "margin")
WHOLE = ("ok", "code", "flags", "seq", "tag", "t_ms", "tool_no", "frame_no", "revision")
MOST_URL = 255
MOST_ASKED = 3
AGAIN = (429, 502, 503, 504)
PATIENCE_S = 2.0

Fields = dict[str, str | int | float]


def pose_url(
    server: str, arm: str, joints: Sequence[float], tag: int, tool: int = 0, frame: int = 0
) -> str:
    """Return the address of the question; 0 stands for the arm's default tool, and its base."""
    url = f"{server}/v1/arms/{arm}/pose?format=txt&tag={tag}"
    if tool:
        url += f"&tool={tool}"
    if frame:
        url += f"&frame={frame}"
    url += "&q=" + ",".join(f"{joint:.7g}" for joint in joints)
    if len(url) > MOST_URL:
        raise ValueError(f"the address has {len(url)} characters, more than {MOST_URL}")
    return url


def fields_of(line: str) -> Fields:
    """Return the fields of an answer, cut by position."""
    if len(line) < LINE_LENGTH or line[PLACES["code"][0] - 2] != ";":
        raise ValueError(f"this is no line of a pose: {line[:60]!r}")
    fields: Fields = {}
    for name, (first, width) in PLACES.items():
        text = line[first - 1 : first - 1 + width].rstrip(" ")
        fields[name] = float(text) if name in NUMBERS else int(text) if name in WHOLE else text
    return fields


def asked(url: str) -> tuple[int, str]:
    """Return status and body, or status 0 when nobody answered."""
    try:
        with urllib.request.urlopen(url, timeout=PATIENCE_S) as answer:
            return answer.status, answer.read().decode("ascii")
    except urllib.error.HTTPError as refusal:
        with refusal:
            return refusal.code, refusal.read().decode("utf-8")
    except OSError:
        return 0, ""


def read_pose(
    server: str, arm: str, joints: Sequence[float], tool: int = 0, frame: int = 0
) -> Fields:
    """Return the fields of the answer; ``ok`` is 0 when it is a refusal.

    No answer, 429, 502, 503 and 504 are asked again, with a new tag; another refusal is not.
    """
    status = 0
    for attempt in range(MOST_ASKED):
        tag = (time.time_ns() // 1_000_000 + attempt) % 1_000_000_000
        time.sleep(0.2 * attempt)
        status, line = asked(pose_url(server, arm, joints, tag, tool, frame))
        if status != 0 and status not in AGAIN:
            fields = fields_of(line)
            if fields["tag"] == tag:
                return fields
    raise ConnectionError(f"no answer from {server} (last status: {status or 'none'})")


def main() -> int:
    """Print the fields, one a line; return 0 for a pose, 1 for a refusal, 2 for no answer."""
    parser = argparse.ArgumentParser(description="Where is the tool of an arm?")
    parser.add_argument("server")
    parser.add_argument("arm")
    parser.add_argument("joints", help="joint values with commas; write -- before a negative one")
    parser.add_argument("--tool", type=int, default=0)
    parser.add_argument("--frame", type=int, default=0)
    given = parser.parse_args()
    try:
        joints = [float(joint) for joint in given.joints.split(",")]
        fields = read_pose(given.server, given.arm, joints, given.tool, given.frame)
    except (ConnectionError, ValueError) as error:
        print(error, file=sys.stderr)
        return 2
    for name, value in fields.items():
        print(f"{name} {value}")
    return 0 if fields["ok"] else 1


if __name__ == "__main__":
    sys.exit(main())
