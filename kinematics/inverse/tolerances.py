"""Thresholds of closed forms, of the search and of families, each with its reason.

Lengths are shares of the arm's length, angles radians.
"""

# --- search ----------------------------------------------------------------------------------
SEARCH_ACCEPTS = 1e-9
"""Gap, a share of the length or rad, within which a search is on its target: what is promised of
exact solutions. Regular ones end at some 1e-14, singular ones some digits before."""

SEARCH_ACCEPTS_FEW = 2e-4
"""The same for an arm that cannot meet all of a target: a little over the usual tolerance of an
angle. With more, starts would do that ended beside a posture at the edge of reach."""

SEARCH_RELAXED = 1e-3
"""Gap, a share of the length, within which the nearest places of an arm with few joints are told.
Whether what is left is accepted is the target's business."""

SEARCH_TURN_SHARE = 0.03
"""Weight of turns beside lengths where an arm cannot meet both. What lengths are off shrinks with
its square, from 0.05 mm/m as angles are typed to a twentieth of a micrometre; with less, an arm at
the edge of its reach would turn the tool by degrees for the last micrometre."""

SEARCH_STARTS = 100
"""Starts for a target: 999 of 1000 reachable ones are met within a few."""

SEARCH_STEPS = 40
"""Steps of a start: good ones take six to fifteen."""

# --- arms that turn about one direction --------------------------------------------------------
EXACT_AXES = 1e-9
"""Sine, or share of the length, below which axes are parallel or one to every digit that counts;
a table in radians with ten decimals leaves less."""

ROUNDED_ANGLE = 2e-5
"""Radians that axes may be out of parallel by the typing of a table: alpha = 1.5708 is off by 4e-6
and 3.1416 by 7e-6; two of them, and a degree with three decimals, add up to this."""

ROUNDED_LENGTH = 1e-6
"""Share of the length by which axes may miss one point by the typing of a table: a micrometre over
a metre. Axes that meet by zeros of the table meet exactly, however their angles are typed."""

NEARLY_SPECIAL = 5e-3
"""Share of the length, or radians, by which measured axes are off what the drawing says; beyond it
the arm was built another way."""

NEIGHBOURS_PARALLEL = 1e-3
"""Sine between neighbours of axes that meet, or share of the length between parallel ones, below
which two joints do the same: dividing by it takes three digits, and no arm is built near it."""

AXES_WELL_APART = 0.1
"""Sine between axes from which on the feet of their common normal are known to 1e-14; they are
known to the rounding over the sine's square."""

FREE_JOINT = 1e-9
"""Distance from a joint's axis, over the length, or sine to it, within which turning the joint all
around moves what it carries by less than targets are met to."""

NEARLY_FREE = 1e-7
"""The same, within which values all around are tried too: what determines such a joint has lost
half of its digits."""

MAYBE_FREE = 1e-6
"""The same, within which a no is not proved."""

EDGE_OF_ROUNDED = 100.0
"""Times the residual of axes out of parallel: within so much beyond reach a no is not proved. Each
of some four axes moves the edge by about the residual times the length."""

FOLD_OF_ROUNDED = 20.0
"""Times the same residual: within so much of the edge of reach two postures that merge are started
apart, so that settling finds both."""

UNCERTAIN = 50.0
"""Times what a table leaves uncertain: within so much of an axis, turning about it counts as free
and is tried all around, each try then settled; beyond it the turn is good to a few degrees."""

TILT_TOLD = 1e-9
"""Radians of tilt above which it is told; products of doubles leave 1e-15, and 1e-9 is exact."""

# --- families ----------------------------------------------------------------------------------
FAMILY_NULL = 1e-6
"""Singular value below which a joint motion may be a self-motion: solutions at singular places are
good to the root of rounding. Following the curve settles it."""

FAMILY_MEETS = 1e-9
"""Gap, a share of the length or rad, within which a posture is on its target (SEARCH_ACCEPTS)."""

FAMILY_MOVES = 1e-6
"""Radians, or shares of the length, that a joint moves along a family to belong to it."""

