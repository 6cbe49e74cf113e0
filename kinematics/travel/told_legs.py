"""Numbers of a leg that was followed: margins, singular values, speeds, and where each is worst.

Idea: the postures of a track are dense enough for cubics between them. Least room and largest rates
are read off the cubics; the smallest singular value is looked for between its neighbours as the
vertex of a parabola through its squares, which beside a singular posture grow as squares do.

Source: none; sampling with refinement. Not covered: following a leg (straight.py, in_joints.py).
"""

import numpy as np

from kinematics import findings
from kinematics.arm import Arm
from kinematics.findings import FINE, Finding
from kinematics.jacobian import motion_of
from kinematics.kernels.decomposition import decompose
from kinematics.reach.branches import Branches
from kinematics.table import FloatArray
from kinematics.task_space import TaskSpace
from kinematics.travel.extremes import Bounds, largest_rates, least_room
from kinematics.travel.moves import IN_JOINTS, STRAIGHT, Extreme, Gone, Leg
from kinematics.travel.tolerances import HALF_TURN, NOWHERE
from kinematics.travel.trails import Trail
from kinematics.travel_limits import limits_of

_REFINEMENTS = 2
"""Vertices of parabolas that are tried: the second is good to a thousandth of a step."""
_NO_VECTORS = np.empty((0, 0, 0))


class Teller:
    """Tells legs of one arm with one tool.

    Attributes
    ----------
    space : the rows that postures are judged by. bounds : of joint values as they stand in tracks.
    """

    def __init__(
        self,
        arm: Arm,
        tool_in_flange: FloatArray,
        space: TaskSpace,
        bounds: Bounds,
        branches: Branches,
        length: float,
    ) -> None:
        self._arm, self._tool_in_flange, self._length = arm, tool_in_flange, length
        self.space, self.bounds, self._branches = space, bounds, branches

    def singular_values(self, postures: FloatArray) -> FloatArray:
        """Return the smallest scaled singular value of postures (count, joints), (count,)."""
        space, rank = self.space, self.space.generic_rank
        rows, joints = space.row_map.shape[0], postures.shape[1]
        values = np.empty((len(postures), min(rows, joints)))
        of_joints = motion_of(self._arm, postures, self._tool_in_flange).of_joints
        no_left, no_right = np.empty((0, rows, min(rows, joints))), np.empty((0, joints, joints))
        decompose(of_joints, space.row_map, space.joint_scale, no_left, values, no_right)
        return values[:, rank - 1] if rank else np.ones(len(postures))

    def told(self, trail: Trail, leg: Leg, smallest: tuple[float, float], samples: int) -> Gone:
        """Return what is told of a leg.

        Parameters
        ----------
        smallest : singular value and share of the leg where it is (``weakest``).
        samples : how many postures are told at even shares.
        """
        margin, branch = self._margin(trail), self._branches_at_ends(trail)
        peaks, peak_at = self._peaks(trail)
        duration = _duration(trail, leg)
        speeds = None if duration is None else peaks / duration
        top, shortest = self._arm.top_speeds, None
        if top is not None:
            shortest = float((peaks / top).max(initial=0.0))
        shares = np.linspace(0.0, 1.0, samples) if samples > 1 else np.zeros(samples)
        shares = shares[shares <= trail.share]
        gaps = trail.track.gaps[: trail.count].max(axis=0)
        return Gone(
            length=trail.length,
            turn=trail.turn,
            gone=float(trail.places[-1]),
            start=trail.track.values[0] * trail.scale,
            end=trail.last,
            branch_at_start=branch[0],
            branch_at_end=branch[1],
            branch_kept=branch[0] == branch[1] or (leg.kind == STRAIGHT and not self._spare),
            margin=margin,
            singular_value=Extreme(smallest[0], trail.distance(smallest[1])),
            peak_speeds=speeds,
            peak_at=np.array([trail.distance(float(share)) for share in peak_at]),
            peak_share=None
            if speeds is None or top is None
            else self._peak_share(trail, speeds / top, peak_at),
            duration=duration,
            top_speed=None if not shortest else _speed(trail, shortest),
            shortest=shortest,
            position_error=float(gaps[0]) * self._length,
            angle_error=float(gaps[1]),
            samples=trail.at(shares) * trail.scale,
            shares=shares,
            findings=(
                *self._near_singular(trail, leg, smallest[0]),
                *self._working(trail),
                *_half_turn(trail),
            ),
        )

    def weakest(self, trail: Trail) -> tuple[float, float]:
        """Return the smallest singular value on a leg, and the share of the leg where it is."""
        shares = trail.shares
        values = self.singular_values(trail.postures)
        at = int(np.argmin(values))
        best, share = float(values[at]), float(shares[at])
        if not 0 < at < len(values) - 1:
            return best, share
        three, squares = shares[at - 1 : at + 2].copy(), values[at - 1 : at + 2] ** 2
        for _ in range(_REFINEMENTS):
            vertex = _vertex(three, squares)
            if not three[0] < vertex < three[2]:
                break
            value = float(self.singular_values(trail.at(np.array([vertex])) * trail.scale)[0])
            if value < best:
                best, share = value, vertex
            three, squares = _narrowed(three, squares, vertex, value * value)
        return best, share

    def _margin(self, trail: Trail) -> Extreme:
        smallest, of = np.zeros(2), np.zeros(1, np.int64)
        least_room(self.bounds, trail.track, trail.count, smallest, of)
        if of[0] < 0:
            return Extreme(float("inf"), 0.0)
        limit, share = int(of[0]), float(smallest[1])
        limits = limits_of(self._arm)
        # The cubic says where, the posture there how much.
        there = trail.at(np.array([share])) * trail.scale
        left = float(limits.room(there)[0, limit])
        return Extreme(left, trail.distance(share), limits.each[limit].joint)

    def _peaks(self, trail: Trail) -> tuple[FloatArray, FloatArray]:
        """Return largest rates (joints,), rad or m per share of the leg, and where."""
        peaks, where = np.empty(self._arm.joint_count), np.empty(self._arm.joint_count)
        largest_rates(trail.track, trail.count, peaks, where)
        return peaks * trail.scale, where

    def _peak_share(self, trail: Trail, shares: FloatArray, peak_at: FloatArray) -> Extreme:
        joint = int(np.argmax(shares))
        return Extreme(float(shares[joint]), trail.distance(float(peak_at[joint])), joint + 1)

    def _branches_at_ends(self, trail: Trail) -> tuple[str, str]:
        ends = trail.postures[[0, -1]]
        codes = self._branches.of(self._arm.drive_map.motions(ends), np.arange(2))
        first, last = (self._branches.sentences[code] for code in codes)
        return first, last

    @property
    def _spare(self) -> bool:
        return len(self.space.row_map) < self._arm.joint_count

    def _near_singular(self, trail: Trail, leg: Leg, smallest: float) -> tuple[Finding, ...]:
        if smallest > self.space.near:
            return ()
        threshold = self._arm.thresholds.singular
        if smallest <= threshold or (leg.kind == IN_JOINTS and self._crosses(trail)):
            say = (
                "the way leads through a singular posture: smallest singular value met {measure}, "
                "zero below {threshold}"
            )
            return (Finding(findings.SINGULAR, "singular", say, smallest, threshold),)
        say = (
            "the way leads near a singular posture: smallest singular value {measure} below "
            "{threshold}; joints turn fast there"
        )
        return (Finding(findings.NEAR, "near-singular", say, smallest, self.space.near),)

    def _crosses(self, trail: Trail) -> bool:
        """Tell whether the determinant changes its sign on the way, where there is one."""
        space = self.space
        if not len(space.row_map) == space.generic_rank == self._arm.joint_count:
            return False
        of_joints = motion_of(self._arm, trail.postures, self._tool_in_flange).of_joints
        signs = np.sign(np.linalg.det(space.row_map @ of_joints * space.joint_scale))
        return bool((signs != signs[0]).any())

    def _working(self, trail: Trail) -> tuple[Finding, ...]:
        """Return a finding for each working travel limit that is exceeded on the way."""
        limits, found = limits_of(self._arm), list[Finding]()
        values = trail.postures @ limits.weights.T + limits.constants
        for place in np.flatnonzero(limits.working):
            limit, along = limits.each[place], values[:, place]
            below, above = limit.travel.lower - along.min(), along.max() - limit.travel.upper
            if max(below, above) <= 0.0:
                continue
            reason = f" ({limit.reason})" if limit.reason else ""
            found.append(
                Finding(
                    findings.OUTSIDE_WORKING_TRAVEL,
                    "outside-working-travel",
                    f"{limit.subject} goes to {{measure}} on the way, beyond its working travel "
                    f"limit {{threshold}}{reason.replace('{', '{{').replace('}', '}}')}",
                    float(along.max() if above > below else along.min()),
                    limit.travel.upper if above > below else limit.travel.lower,
                    limit.unit,
                    limit.joint,
                    limit.row,
                )
            )
        return tuple(found)


