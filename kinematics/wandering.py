"""An arm that wanders: from posture to posture by chance, as smoothly as drives do, with pauses.

Idea: postures are drawn within working travel, a tenth off its ends, and joined by moves of the
shortest time that a share of top speed allows. Everything follows from a seed, so that two who know
it see the same motion. Posture by posture it is a function of time that only goes forward.
Source: motion_profiles.py; draws by rejection from the box of travel_region.py, and along a random
line where that box is nearly all cut away (Smith 1984, "hit and run", Operations Research 32(6)).
Not covered: what the arm would hit.
"""

import numpy as np

from kinematics.arm import Arm
from kinematics.errors import KinematicsError
from kinematics.motion_profiles import on_the_way, shortest_duration, top_speeds
from kinematics.reach.travel_region import travel_region
from kinematics.table import FloatArray

OFF_THE_ENDS = 0.1
"""Share of travel that is kept free at either end: nobody leads an arm to its stops all day."""

SHARE_OF_TOP_SPEED = 0.5
PAUSE_S = (0.3, 1.5)
"""Shortest and longest rest at a posture: a gripper closes, a door opens."""

_DRAWN = 256
"""Postures drawn at once; where none of them is within all limits, few of any number are."""

_FIRST_TRIES = 400
"""A hundred thousand draws for the first posture, some 10 ms: from there on lines lead further."""


class Wandering:
    """The motion of one arm; asked with times that do not go back.

    Parameters
    ----------
    seed : the same one gives the same motion.
    share : of top speed that is used, above 0 up to 1.
    start : (joints,), where it begins; drawn if left out.

    Raises
    ------
    KinematicsError : travel leaves no posture, or a slide has no ends.

    Examples
    --------
    >>> from kinematics.table import Convention, JointKind, Row, Table, Travel
    >>> row = Row(JointKind.REVOLUTE, 0.4, 0.0, 0.0, 0.0, travel=Travel(-1.0, 1.0), top_speed=2.0)
    >>> arm = Arm("two", Table(Convention.STANDARD, (row, row)))
    >>> postures = [Wandering(arm, seed=7).at(20.0) for _ in range(2)]
    >>> bool((postures[0] == postures[1]).all()), bool((abs(postures[0]) <= 0.8).all())
    (True, True)
    """

    def __init__(
        self,
        arm: Arm,
        *,
        seed: int,
        share: float = SHARE_OF_TOP_SPEED,
        start: FloatArray | None = None,
    ) -> None:
        self._random = np.random.default_rng(seed)
        self._speeds = share * top_speeds(arm)
        self._postures = _Postures(arm, self._random)
        self._first = self._last = self._postures.draw() if start is None else start
        self._begun_s = self._moved_s = self._left_s = 0.0

    def at(self, time_s: float) -> FloatArray:
        """Return the posture (joints,), rad or m, so many seconds after the beginning."""
        while time_s >= self._left_s:
            self._go_on()
        if time_s >= self._moved_s:
            return self._last
        share = (time_s - self._begun_s) / (self._moved_s - self._begun_s)
        return on_the_way(self._first, self._last, share)

    def _go_on(self) -> None:
        """Set out for the next posture."""
        self._first, self._last = self._last, self._postures.draw()
        self._begun_s = self._left_s
        duration = shortest_duration(self._last - self._first, self._speeds)
        self._moved_s = self._begun_s + duration
        self._left_s = self._moved_s + self._random.uniform(*PAUSE_S)


class _Postures:
    """Postures of one arm, drawn within its working travel, off its ends."""

    def __init__(self, arm: Arm, random: np.random.Generator) -> None:
        self._random = random
        try:
            # What finds the smallest box takes half a second to load, and 40 MB.
            region = travel_region(arm, working=True, tight=False)
        except KinematicsError:
            # A slide that only a sum bounds has its ends from there.
            region = travel_region(arm, working=True)
        off = OFF_THE_ENDS * (region.upper - region.lower)
        self._lower, self._upper = region.lower + off, region.upper - off
        self._region = region
        self._posture: FloatArray | None = None

    def draw(self) -> FloatArray:
        """Return the next posture, (joints,)."""
        for _ in range(_FIRST_TRIES if self._posture is None else 1):
            drawn = self._random.uniform(self._lower, self._upper, (_DRAWN, len(self._lower)))
            within = drawn[self._region.holds(drawn)]
            if len(within):
                self._posture = within[0]
                return self._posture
        if self._posture is None:
            raise KinematicsError(
                "travel limits leave hardly any posture to wander between",
                where=("arm",),
                way_out="check combined travel and the travel of passive rows",
            )
        self._posture = self._along_a_line(self._posture)
        return self._posture

    def _along_a_line(self, start: FloatArray) -> FloatArray:
        """Return a posture on a random line through another, as far as all limits let it go."""
        direction = self._random.normal(size=len(start)) * (self._upper - self._lower)
        weights = np.vstack([np.eye(len(start)), self._region.weights])
        lower = np.concatenate([self._lower, self._region.cut_lower])
        upper = np.concatenate([self._upper, self._region.cut_upper])
        values, rates = weights @ start, weights @ direction
        with np.errstate(divide="ignore", invalid="ignore"):
            ends = np.stack([(lower - values) / rates, (upper - values) / rates])
        ends = np.where(rates == 0.0, [[-np.inf], [np.inf]], np.sort(ends, axis=0))
        begin, end = ends[0].max(), ends[1].min()
        found: FloatArray = start + self._random.uniform(begin, max(begin, end)) * direction
        return found
