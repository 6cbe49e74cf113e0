"""Events as asked for and answered.

Left out: when one begins and ends (service/events).
"""

from collections.abc import Mapping, Sequence
from typing import Literal, NamedTuple

from service.errors import UnusableValue
from service.events.kinds import KINDS, Kind
from service.events.ports import EVENT_STATES, Event, Which
from service.wire.answer_models import Open
from service.wire.paging import page_size
from service.wire.query import number, whole_number
from service.wire.stored import time_of

LONGEST_WAIT_S = 60.0
PARAMETERS = {
    "after": "Events that changed after this number; the newest if left out.",
    "arm": "Name of the arm.",
    "kind": "Kind of the event.",
    "state": "`open`, `ended` or `unknown`.",
    "page_size": "How many to list at most.",
    "wait": "Seconds to wait for an event where there is none yet.",
}


class EventAnswer(Open):
    """One event of an arm.

    It began when its measure reached `begins_at`, and ends from `ends_at` on; `peak` is the worst
    value between. `ended_at` is null while it is open, and where the service stopped watching
    before it ended (`unknown`); `seen_at` is when it was last seen to be so. `change` rises with
    each writing of any event.
    """

    id: str
    change: int
    arm: str
    kind: Kind
    state: Literal["open", "ended", "unknown"]
    began_at: str
    seen_at: str
    ended_at: str | None
    say: str
    peak: float | None
    begins_at: float | None
    ends_at: float | None
    revision: int | None
    simulated: bool


class EventListAnswer(Open):
    """Events in the order they changed; `after` asks for what follows, `more` says it is there."""

    events: list[EventAnswer]
    after: int
    more: bool


class EventQuestion(NamedTuple):
    """Which events are asked for."""

    which: Which
    after: int | None
    size: int
    wait_s: float


def event_question(parameters: Mapping[str, str]) -> EventQuestion:
    """Return what a query asks.

    Raises
    ------
    ServiceError : a parameter cannot be used.

    Examples
    --------
    >>> event_question({"after": "7", "kind": "stale"}).which
    Which(arm=None, kind='stale', state=None)
    """
    for name, known in (("kind", KINDS), ("state", EVENT_STATES)):
        said = parameters.get(name)
        if said is not None and said not in known:
            raise _unusable(name, said, f"one of: {', '.join(known)}")
    after = whole_number(parameters["after"], "after") if "after" in parameters else None
    if after is not None and after < 0:
        raise _unusable("after", after, "take after from the answer before, or begin with 0")
    wait_s = number(parameters.get("wait", "0"), "wait")
    if not 0.0 <= wait_s <= LONGEST_WAIT_S:
        raise _unusable("wait", wait_s, f"wait for 0 to {LONGEST_WAIT_S:g} seconds")
    which = Which(parameters.get("arm"), parameters.get("kind"), parameters.get("state"))
    return EventQuestion(which, after, page_size(parameters), wait_s)


def event_list_answer(events: Sequence[Event], after: int, more: bool) -> dict[str, object]:
    """Return events as listed."""
    return {"events": [event_told(one) for one in events], "after": after, "more": more}


def event_told(one: Event) -> dict[str, object]:
    """Return one event."""
    return {
        "id": one.id,
        "change": one.change,
        "arm": one.arm,
        "kind": one.kind,
        "state": one.state,
        "began_at": time_of(one.began_at),
        "seen_at": time_of(one.seen_at),
        "ended_at": None if one.ended_at is None else time_of(one.ended_at),
        "simulated": one.simulated,
        **one.document,
    }


def _unusable(name: str, value: object, way_out: str) -> UnusableValue:
    return UnusableValue(
        f"{name} cannot be used", where=(name,), location="query", value=value, way_out=way_out
    )