FAMILY_TRAVEL = 1e-9
"""Radians, or shares of the length, beyond travel that still count as within it."""

FAMILY_RELATION = 1e-9
"""Radians or metres by which a sum of joint values may change and still be told as the same."""

SAME_FAMILY = 3e-3
"""Radians, or shares of the length, between a posture and the straight line between points of a
curve, 0.1 apart, within which it lies on it: the curve leaves its chord by some 1e-3."""

SHORTEST_FAMILY = 2.0
"""Length of a curve that does not close below which it is none: self-motions do not end, but beside
one, 1e-8 from it, the tool stays within what counts as exact for a tenth of a turn."""

# --- six joints with a special triple ------------------------------------------------------------
LANDED = 2e-14
"""Gap, over L and in rad, up to which motions are not polished: rounding of the chain."""

GAP_SETTLED = 4e-15
"""Gap below which no step can better anything."""

STEP_SETTLED = 1e-15
"""Step below which motions no longer change in doubles of their size."""

NO_HOPE = 1e-6
"""Relative decrease of the squared gap below which a step that is far from the target leads to a
posture that is nearest, not to one that is there."""

ACCEPTED = 1e-9
"""Gap up to which motions are a solution: what is promised of exact ones."""

MOST_IDLE = 3
"""Steps that hardly better what is a solution already: it may be nearest, not there."""

LOOSE = 1e-12
"""Gap from which motions are no solution to the last digit: they may have stopped on the ridge
between two solutions, or just before a fold that the target lies behind."""

NEAR_ROOT = 10.0
"""Distance to such a solution over the root of the gap: the gap is a parabola there, and arms bend
it by about 1."""

EXACT_SLACK = 1e-9
"""Slack for exact tables: far above rounding, far below what polishing cannot mend."""

SLACK_OF_RESIDUAL = 20.0
"""Slack per residual of a rounded table: a double root splits, or vanishes, within some of it."""

NEARLY_FREE_SLACKS = 100.0
"""Slacks of a rounded table within which a joint is nearly free: its value is known to a hundredth
of a radian."""

FOLD_SLACKS = 10.0
"""Distance of two roots over the root of the slack that may have made one of two such pairs
vanish: roots part by the root of what is amiss."""

CLOSES = 1e-6
"""By how much (rad, or over L) a triple may fail to close and still be tried: near a double root
of the outer joints they are known to half of the digits, and less where a joint is nearly free."""

CLOSES_SLACKS = 10.0
"""The same where the table is rounded, in its slacks."""

WORTH_POLISHING = 0.1
"""Gap (over L, rad) beyond which a candidate is no rounding away from its target."""

SAME_MOTIONS = 2e-7
"""Radians (or over L) between motions that are one solution: at a fold, motions this far apart
leave gaps of 1e-14 between them, and nobody can tell them apart."""

NEARLY_LANDED = 1e-7
"""Gap of polished motions up to which a target that nothing reaches may be lost to rounding."""

EDGE = 1e-8
"""Shortfall, over L or rad, up to which a no may be rounding."""

EDGE_SLACKS = 100.0
"""The same where the table is rounded, in slacks of the regional problem: of 600 000 targets that
had a solution and found none the shortfall was up to 8, once 67."""

BESIDE_FOLD = 10.0
"""Smallest singular value, over the root of the slack, up to which a solution may have a twin that
the exact arm nearby has not."""

# --- two slides ----------------------------------------------------------------------------------
NEAR_CIRCLE = 0.1
"""How far from real a turn may be and still be tried: what is no root does not land, and a double
root that rounding has split lies some 1e-7, three roots in one some 1e-5, off."""

DOUBTFUL_ROOT = 1e-3
"""The same, within which one that does not land leaves a no open."""

NEARLY_CLOSES = 1e-2
"""Squared sine by which a triangle of directions may fail to close and still be tried: beside a
root that is off by as much as one that is doubtful, it closes to much less."""

