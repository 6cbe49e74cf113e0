"""The demonstration cell moves: simulated joint values for its arms, until real ones come.

Idea: while somebody looks at an arm it moves, and its values come often; while nobody does it
stands still and says so now and then, which keeps it fresh and the process asleep. What is fed is
marked as simulated; the live arms take none of it any more once a real value has come. Left out:
the motion (motion.py) and a simulation from outside (sending.py).
"""

import asyncio
import logging
from collections.abc import AsyncIterator, Callable, Sequence
from contextlib import asynccontextmanager, suppress
from dataclasses import dataclass

import numpy as np

from kinematics.errors import KinematicsError
from kinematics.wandering import Wandering
from service.errors import ServiceError, UnknownArm
from service.live.live_arms import LiveArms
from service.live.samples import STALE, SUPERSEDED, Sample
from service.operations.arms import Arms, StoredArm
from service.readiness import Kernels
from service.simulation.motion import USUAL_SEED, wandering_of
from service.wire.arms import ReadArm

_LOG = logging.getLogger(__name__)

SOURCE = "demonstration"
LOOKED_AT_S = 0.05
IDLE_S = 0.5
"""Between values of an arm that somebody looks at, and that nobody does."""

_DECLARED_S = 0.1
"""What is said to be the period while it moves: a process that is held up for a tenth of a second
is no input that has stopped."""


class MovingArm:
    """One arm of the cell."""

    def __init__(self, name: str) -> None:
        self.name = name
        self._of: StoredArm[ReadArm] | None = None
        self._wandering: Wandering | None = None
        self._joints: tuple[float, ...] = ()
        self._moved_s = self._begun_s = 0.0
        self._last_s: float | None = None

    def sample(self, stored: StoredArm[ReadArm], live: LiveArms, *, moves: bool) -> Sample:
        """Return the next values; the time that goes by while it stands still does not count.

        Raises
        ------
        KinematicsError : the arm cannot wander.
        """
        now_s = live.clock.steady_s()
        if moves and self._last_s is not None:
            # However long the process slept: no joint is to leap.
            self._moved_s += min(now_s - self._last_s, IDLE_S)
        self._last_s = now_s if moves else None
        if self._of is not stored or self._wandering is None:
            self._begin(stored)
        assert self._wandering is not None
        self._joints = tuple(self._wandering.at(self._moved_s - self._begun_s).tolist())
        return Sample(
            self._joints,
            now_s,
            live.clock.wall_ms(),
            source=SOURCE,
            simulated=True,
            period_s=_DECLARED_S if moves else IDLE_S,
        )

    def _begin(self, stored: StoredArm[ReadArm]) -> None:
        """Wander within the limits of the arm as it is stored now, from where it stands."""
        arm = stored.read.arm
        stands = len(self._joints) == arm.joint_count
        same = self._of is not None and self._of.record.digests == stored.record.digests
        self._of = stored
        if same and self._wandering is not None:
            return
        start = np.array(self._joints) if self._wandering is not None and stands else None
        self._wandering = wandering_of(arm, USUAL_SEED, start)
        self._begun_s = self._moved_s


@dataclass(frozen=True)
class MovingCell:
    """The arms of a cell, and those who are told of them.

    Parameters
    ----------
    names : of the arms.
    is_looked_at : whether anybody looks at what happens to arms, whichever it is.
    """

    names: Sequence[str]
    arms: Arms[ReadArm]
    live: LiveArms
    is_looked_at: Callable[[], bool]

    @asynccontextmanager
    async def moving(self, kernels: Kernels) -> AsyncIterator[None]:
        """Have the arms move on this event loop, once the kernels are ready."""
        task = asyncio.create_task(self._move(kernels))
        try:
            yield
        finally:
            task.cancel()
            with suppress(asyncio.CancelledError):
                await task

    async def _move(self, kernels: Kernels) -> None:
        await kernels.wait()
        due = {MovingArm(name): 0.0 for name in self.names}
        while due:
            for one, at_s in list(due.items()):
                if at_s <= self.live.clock.steady_s():
                    again_s = await self._feed_or_leave(one)
                    if again_s is None:
                        del due[one]
                    else:
                        due[one] = self.live.clock.steady_s() + again_s
            if due:
                left_s = min(due.values()) - self.live.clock.steady_s()
                await asyncio.sleep(max(left_s, 0.0))

    async def _feed_or_leave(self, one: "MovingArm") -> float | None:
        """Feed an arm; return after how many seconds again, None for never."""
        try:
            return await self._feed(one)
        except (UnknownArm, KinematicsError) as error:
            _LOG.info("%s moves no more: %s", one.name, error.say)
            return None
        except ServiceError:
            return IDLE_S  # the store is away for now
        except Exception:
            # One arm that cannot be moved is no reason for the others to stand still.
            _LOG.exception("%s moves no more", one.name)
            return None

    async def _feed(self, one: "MovingArm") -> float | None:
        if self._is_moved_by_others(one.name):
            return IDLE_S
        moves = self.live.is_looked_at(one.name) or self.is_looked_at()
        stored = await self._stored(one.name)
        (taken,) = self.live.feed(stored, [one.sample(stored, self.live, moves=moves)])
        if taken.dropped == SUPERSEDED:
            return None
        return LOOKED_AT_S if moves else IDLE_S

    def _is_moved_by_others(self, name: str) -> bool:
        """Return whether another input has an arm at present: two would tear at it."""
        arm = self.live.get(name)
        if arm is None or arm.heard_from is None or arm.standing.reason == STALE:
            return False
        # Who sent last, not whose values stand: the first of another input are doubted as a leap.
        return arm.heard_from != SOURCE

    async def _stored(self, name: str) -> StoredArm[ReadArm]:
        """Return the arm as it is stored; live arms are kept in step with that."""
        standing = self.live.newest(name)
        if standing is not None:
            return standing.stored
        if self.arms.answers_at_once:
            return self.arms.get(name)
        return await asyncio.to_thread(self.arms.get, name)
