"""Thresholds of moves along lines, each with its reason; lengths in metres, angles in radians."""

LOCATED = 2e-7
"""Metres, or radians, to which a break is located: a twentieth of what a display shows."""

SHORTEST_STEP = 2e-11
"""Metres, or radians, below which no step is taken: a posture so near to a fold has a smallest
singular value of some 5e-6, and its corrections still settle; a start may be as near to one."""

NOWHERE = 1e-12
"""Metres and radians below which a line is none."""

FIRST_STEP = 0.125
"""Share of a line that is tried first; what is too long is halved at once."""

MOST_POSTURES = 4096
"""Postures of a leg. A joint moves 0.05 rad between two at most, so they last for thirty turns of
it; a wrist that swings about as the tool passes a singular place takes some two hundred."""

DEPENDENT_DAMPING = 1e-5
"""Added where equations may be dependent: singular values above 1e-3 are not felt to move, and the
corrections converge all the same."""

FOLD_BENDS = 30.0
"""Curvature of what is lost along the lost motion, over the smallest singular value, from which a
stalled branch is one that ends. At a fold the value is the root of what is left of the way, some
5e-6, and the curvature some 0.1 to 1; where joints swing about without end it is as small as the
value itself."""

FOLD_STEP = 1e-4
"""Radians, or shares of the length, to either side for that curvature: its rounding is 1e-12 then,
and what bends the curve further, 1e-8."""

HALF_TURN = 1e-6
"""Radians from a half turn within which the axis of a turn is decided by how poses were typed."""

JOINT_STEP = 0.02
"""Radians, or shares of the arm's length, between postures that are looked at on a leg in joint
values: the tool's way is then longer than its chords by less than a ten-thousandth."""

MOST_WAYS = 16
"""Postures at the start that are followed, the best first: eight of an arm's branches, each with
two turns of its last joint."""

MOST_PIECES = 8
"""Times that an arm with spare joints changes which of them it holds at their limits on one leg."""

LEAVING = 1e-6
"""Metres, or radians, by which a fold is left at once: joints move by some thousandth of a radian
there, and the next term of that motion is a millionth."""
