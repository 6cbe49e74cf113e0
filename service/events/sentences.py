"""What an event is, in a sentence for people.

Left out: its times, which stand beside it.
"""

from service.events.detector import Happening


def sentence(happening: Happening) -> str:
    """Return the sentence.

    Examples
    --------
    >>> sentence(Happening("stale", 0.0, 0.0, peak=1.25))
    'no joint values came for 1.25 s or longer'
    >>> sentence(Happening("source-changed", 0.0, 0.0, peak=1.0, told={"from": "a", "to": "b"}))
    "joint values come from 'b', before from 'a'; changed once"
    """
    peak, told = happening.peak or 0.0, happening.told
    often = "once" if peak == 1.0 else f"{peak:.0f} times"
    begins = 0.0 if happening.threshold is None else happening.threshold.begins
    return {
        "near-singular": f"near singular: smallest singular value down to {peak:.3g}, near is "
        f"{begins:.3g} or less",
        "singular": f"singular: smallest singular value down to {peak:.3g}, singular is "
        f"{begins:.3g} or less",
        "outside-working-travel": f"outside working travel by {-100.0 * peak:.3g} % of it",
        "stale": f"no joint values came for {peak:.3g} s or longer",
        "revision-changed": f"revision {told.get('from')} became {told.get('to')}",
        "source-changed": f"joint values come from {told.get('to')!r}, before from "
        f"{told.get('from')!r}; changed {often}",
    }[happening.kind]
