"""About how long a target takes, so that long questions can be told from short ones beforehand.

Source: measured on one core of a shared machine. Not covered: spins and cones, which know their own
(spins.py, cones.py); families and boxes, which nobody foresees.
"""

from kinematics.reach.targets import ELIMINATION

_CLOSED, _ELIMINATION = 3e-5, 2.5e-4
_SHORT_SEARCH, _SEARCH = 2e-3, 6e-3
"""By a closed form, by an elimination, and by a search where one target in ten is not found: those
that are take 0.3 ms, the others 15 ms and more."""


def seconds_of(proof: int, complete: bool, searches: bool) -> float:
    """Return about how long a target takes, in seconds.

    Parameters
    ----------
    proof : what answers rest on, an index into PROOFS.
    complete : whether all solutions are found. searches : whether a miss costs a short search.

    Examples
    --------
    >>> seconds_of(ELIMINATION, complete=True, searches=False)
    0.00025
    """
    if searches:
        return _SHORT_SEARCH + _CLOSED
    if not complete:
        return _SEARCH
    return _ELIMINATION if proof == ELIMINATION else _CLOSED
