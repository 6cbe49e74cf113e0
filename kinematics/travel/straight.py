"""One straight leg from one posture: followed on its branch, and cut where it breaks first.

Idea: the compiled track tells how far the branch goes; what bounds joint values, and how far off
the line an arm with few joints is, may end it before. What breaks first is what is told, and the
track is cut there, its last posture the one at the break.

Source: none; bookkeeping. Not covered: words (breaks.py), numbers of a leg (told_legs.py).
"""

from typing import NamedTuple

import numpy as np

from kinematics.chain import tool_in_base
from kinematics.kernels.compiler import for_kernel
from kinematics.reach.tolerances import EXACT_REACH
from kinematics.table import FloatArray
from kinematics.tolerances import TRAVEL_EDGE
from kinematics.travel.arm_on_lines import ArmOnLines
from kinematics.travel.extremes import first_beyond
from kinematics.travel.folds import fold_at
from kinematics.travel.lines import StraightLine, line_between
from kinematics.travel.moves import BEYOND_TRAVEL, OFF_LINE, SINGULAR
from kinematics.travel.on_line import Bench, Line, bench_for
from kinematics.travel.tolerances import (
    FIRST_STEP,
    LEAVING,
    LOCATED,
    MOST_PIECES,
    MOST_POSTURES,
    NOWHERE,
    SHORTEST_STEP,
)
from kinematics.travel.tracking import (
    ARRIVED,
    CROSSED,
    NOT_THERE,
    Track,
    follow,
    postures_at,
    room_for,
)
from kinematics.travel.trails import STALLS, WHOLE, Trail
from kinematics.travel_limits import limits_of

_HAIR = 1e-12
"""Share of a line between two postures that are the same one: nobody sees it, doubles do."""
_PIECES = 10
"""Places at which a piece of the line is looked at to locate what happens in it."""
_DOUBTS = 8
"""Times that a track is made denser where its cubics leave travel and its postures do not: each is
some 1e-6 rad off at most."""


class Run(NamedTuple):
    """A leg as far as it went.

    Attributes
    ----------
    way : what was followed. line, bench : the same for compiled code.
    track : postures, lengths as shares of the arm's; the first ``many`` count.
    kind : of the break (BREAKS), ``WHOLE`` or ``STALLS``.
    limit : index of the limit of travel, -1 for none.
    """

    way: StraightLine
    line: Line
    bench: Bench
    track: Track
    many: int
    kind: int
    limit: int = -1


