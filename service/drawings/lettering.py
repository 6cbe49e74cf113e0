"""How much room words take on paper, and words made to fit.

Widths are those of a wide common typeface (DejaVu Sans), so that most others take less; text is
never stretched. Heights are those of capitals in ISO 3098. Left out: where words stand.
"""

import unicodedata
from functools import lru_cache

SMALL, NORMAL, LARGE = 1.8, 2.5, 3.5
"""Heights of capitals, mm. ISO 3098 has no smaller one."""

EM = 1.0 / 0.73
"""Size of a typeface over the height of its capitals."""

_BELOW = 0.33
_DESCENDING = set("gjpqyQ,;()[]{}|_\u00b5")
"""Letters that go below the line they stand on, and how deep, over the height of capitals."""

_OF_AN_EM = {
    0.30: "ijlIJ'|",
    0.34: " .,:;/\\!f",
    0.42: "rt-()[]\u2019",
    0.53: "sz?*_c`\u00b0\u2013",
    0.60: "kvxyFLbdpqaeghnou\u00b2\u00b3",
    0.65: "0123456789$ETYPS{}",
    0.70: "ABCKRVXZ",
    0.79: "DGHNOQU&",
    0.84: '+=<>~^#\u00b1\u00d7w"',
}
_WIDTHS = {letter: width for width, letters in _OF_AN_EM.items() for letter in letters}
_OTHER, _WIDE = 1.0, 1.1


@lru_cache(maxsize=4096)
def width_of(words: str, height: float) -> float:
    """Return the room a line of words takes at most, mm.

    Parameters
    ----------
    height : of capitals, mm.

    Examples
    --------
    >>> round(width_of("1419.5", 2.5), 2)
    12.29
    """
    return EM * height * sum(map(_width, words))


def depth_of(words: str, height: float) -> float:
    """Return how far words go below the line they stand on, mm."""
    known = all(letter in _WIDTHS for letter in words)
    return 0.0 if known and not _DESCENDING.intersection(words) else _BELOW * height


def _width(letter: str) -> float:
    if letter in _WIDTHS:
        return _WIDTHS[letter]
    if unicodedata.combining(letter):
        return 0.0
    return _WIDE if unicodedata.east_asian_width(letter) in "WF" else _OTHER


def shortened(words: str, height: float, width: float) -> str:
    """Return words that fit, with an ellipsis where they are cut.

    Examples
    --------
    >>> shortened("housing-loader", 2.5, 18.0)
    'housing-\u2026'
    """
    if width_of(words, height) <= width:
        return words
    kept = words
    while kept and width_of(kept + "\u2026", height) > width:
        kept = kept[:-1]
    return kept.rstrip() + "\u2026"


def wrapped(words: str, height: float, width: float, lines: int) -> list[str]:
    """Return words in at most so many lines; what is too much ends in an ellipsis.

    Examples
    --------
    >>> wrapped("seen from the front, and from above", 2.5, 30.0, 2)
    ['seen from the', 'front, and from\u2026']
    """
    found: list[str] = []
    left = words.split()
    while left and len(found) < lines - 1:
        taken = 1
        while taken < len(left) and width_of(" ".join(left[: taken + 1]), height) <= width:
            taken += 1
        found.append(shortened(" ".join(left[:taken]), height, width))
        left = left[taken:]
    return [*found, shortened(" ".join(left), height, width)] if left else found
