"""What is asked of an arm that moves, and what it answers: courses, ways, breaks.

A course begins at a place and has legs, each straight or in joint values. A place is joint values
or a pose; a pose may have several postures, and a way begins in each of them. Along a straight leg
the tool's point keeps an even speed on a line while its orientation turns evenly about one fixed
axis; along a leg in joint values every joint value grows evenly. A way breaks where it would have
to leave travel, its branch, or the line. Words are made only for whoever reads them.

Source: none; a layout. Not covered: how any of it is found (courses.py), courses made of targets
(to_targets.py), obstacles, dynamics.
"""

from dataclasses import dataclass, field

from kinematics.findings import Finding
from kinematics.reach.targets import UNREACHABLE, Reason, Target
from kinematics.table import FloatArray
from kinematics.tolerances import TARGET_ANGLE, TARGET_POSITION

STRAIGHT, IN_JOINTS = range(2)
KINDS = ("straight", "joints")
"""How a leg goes: the tool along a line, or every joint value evenly."""

NO_START, NO_END, BEYOND_TRAVEL, SINGULAR, BRANCH_ENDS, OFF_LINE = range(6)
BREAKS = (
    "start-out-of-reach",
    "end-out-of-reach",
    "travel-limit",
    "singular",
    "branch-ends",
    "off-line",
)
"""Why a way breaks: no posture at its start, or at the end of a leg in joint values; a joint would
leave its travel; the posture is singular, where the branch meets another; two branches merge and
none goes on; an arm with few joints would leave the line by more than the tolerance."""


@dataclass(frozen=True, eq=False)
class Place:
    """Where a leg begins or ends: joint values, or what a target says; one of the two.

    Attributes
    ----------
    joint_values : (joints,), rad or m.
    target : pose of the tool in the base, with its tolerances and what it leaves open; at the ends
        of straight legs of six joints and more everything a target leaves open is taken as the
        posture at its start has it.
    """

    joint_values: FloatArray | None = None
    target: Target | None = None


@dataclass(frozen=True, eq=False)
class Leg:
    """One move, from where the one before ended.

    Attributes
    ----------
    end : where to. kind : STRAIGHT or IN_JOINTS.
    speed : of the tool's point, m/s; of a leg in joint values the largest on the way. None: not
        said. turn_speed : of the tool's orientation along a straight leg, rad/s, for legs that
        turn more than they move; None: as the line takes.
    """

    end: Place
    kind: int = STRAIGHT
    speed: float | None = None
    turn_speed: float | None = None


@dataclass(frozen=True, eq=False)
class Course:
    """A start and the legs from there.

    Attributes
    ----------
    position_tolerance, angle_tolerance : how far off the line an arm with fewer than six joints may
        be, m and rad.
    samples : places told of each leg with their joint values, evenly spaced, both ends among them;
        0 for none.
    """

    start: Place
    legs: tuple[Leg, ...]
    position_tolerance: float = TARGET_POSITION
    angle_tolerance: float = TARGET_ANGLE
    samples: int = 0


@dataclass(frozen=True, eq=False)
class Approach:
    """A straight way to a target, or back from it: how far, and along what.

    Attributes
    ----------
    distance : m, above 0. along : (3,), in the base, of any length; None for tool z. The tool
        starts (of a retract: ends) so far back along it, that is at target - distance * along.
    speed : as of a leg.
    """

    distance: float
    along: FloatArray | None = None
    speed: float | None = None


@dataclass(frozen=True)
class Break:
    """The first place where a way cannot go on.

    Attributes
    ----------
    kind : index into BREAKS. leg : which leg, from 0.
    share : of the leg, 0 to 1. distance : metres that the tool's point has gone along that leg.
    reason : code (of BREAKS), sentence, measure and threshold; ``nearest`` is the tool there.
    joint_values : (joints,), the last posture; None where there is none.
    joint : 1-based number of the joint at its limit, where there is one.
    kinds : of a singular posture in words (wrist, elbow, ...); empty elsewhere.
    verdict : index into VERDICTS (reach/targets.py): what it makes of where the course leads to.
    """

    kind: int
    leg: int
    share: float
    distance: float
    reason: Reason
    joint_values: FloatArray | None = None
    joint: int | None = None
    kinds: tuple[str, ...] = ()
    verdict: int = UNREACHABLE


