"""Answers that wait for a change, and say which one they know: ETag, 304, `wait`, `after`.

Left out: what is told of it.
"""

from starlette.requests import Request

from service.event_streams import EventStreams
from service.live.live_arms import LiveArms
from service.slots import Slot
from service.wire.preconditions import if_none_match

NOT_STORED = {"cache-control": "no-cache"}


class Known:
    """What an asker says it knows: by an ETag, or by the number of a change."""

    def __init__(self, request: Request, after: int | None) -> None:
        self._tags, self._after = if_none_match(request), after

    def covers(self, change: int) -> bool:
        """Return whether a change is known."""
        if self._after == change:
            return True
        return self._tags is not None and (self._tags == "*" or str(change) in self._tags)

    @property
    def is_something(self) -> bool:
        """Whether anything is said to be known."""
        return self._tags is not None or self._after is not None


def tag_of(change: int) -> dict[str, str]:
    """Return the ETag of a change: a weak one, as the age in an answer is another each time."""
    return {"etag": f'W/"{change}"'}


async def wait_for_change(
    request: Request, name: str | None, known: Known, change: int | None, most_s: float
) -> None:
    """Return when an arm (None: any) is not as the asker knows it, or after so many seconds.

    Parameters
    ----------
    change : the last one there is; None where nothing came yet.
    """
    if known.is_something and change is not None and not known.covers(change):
        return
    arms: LiveArms = request.app.state.live
    streams: EventStreams = request.app.state.streams
    slot = Slot()
    leave = arms.follow(name, lambda changed, _: slot.put(changed, bytes))
    try:
        await streams.wait(slot, most_s, request.receive)
    finally:
        leave()
