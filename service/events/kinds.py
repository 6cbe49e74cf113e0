"""The kinds of events: what is measured, at which value one begins and at which it ends.

An event ends later than it began: a value that trembles about one threshold would begin and end
events without number. Left out: watching (detector.py).
"""

from typing import Literal, NamedTuple, get_args

Kind = Literal[
    "near-singular",
    "singular",
    "outside-working-travel",
    "stale",
    "revision-changed",
    "source-changed",
]
KINDS: tuple[Kind, ...] = get_args(Kind)

NEAR_ENDS = 1.25
"""Near singular ends at so many times the value it begins at: an arm that is led along the border
comes and goes by a tenth of that."""

SINGULAR_ENDS = 0.1
"""Singular ends at this share of the value at which near singular begins. It begins at zero, as
far as doubles tell: an encoder's last digits at the place move the value by a hundredth of this."""

WORKING_ENDS = 0.01
"""Outside working travel ends that share of it inside, 3 degrees of 300: a controller that holds an
axis at the border moves it by less."""

FRESH_TO_END = 3
"""Stale ends with so many values in a row, as it began with so many that did not come."""


TOLD_AGAIN_S = 60.0
"""An event that stays open is written again that often: if the process is killed, nobody has to
guess for longer until when it was so."""


class Threshold(NamedTuple):
    """The value below which an event begins (or at it), and the one from which on it is over."""

    begins: float
    ends: float
    at_it: bool = True

    def begun(self, value: float) -> bool:
        """Return whether a value begins an event."""
        return value < self.begins or (self.at_it and value == self.begins)


def thresholds_of(near: float, singular: float) -> dict[Kind, Threshold]:
    """Return the thresholds of what is measured, for an arm's own near and singular values.

    Examples
    --------
    >>> thresholds_of(0.01, 1e-9)["near-singular"]
    Threshold(begins=0.01, ends=0.0125, at_it=True)
    """
    return {
        "near-singular": Threshold(near, NEAR_ENDS * near),
        # An arm may have both at one value; an event must still end after it began.
        "singular": Threshold(singular, max(SINGULAR_ENDS * near, NEAR_ENDS * singular)),
        "outside-working-travel": Threshold(0.0, WORKING_ENDS, at_it=False),
    }
