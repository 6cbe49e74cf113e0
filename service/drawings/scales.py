"""Scales of ISO 5455: one, two and five with their tenfolds, to enlarge and to reduce.

Left out: which of them a drawing has room for (envelope_sheet.py).
"""

from dataclasses import dataclass

_TENFOLDS = 12
"""Of a millimetre and of a kilometre: far beyond any arm."""


@dataclass(frozen=True)
class Scale:
    """How many millimetres of paper show how many of the arm."""

    paper: int
    real: int

    @property
    def mm_per_metre(self) -> float:
        """Millimetres of paper for each metre."""
        return 1000.0 * self.paper / self.real

    @property
    def words(self) -> str:
        """As it stands on a drawing.

        Examples
        --------
        >>> Scale(1, 20).words
        '1:20'
        """
        return f"{self.paper}:{self.real}"


def _descending() -> tuple[Scale, ...]:
    enlarged = [
        Scale(digit * 10**power, 1) for power in range(_TENFOLDS, -1, -1) for digit in (5, 2, 1)
    ]
    reduced = [Scale(1, digit * 10**power) for power in range(_TENFOLDS) for digit in (2, 5, 10)]
    return (*enlarged, *reduced)


SCALES = _descending()
"""From the largest down to the smallest."""

ACTUAL_SIZE = Scale(1, 1)