@dataclass(frozen=True)
class Extreme:
    """The smallest (or largest) of a number along a leg, and where: metres from the leg's start."""

    value: float
    distance: float
    joint: int | None = None


@dataclass(frozen=True, eq=False)
class Gone:
    """What is told of one leg of a way, up to its end or to where the way breaks.

    Attributes
    ----------
    length, turn : metres that the tool's point goes along the whole leg, and rad that it turns.
    gone : metres of that up to the end or the break.
    start, end : (joints,), joint values where the leg begins and where it ends or breaks.
    branch_at_start, branch_at_end : sentences (reach/branches.py); empty for arms without names.
    branch_kept : whether the branch is the same at both ends. Of a straight leg always, up to where
        it breaks, but for arms with spare joints, which may pass from one to another.
    margin : smallest share of travel left; infinite where nothing bounds the arm.
    singular_value : the smallest on the way, scaled, a pure number (task_space.py).
    peak_speeds : (joints,), largest absolute speed of each joint, rad/s or m/s, at the stated tool
        speed; None where none was stated. peak_at : (joints,), metres from the leg's start.
    peak_share : largest share of a joint's top speed at the stated tool speed, with the joint; None
        where either is not known.
    duration : seconds at the stated speed; None where none was stated.
    top_speed : largest even speed of the tool's point at which no joint exceeds its top speed, m/s;
        None where they are not known or the tool's point stays.
    shortest : seconds the leg takes when it goes evenly and no faster than the joints can.
    position_error, angle_error : largest distance from the line on the way, m and rad.
    samples : (count, joints), joint values at even shares of the leg, as many as were asked for and
        lie before a break. shares : (count,), where.
    findings : near a singular posture, beyond working travel, spare joints.
    """

    length: float
    turn: float
    gone: float
    start: FloatArray
    end: FloatArray
    branch_at_start: str
    branch_at_end: str
    branch_kept: bool
    margin: Extreme
    singular_value: Extreme
    peak_speeds: FloatArray | None
    peak_at: FloatArray
    peak_share: Extreme | None
    duration: float | None
    top_speed: float | None
    shortest: float | None
    position_error: float
    angle_error: float
    samples: FloatArray
    shares: FloatArray
    findings: tuple[Finding, ...] = ()


@dataclass(frozen=True, eq=False)
class Way:
    """A course from one posture at its start.

    Attributes
    ----------
    start : (joints,). legs : as far as it went. broken : None where it gets to the end.
    """

    start: FloatArray
    legs: tuple[Gone, ...]
    broken: Break | None = None

    @property
    def done(self) -> bool:
        """Whether it gets to the end."""
        return self.broken is None

    @property
    def margin(self) -> float:
        """Smallest share of travel left on the whole way."""
        return min((leg.margin.value for leg in self.legs), default=float("inf"))


@dataclass(frozen=True, eq=False)
class Followed:
    """The answer to one course.

    Attributes
    ----------
    ways : one for each posture at the start, those that get to the end first, by margin; then those
        that get furthest.
    broken : why no way gets to the end, of the one that gets furthest; None where one does.
    started : how many postures at the start are within travel; ways may be fewer (MOST_WAYS).
    say : how the way is followed, for people.
    """

    ways: tuple[Way, ...]
    broken: Break | None
    started: int
    say: str
    findings: tuple[Finding, ...] = field(default=())

    @property
    def done(self) -> bool:
        """Whether some way gets to the end."""
        return self.broken is None
