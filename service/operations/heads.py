"""Which revision of an arm is the newest, without asking the store when nothing was written.

Left out: what is in a revision.
"""

from dataclasses import dataclass

from service.storage.ports import Storage


@dataclass(frozen=True, slots=True)
class _Looked:
    """Head numbers looked up while the store was in one state."""

    state: int | None
    numbers: dict[str, int]


class Heads:
    """Head numbers of a store, looked up again whenever anything was written to it."""

    def __init__(self, storage: Storage) -> None:
        self._storage = storage
        self._looked = _Looked(None, {})

    @property
    def at_once(self) -> bool:
        """Whether a look takes no more than a look into a local file."""
        return self._storage.state() is not None

    def number(self, name: str) -> int | None:
        """Return the newest revision's number; None for a name that is unknown or hidden."""
        state = self._storage.state()
        if state is None:
            return self._storage.head_number(name)
        looked = self._looked
        if looked.state != state:
            looked = self._looked = _Looked(state, {})
        number = looked.numbers.get(name)
        if number is None:
            # Read after the state: if it changed in between, the next look sees another state.
            number = self._storage.head_number(name)
            if number is not None:
                looked.numbers[name] = number
        return number
