"""Live poses told to many: each kind of telling is made once, however many listen.

Idea: a channel is what several readers have asked for in the same words. A change is put into each
reader's slot as a promise; the first that is sent makes the event, the others send the same bytes.
Left out: the event itself (``render``), and how it is sent (service/event_streams.py).
"""

from collections.abc import Callable, Hashable
from functools import partial

from service.live.live_arm import LiveArm
from service.live.live_arms import LiveArms
from service.live.samples import Standing
from service.slots import Slot

Render = Callable[[LiveArm], bytes]
Removed = Callable[[str, int], bytes]
"""Tells that an arm of a name is there no more, and the number of that change."""

_MADE_FOR_S = 0.05
"""So long an event is told to others as it is: the age in it would be wrong by more."""


class Channel:
    """One way of telling about one arm, or about all of them, to whoever listens.

    Parameters
    ----------
    name : of the arm; None for all.
    render : makes the event of an arm as it stands.
    removed : makes that of one that is there no more, for who follows all.
    """

    def __init__(self, arms: LiveArms, name: str | None, render: Render, removed: Removed) -> None:
        self._arms, self._name, self._render, self._removed = arms, name, render, removed
        self._slots: list[Slot] = []
        self._made: dict[str, tuple[int, float, bytes]] = {}
        self._events: dict[str, Callable[[], bytes]] = {}
        self.leave = arms.follow(name, self._changed)

    def __len__(self) -> int:
        """Return how many listen."""
        return len(self._slots)

    def listen(self, slot: Slot, after: int) -> None:
        """Fill a slot from now on, beginning with what changed after ``after``."""
        self._slots.append(slot)
        if after > self._arms.change:
            # Counted by a former process, whose clock was ahead or which saw more a second.
            after = 0
        names = self._arms.names() if self._name is None else [self._name]
        for name in names:
            live = self._arms.get(name)
            if live is not None and live.standing.change > after:
                slot.put(name, self._event_of(name))

    def let_go(self, slot: Slot) -> None:
        """Fill a slot no more."""
        self._slots.remove(slot)

    def _changed(self, name: str, standing: Standing | None) -> None:
        if standing is None:
            self._made.pop(name, None)
            self._events.pop(name, None)
            gone = partial(self._removed, name, self._arms.change)
            for slot in self._slots:
                slot.put(name, gone) if self._name is None else slot.end()
            return
        event = self._event_of(name)
        for slot in self._slots:
            slot.put(name, event)

    def _event_of(self, name: str) -> Callable[[], bytes]:
        event = self._events.get(name)
        if event is None:
            event = self._events[name] = partial(self._made_now, name)
        return event

    def _made_now(self, name: str) -> bytes:
        live = self._arms.get(name)
        if live is None:
            return b""
        now, change = self._arms.clock.steady_s(), live.standing.change
        made = self._made.get(name)
        if made is None or made[0] != change or now - made[1] > _MADE_FOR_S:
            made = self._made[name] = (change, now, self._render(live))
        return made[2]


class Channels:
    """The channels that somebody listens to, by what was asked for."""

    def __init__(self, arms: LiveArms, removed: Removed) -> None:
        self._arms, self._removed = arms, removed
        self._open: dict[Hashable, Channel] = {}

    def __len__(self) -> int:
        """Return how many ways of telling are asked for."""
        return len(self._open)

    def attach(
        self, name: str | None, choice: Hashable, render: Render, after: int, slot: Slot
    ) -> Callable[[], None]:
        """Have a slot filled by the channel of a choice; return what ends that."""
        key = (name, choice)
        channel = self._open.get(key)
        if channel is None:
            channel = self._open[key] = Channel(self._arms, name, render, self._removed)
        channel.listen(slot, after)

        def leave() -> None:
            channel.let_go(slot)
            if not channel:
                channel.leave()
                del self._open[key]

        return leave