FURTHEST_SLIDE, SLIDE_AT_HAND = 1e4, 100.0
"""Lengths of the arm that a slide may have to go, since slides that are nearly parallel lead
anywhere: beyond the first nothing is looked for, and within the second a root that is lost leaves a
no open."""

HARDLY_TURNS = 3e-3
"""Squared sine between directions below which roots beside it are doubtful however far from real:
six in a heap were seen to lie some 1e-2 off."""

IN_LINE = 1e-10
"""Squared sine between the axes that a target may turn into line, below which half of the digits
are lost and a no is not proved."""

VANISHES = 1e-8
"""Share of its usual size below which an equation may be no equation at all."""

# --- branch and bound ------------------------------------------------------------------------
BOX_BUDGET = 1_000_000
"""Boxes that are looked at for one target: about a second."""

BOX_BUDGET_OF_MANY = 250_000
"""The same for all targets of a question with more than one that is left: a quarter of a second."""

BOXES_TO_CONFIRM = 50_000
"""The same for a target that a complete method refuses to few joints: what it may have lost to
typed digits is met within some hundred, or with five joints some ten thousand."""

BOX_ROUNDING = 1e-12
"""Share of the length, or radians, that a box must miss its target by beyond what is worked out: a
thousand times what rounding leaves of a chain."""

WIDEST_TURN = 1.5
"""Radians that the tool may turn in a box for its turn to be looked at by its Jacobian: a little
less than half pi, up to which balls of rotations are convex."""

RING_COARSER = 10.0
"""Times the tolerance of a place by which that of where a ring is cut may be wider, as a turn moves
what is far from the tool: what is exact stays so, what is typed does not."""

LARGEST_LEAF, SMALLEST_LEAF = 0.03, 1e-8
"""Radians, or shares of the length, that a tool moves in a box from whose middle it is led downhill
to the target: as soon as that mostly arrives, a tenth the next time, and no more where doubles no
longer tell boxes apart."""

# --- elimination ---------------------------------------------------------------------------------
ELIMINATION_ANGLE = 0.1
"""Radians that an eigenvalue's angle may be off the real axis and still be tried: a double root
splits by the root of rounding over what was divided by; what was no root is polished away."""

ELIMINATION_STILL = 1e-9
"""Share of the third joint in an equation that counts as without it: above rounding, below what
polishing cannot mend."""

# --- joints to spare ---------------------------------------------------------------------------
HELD_STEP = 0.034906585039886591
"""Radians (2 deg) between the values that a joint to spare is held at: elbows and wrists pass a
stretch of travel narrower than that within a stretch the search finds, or nobody can use."""

HELD_SHARES = 120
"""Steps that the travel of a slide is divided into: 50 mm of a track of 6 m."""

SAME_PATH = 0.5
"""Radians, or shares of the length, by which a joint may change between neighbouring held values
and still be on one path: fourteen times as fast as the joint held, beside a singular posture."""

EDGES_MEET = 1e-6
"""Radians, or metres, between edges of stretches that may be one: halving leaves a thousandth."""

POSTURES_MEET = 1e-2
"""Radians, or shares of the length, between postures at such edges that are one: ways part by the
root of the distance from where they merge, some 1e-4 here, times what an arm bends it by."""

# --- cones -------------------------------------------------------------------------------------
WITHIN_CONE = 0.999
"""Share of a cone that tool z is led to: what ends at the edge of it is within it for certain."""

ELIMINATION_SOUND = 1e-7
"""What was divided by, over the largest, below which an order of the joints, or a target, is not
relied on: eigenvalues keep half of their digits down to it. Dependent equations leave 1e-14."""

ELIMINATION_REAL = 1e-7
"""Radians off the real axis up to which an eigenvalue is counted as a real one. A double root
splits by more, and is counted by asking a second order."""

ELIMINATION_UNSURE = 1e-3
"""Radians off the real axis up to which an eigenvalue that led to no solution leaves a no open."""

BESIDE_A_FOLD = 1e-2
"""Smallest singular value of a solution up to which the other one of its pair is looked for where
solutions are odd in number."""
