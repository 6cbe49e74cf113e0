"""Live poses as models, for the document of the interface.

Left out: how they are made (live_told.py).
"""

from datetime import datetime
from typing import Any, Literal

from pydantic import RootModel

from service.wire.answer_models import Open
from service.wire.controller_answers import FlatPose, InlineRefusal, SinglePose

QualityName = Literal["good", "uncertain", "bad"]


class Speeds(Open):
    """Speeds by the last samples, each in its unit per second; the tool's in axes of `frame`."""

    joints: list[float]
    linear: list[float]
    angular: list[float]
    tool_speed: float
    turning_speed: float


class LiveInput(Open):
    """What came last and could be relied on; `clock_offset_ms` is the source's clock less ours."""

    source: str
    tag: int
    sequence: int | None
    sampled_at: datetime | None
    received_at: datetime
    happened_at: datetime
    late_ms: float
    clock_offset_ms: float | None
    period_ms: float | None
    counts: dict[str, int]


class AtTime(Open):
    """The moment in the past that was asked about, and what it was found from."""

    time: datetime
    interpolated: bool
    between: list[datetime] | None


class LivePose(SinglePose):
    """A live pose; `change` rises with everything that becomes known of any arm."""

    quality: QualityName
    reason: str
    say: str
    age_ms: int
    simulated: bool
    change: int
    joints: list[float]
    speeds: Speeds | None
    input: LiveInput | None
    at: AtTime | None


class FlatLive(FlatPose):
    """A live pose on one level: a flat pose with two keys more before `revision`."""

    age_ms: int
    quality: QualityName


class LiveReply(RootModel[LivePose | FlatLive | InlineRefusal]):
    """A live pose, nested or flat, or a refusal with status 200."""


class LiveList(Open):
    """All arms of which values came, each as `/v1/arms/{arm}/live` tells it, or refused.

    `arms_without_values` counts the stored arms of which none came.
    """

    arms: list[Any]
    arms_without_values: int
