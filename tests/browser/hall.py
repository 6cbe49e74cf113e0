"""A hall of made arms: one in each state a page can meet, and one whose words are hostile.

Idea: everything is stored and fed through the public interface. Periods are so long that nothing
goes stale of itself during a run, but for the one arm that is to be stale. Left out: motion.
"""

import json
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import httpx

ROOT = Path(__file__).resolve().parents[2]
LONG_MS = 3_600_000
PATTERN = json.loads((ROOT / "service/demo/arms/housing-loader.json").read_text("utf-8"))

HOSTILE_SOURCE = "<svg/onload=document.title='taken'>"
HOSTILE = (
    "<script>document.title='taken'</script>"
    "<img src=x onerror=\"document.title='taken'\">"
    "'\"><iframe src=javascript:parent.document.title='taken'></iframe>{{7*7}}\u202e&lt;b&gt;"
)
"""Each of its parts would rename the page that took it for more than words."""

LONGEST_NAME = "the-longest-name-that-can-be-given-".ljust(48, "z")


@dataclass(frozen=True, slots=True)
class Placed:
    """An arm of the hall.

    Attributes
    ----------
    fed : what is sent, one after another: the joint values and, if so, further fields.
    words : what the arm's document says beside the pattern's.
    """

    fed: Sequence[tuple[Sequence[float | None], Mapping[str, Any]]] = ()
    words: Mapping[str, Any] = field(default_factory=dict)


UPRIGHT = (10.0, -80.0, 80.0, 20.0, -40.0, 15.0)
HALL: dict[str, Placed] = {
    "regular": Placed([(UPRIGHT, {})]),
    "near": Placed([((10.0, -80.0, 80.0, 20.0, 2.0, 15.0), {})]),
    "singular": Placed([((10.0, -80.0, 80.0, 20.0, 0.0, 15.0), {})]),
    "off-work": Placed([((155.0, -80.0, 80.0, 20.0, -40.0, 15.0), {})]),
    "beyond": Placed([(UPRIGHT, {}), ((170.0, -80.0, 80.0, 20.0, -40.0, 15.0), {})]),
    "leapt": Placed([(UPRIGHT, {}), ((-100.0, -20.0, 80.0, 20.0, -40.0, 15.0), {})]),
    "stale": Placed([(UPRIGHT, {"period_ms": 20})]),
    "drives-silent": Placed([(UPRIGHT, {}), ((None, -80.0, 80.0, 20.0, -40.0, 15.0), {})]),
    "simulated": Placed([(UPRIGHT, {"simulated": True})]),
    "never": Placed(),
    "hostile": Placed(
        [(UPRIGHT, {"source": HOSTILE_SOURCE})], {"title": HOSTILE[:200], "notes": HOSTILE}
    ),
    LONGEST_NAME: Placed([(UPRIGHT, {})], {"title": "W" * 200}),
}


def fill(url: str, hall: Mapping[str, Placed] = HALL) -> None:
    """Store the arms of a hall and send what they are fed."""
    with httpx.Client(base_url=url, timeout=30) as client:
        for name, placed in hall.items():
            _accepted(client.post("/v1/arms", json={**PATTERN, "name": name, **placed.words}))
            for joints, further in placed.fed:
                feed(client, name, joints, **further)


def feed(client: httpx.Client, arm: str, joints: Sequence[float | None], **further: Any) -> None:
    """Send joint values as a controller would."""
    body = {"joints": joints, "period_ms": LONG_MS, "source": "cell-controller", **further}
    _accepted(client.put(f"/v1/arms/{arm}/joints", json=body))


def _accepted(answer: httpx.Response) -> None:
    assert answer.status_code < 300, answer.text
