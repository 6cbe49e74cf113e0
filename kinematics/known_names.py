"""From a name nobody knows to the nearest known one, as the way out of a refusal.

Left out: what the names stand for.
"""

import difflib
import re
from collections.abc import Iterable, Sequence

_FEWEST_FOLDED = 3
_MOST_OFFERED = 24
_MOST_TOLD = 40
_NUMBERED = re.compile(r"(.*?[^0-9])([1-9][0-9]{0,8})", re.ASCII | re.DOTALL)


def nearest(name: str, known: Iterable[str]) -> str | None:
    """Return the known name most like ``name``, or None when none is alike.

    Source
    ------
    The ratio of matching blocks of Ratcliff and Metzener (1988), at least 0.6.

    Examples
    --------
    >>> nearest("jonits", ["arm", "joints"]), nearest("zzz", ["arm"])
    ('joints', None)
    """
    close = alike(name, known, 1)
    return close[0] if close else None


def alike(name: str, known: Iterable[str], most: int) -> list[str]:
    """Return up to ``most`` known names that are like ``name``, the most like first.

    Source
    ------
    As of ``nearest``.

    Examples
    --------
    >>> alike("wash-arn", ["press", "wash-gantry", "wash-arm"], 3)
    ['wash-arm', 'wash-gantry']
    """
    return difflib.get_close_matches(name[:100], list(known), n=most, cutoff=0.6)


def way_out_of_unknown(name: str, known: Iterable[str]) -> str:
    """Return the sentence that leads from an unknown name to the nearest known one.

    Examples
    --------
    >>> way_out_of_unknown("unit", ["units", "arm"])
    'did you mean "units"?'
    >>> way_out_of_unknown("zzz", ["units", "arm"])
    'known here: arm, units'
    """
    names = sorted(known)
    close = nearest(name, names)
    if close is not None:
        return f'did you mean "{close}"?'
    told = folded(names)
    more = ["..."] if len(told) > _MOST_TOLD else []
    return f"known here: {', '.join(told[:_MOST_TOLD] + more)}" if names else "leave it out"


def one_of(name: str, known: Sequence[str]) -> str:
    """Return what there is instead of an unknown name; where that is much, the nearest.

    Examples
    --------
    >>> one_of("jgi", ["base", "world", "jig (2)"])
    'one of: base, world, jig (2)'
    """
    if len(known) <= _MOST_OFFERED:
        return f"one of: {', '.join(known)}"
    return way_out_of_unknown(name, known)


def folded(names: Iterable[str]) -> list[str]:
    """Return names in order, with runs of numbered ones told by their first and last.

    Examples
    --------
    >>> folded(["q", "q1", "q2", "q3", "q10", "arm", "a1", "a2"])
    ['a1', 'a2', 'arm', 'q', 'q1 ... q3', 'q10']
    """
    runs: list[tuple[str, list[int]]] = []
    for stem, number in sorted(map(_stem_and_number, set(names))):
        if runs and runs[-1][0] == stem and 0 < runs[-1][1][-1] == number - 1:
            runs[-1][1].append(number)
        else:
            runs.append((stem, [number]))
    told: list[str] = []
    for stem, numbers in runs:
        each = [stem if number == 0 else f"{stem}{number}" for number in numbers]
        told += each if len(each) < _FEWEST_FOLDED else [f"{each[0]} ... {each[-1]}"]
    return told


def _stem_and_number(name: str) -> tuple[str, int]:
    """Return a name's text and the number from 1 on at its end, 0 where there is none."""
    found = _NUMBERED.fullmatch(name)
    return (found[1], int(found[2])) if found else (name, 0)
