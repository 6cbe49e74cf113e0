"""Findings: what the caller should know about an answer, as a value that travels in it.

Left out: how a finding is shown in the user's units (the service's edge does that).
"""

from dataclasses import dataclass

# The integers of the wire's code table that a finding can carry; texts may change, these never do.
FINE = 0
NEAR = 1
SINGULAR = 2
OUTSIDE_WORKING_TRAVEL = 3
OUTSIDE_TRAVEL = 4
ANGLES_NOT_UNIQUE = 5
INPUT_REPAIRED = 6


@dataclass(frozen=True, slots=True)
class Finding:
    """One thing worth knowing, with its measure and the threshold it was held against.

    Attributes
    ----------
    code : integer of the code table; 0 is information only.
    name : short kebab-case name of the case, e.g. ``outside-travel``.
    say : a sentence in which ``{measure}``, ``{threshold}`` and ``{joint}`` stand for the values,
        so that the edge can print them in the user's units.
    measure, threshold : SI numbers in ``unit``.
    unit : ``rad``, ``m``, or empty for a pure number.
    joint, row : 1-based numbers, where there is one.

    Examples
    --------
    >>> Finding(4, "outside-travel", "joint {joint} is at {measure}, limit {threshold}",
    ...         1.6, 1.5, "rad", joint=2).text()
    'joint 2 is at 1.6 rad, limit 1.5 rad'
    """

    code: int
    name: str
    say: str
    measure: float
    threshold: float
    unit: str = ""
    joint: int | None = None
    row: int | None = None

    def text(self) -> str:
        """Return the sentence with its values in SI units."""
        unit = f" {self.unit}" if self.unit else ""
        return self.say.format(
            measure=f"{self.measure:.6g}{unit}",
            threshold=f"{self.threshold:.6g}{unit}",
            joint=self.joint,
            row=self.row,
        )