def _duration(trail: Trail, leg: Leg) -> float | None:
    """Return the seconds that a whole leg takes at what is stated of its speed."""
    seconds = 0.0
    if leg.speed is not None:
        seconds = trail.fastest / leg.speed
    if leg.turn_speed is not None:
        seconds = max(seconds, trail.turn / leg.turn_speed)
    return seconds if seconds > 0.0 else None


def _speed(trail: Trail, seconds: float) -> float | None:
    return trail.fastest / seconds if trail.fastest > NOWHERE else None


def _half_turn(trail: Trail) -> tuple[Finding, ...]:
    if trail.turn < np.pi - HALF_TURN:
        return ()
    say = (
        "the orientations at both ends are half a turn apart ({measure}): two ways to turn are as "
        "short, and which is taken is arbitrary; give a leg in between"
    )
    return (Finding(FINE, "half-turn", say, trail.turn, float(np.pi), "rad"),)


def _vertex(three: FloatArray, squares: FloatArray) -> float:
    """Return where the parabola through three points is least; NaN where it is a line."""
    (a, b, c), (fa, fb, fc) = three.tolist(), squares.tolist()
    over = (b - a) * (fb - fc) - (b - c) * (fb - fa)
    if over == 0.0:
        return float("nan")
    return float(b - 0.5 * ((b - a) ** 2 * (fb - fc) - (b - c) ** 2 * (fb - fa)) / over)


def _narrowed(
    three: FloatArray, squares: FloatArray, share: float, square: float
) -> tuple[FloatArray, FloatArray]:
    """Return the three neighbours of the least of four points."""
    shares, all_squares = np.append(three, share), np.append(squares, square)
    order = np.argsort(shares)
    shares, all_squares = shares[order], all_squares[order]
    first = min(max(int(np.argmin(all_squares)) - 1, 0), 1)
    return shares[first : first + 3], all_squares[first : first + 3]
