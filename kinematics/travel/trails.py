"""A leg as far as it went, whatever kind of move it was: postures, places, and what broke it.

Idea: what is told of a leg needs its track, how far the tool has gone at each share of it, and
postures in between. Straight legs and legs in joint values both come down to that.

Source: none; a layout. Not covered: following (straight.py, in_joints.py), telling (told_legs.py).
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from kinematics.table import FloatArray
from kinematics.travel.tracking import Track

STALLS = 100
"""In place of a kind of break: the branch goes no further, why is still to be found."""

WHOLE = -1
"""In place of a kind of break, for a leg without any."""


@dataclass(frozen=True, eq=False)
class Trail:
    """One leg from one posture.

    Attributes
    ----------
    track, count : postures, lengths as shares of the arm's, of which the first ``count`` count.
    scale : (joints,), what makes joint values of them, rad or m.
    length, turn : m that the tool's point goes on the whole leg, and rad that it turns.
    fastest : m that the tool's point goes per share of the leg where it goes fastest.
    places : (count,), m gone at each posture.
    at : returns a trail's postures (m, joints), as they stand in the track, at rising shares (m,).
    kind : of the break (BREAKS), ``WHOLE`` or ``STALLS``. limit : index of the limit of travel.
    """

    track: Track
    count: int
    scale: FloatArray
    length: float
    turn: float
    fastest: float
    places: FloatArray
    at: Callable[[FloatArray], FloatArray]
    kind: int = WHOLE
    limit: int = -1

    @property
    def shares(self) -> FloatArray:
        """Shares of the leg, (count,)."""
        return self.track.shares[: self.count]

    @property
    def postures(self) -> FloatArray:
        """Joint values, (count, joints), rad and m."""
        postures: FloatArray = self.track.values[: self.count] * self.scale
        return postures

    @property
    def last(self) -> FloatArray:
        """Joint values at the end, or where it breaks, (joints,)."""
        last: FloatArray = self.track.values[self.count - 1] * self.scale
        return last

    @property
    def share(self) -> float:
        """Share of the leg where it ends or breaks."""
        return float(self.track.shares[self.count - 1])

    def distance(self, share: float) -> float:
        """Return how many metres the tool's point has gone at a share of the leg."""
        return float(np.interp(share, self.shares, self.places))