class OnLines(ArmOnLines):
    """Follows lines with one arm and tool."""

    def trail(self, way: StraightLine, posture: FloatArray, allowed: tuple[float, float]) -> Trail:
        """Return the leg along a line from joint values (joints,), as far as nothing breaks.

        Parameters
        ----------
        allowed : m and rad off the line that arms with few joints may be.
        """
        return self.as_trail(self.run(way, posture, allowed))

    def as_trail(self, run: Run) -> Trail:
        """Return a run as what is told of legs rests on."""
        length = run.way.length
        places = run.track.shares[: run.many] * length
        return Trail(
            run.track, run.many, self.scale, length, run.way.angle, length, places,
            lambda shares: self.postures(run, shares).values, run.kind, run.limit,
        )  # fmt: skip

    def run(self, way: StraightLine, posture: FloatArray, allowed: tuple[float, float]) -> Run:
        """Follow a line from joint values (joints,), as far as nothing breaks.

        Parameters
        ----------
        allowed : m and rad off the line that arms with few joints may be.
        """
        free = np.ones(self.arm.joint_count)
        run, limit = self._once(way, posture, allowed, free), -1
        if run.many == 1 and run.kind == STALLS:
            run = self._off_a_fold(run, posture, allowed)
        for _ in range(MOST_PIECES if self.spare else 0):
            share = float(run.track.shares[run.many - 1])
            rest = line_between(way.at(share), way.at(1.0))
            if max(rest.length, rest.angle) <= LOCATED:
                break
            joint, posture = self._own_limit(run), run.track.values[run.many - 1] * self.scale
            if joint >= 0 and free.sum() > self.arm.joint_count - self.spare:
                free[joint], limit = 0.0, run.limit
                posture = self._at_limit(run, joint)
            elif run.kind == STALLS and not free.all():
                free[:] = 1.0
            else:
                break
            more = self._once(rest, posture, allowed, free)
            if free.all() and more.track.shares[more.many - 1] * rest.length <= LOCATED:
                # Held it cannot go on, and let go it leaves its travel at once.
                return run._replace(kind=BEYOND_TRAVEL, limit=limit)
            if more.many == 1:
                # Without the joint that is at its limit the others cannot even begin.
                break
            run = _joined(run, more, share)
        return run

    def _once(
        self,
        way: StraightLine,
        posture: FloatArray,
        allowed: tuple[float, float],
        free: FloatArray,
    ) -> Run:
        """Follow a line, joints held that are not ``free``, as far as nothing breaks."""
        line = self.line_for(way)._replace(free=free.copy())
        bench = bench_for(self.for_kernels, line)
        track = room_for(MOST_POSTURES, self.arm.joint_count)
        outcome, reach = np.zeros(1), max(way.length, way.angle, NOWHERE)
        start = for_kernel(posture / self.scale)
        least = min(SHORTEST_STEP / reach, 0.5)
        steps = (least, min(LOCATED / reach, 0.5), max(FIRST_STEP, least))
        count = follow(self.for_kernels, line, bench, *steps, start, track, outcome)
        if outcome[0] == NOT_THERE:
            run = self._nowhere(way, line, bench, track, posture)
        else:
            kind = {ARRIVED: WHOLE, CROSSED: SINGULAR}.get(int(outcome[0]), STALLS)
            run = Run(way, line, bench, track, count, kind)
        return self._within_travel(self._near_the_line(run, allowed))

    def _off_a_fold(self, run: Run, posture: FloatArray, allowed: tuple[float, float]) -> Run:
        """Return the run that leaves a fold, of two the one that gets further."""
        way, best = run.way, run
        share = min(LEAVING / max(way.length, way.angle, NOWHERE), 0.5)
        fold = fold_at(self.arm, self.tool_in_flange, self.space, posture)
        if fold is None or not fold.ends:
            return run
        moved = fold.leaving(share * np.concatenate([way.shift, way.turn]))
        if moved is None:
            return run
        rest = line_between(way.at(share), way.at(1.0))
        for side in (moved, -moved):
            more = self._once(rest, posture + side, allowed, np.ones(len(posture)))
            if more.many > 1 or more.kind == WHOLE:
                # Rates at the fold itself are infinite: those of the chord stand for them.
                run.track.rates[0] = (more.track.values[0] - run.track.values[0]) / share
                either = _joined(run, more, share)
                if best is run or _end_of(either) > _end_of(best):
                    best = either
        return best

    def _own_limit(self, run: Run) -> int:
        """Return the joint whose own limit breaks a run, or -1."""
        if run.kind != BEYOND_TRAVEL:
            return -1
        (moving,) = np.nonzero(self.bounds.weights[run.limit])
        return int(moving[0]) if len(moving) == 1 else -1

    def _at_limit(self, run: Run, joint: int) -> FloatArray:
        """Return the last posture of a run (joints,), with the joint that left its travel put onto
        the limit."""
        posture: FloatArray = run.track.values[run.many - 1] * self.scale
        limit = limits_of(self.arm).each[run.limit]
        weight, constant = limit.weights[joint], limit.constant
        ends = (np.array(limit.travel) - constant) / weight
        posture[joint] = ends[int(np.argmin(np.abs(ends - posture[joint])))]
        return posture

    def postures(self, run: Run, shares: FloatArray) -> Track:
        """Return postures at rising shares of a run's line, up to where it broke."""
        found = room_for(len(shares), self.arm.joint_count)
        asked = for_kernel(shares)
        postures_at(self.for_kernels, run.line, run.bench, run.track, run.many, asked, found)
        return found

    def cut(self, run: Run, share: float, kind: int, limit: int = -1) -> Run:
        """Return a run that breaks at a share of its line."""
        (count,) = np.searchsorted(run.track.shares[: run.many], [share])
        at = self.postures(run, np.array([share]))
        for part, there in zip(run.track, at, strict=True):
            part[count] = there[0]
        run.track.shares[count] = share
        return run._replace(many=int(count) + 1, kind=kind, limit=limit)

    def _nowhere(
        self, way: StraightLine, line: Line, bench: Bench, track: Track, posture: FloatArray
    ) -> Run:
        """Return the run of a posture that cannot be brought onto the line, of itself alone."""
        tool = tool_in_base(self.arm, posture, self.tool_in_flange)
        gap = line_between(tool, way.start)
        track.shares[0], track.values[0], track.rates[0] = 0.0, posture / self.scale, 0.0
        track.gaps[0] = gap.length / self.screws.length, gap.angle
        return Run(way, line, bench, track, 1, STALLS)

    def _near_the_line(self, run: Run, allowed: tuple[float, float]) -> Run:
        """Return a run cut where it is too far off its line."""
        most = (EXACT_REACH, EXACT_REACH)
        if self.few:
            most = (max(allowed[0] / self.screws.length, most[0]), max(allowed[1], most[1]))
        off = (run.track.gaps[: run.many] > most).any(axis=1)
        if not off.any():
            return run
        first = int(np.argmax(off))
        if first == 0:
            return run._replace(many=1, kind=OFF_LINE)
        begin, end = run.track.shares[first - 1 : first + 1].tolist()
        while (end - begin) * max(run.way.length, run.way.angle) > LOCATED:
            shares = np.linspace(begin, end, _PIECES)
            off = (self.postures(run, shares[1:-1]).gaps > most).any(axis=1)
            first = int(np.argmax(np.append(off, True)))
            begin, end = shares[first : first + 2].tolist()
        return self.cut(run, end, OFF_LINE)

    def _within_travel(self, run: Run) -> Run:
        """Return a run cut where a joint, or a sum of joints, leaves its travel."""
        found = np.zeros(2)
        for _ in range(_DOUBTS):
            if not first_beyond(self.bounds, run.track, run.many, TRAVEL_EDGE, found):
                break
            begin, end = found.tolist()
            while (end - begin) * max(run.way.length, run.way.angle) > LOCATED:
                shares = np.linspace(begin, end, _PIECES)
                excess = self._excess(self.postures(run, shares).values[1:-1]).max(axis=1)
                first = int(np.argmax(np.append(excess > TRAVEL_EDGE, True)))
                begin, end = shares[first : first + 2].tolist()
            at = self.postures(run, np.array([end]))
            excess = self._excess(at.values)[0]
            if excess.max() > TRAVEL_EDGE:
                return self.cut(run, end, BEYOND_TRAVEL, int(np.argmax(excess)))
            # The cubic was beyond, the posture is not: with it the cubic is better.
            run = _with_posture(run, at)
        return run

    def _excess(self, values: FloatArray) -> FloatArray:
        """Return by how much joint values of a track exceed each limit of travel, (m, limits)."""
        bounds = self.bounds
        at = values @ bounds.weights.T + bounds.constants
        excess = np.maximum(bounds.least - at, at - bounds.most)
        return np.where(bounds.advice, -np.inf, excess)


def _with_posture(run: Run, at: Track) -> Run:
    """Return a run with one posture more in its track."""
    place = int(np.searchsorted(run.track.shares[: run.many], at.shares[0]))
    parts = (
        np.insert(part, place, there, axis=0) for part, there in zip(run.track, at, strict=True)
    )
    return run._replace(track=Track(*parts), many=run.many + 1)


def _end_of(run: Run) -> float:
    return float(run.track.shares[run.many - 1])


def _joined(run: Run, more: Run, share: float) -> Run:
    """Return a run and the one that goes on from its last posture, at a share of its line."""
    width, first, then = 1.0 - share, run.many, more.many
    track = Track(
        # A hair apart, so that between the two nothing is divided by zero.
        share + width * np.maximum(more.track.shares[:then], _HAIR),
        more.track.values[:then],
        more.track.rates[:then] / width,
        more.track.gaps[:then],
    )
    # And room for one more, where it may be cut.
    parts = (
        np.concatenate([before[:first], after, after[:1]])
        for before, after in zip(run.track, track, strict=True)
    )
    return run._replace(
        track=Track(*parts), many=run.many + more.many, kind=more.kind, limit=more.limit
    )
