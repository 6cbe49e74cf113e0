"""What was made of somebody's words, kept for when the same words come again.

Left out: which words are worth it, and what is made of them.
"""

import threading
from collections import OrderedDict
from typing import Generic, TypeVar

Value = TypeVar("Value")


class KeptByWords(Generic[Value]):
    """Values by every letter and digit of what was said; nothing else of a request is held.

    What has not been asked for longest goes first. For several threads.

    Examples
    --------
    >>> kept: KeptByWords[int] = KeptByWords(1)
    >>> kept.keep(b"one", 1), kept.keep(b"two", 2), kept.get(b"one")
    (1, 2, None)
    """

    def __init__(self, most: int) -> None:
        self._most = most
        self._values: OrderedDict[bytes, Value] = OrderedDict()
        self._lock = threading.Lock()

    def get(self, words: bytes) -> Value | None:
        """Return what these words gave, if it is known."""
        with self._lock:
            value = self._values.get(words)
            if value is not None:
                self._values.move_to_end(words)
            return value

    def keep(self, words: bytes, value: Value) -> Value:
        """Keep a value; return the one that was quicker, if there is one."""
        with self._lock:
            value = self._values.setdefault(words, value)
            if len(self._values) > self._most:
                self._values.popitem(last=False)
            return value
