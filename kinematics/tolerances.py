"""Thresholds that several parts of the core share, each with its reason.

Lengths in metres, angles in radians. Left out: those of one package (its own tolerances.py).
"""

# --- input ---------------------------------------------------------------------------------
LARGEST_MAGNITUDE = 1e9
"""Metres or radians; beyond it a double no longer resolves a tenth of a micrometre."""

SHORTEST_LENGTH = 1e-9
"""Metres; a characteristic length below it is rounding left of 0, or a slip of units. Divided by
one of 1e-300 m every number of a judgement would leave the range of doubles."""

SLOWEST_SPEED = 1e-9
"""Radians or metres per second: a turn takes two hundred years. A joint whose top speed is below
it does not move, and numbers divided by the speed would leave the range of doubles."""

NARROWEST_TRAVEL = 1e-9
"""Radians or metres; a travel below it is empty to any encoder, and shares of it would leave the
range of doubles."""

MOST_ROWS = 32
"""Rows of a table: twice the longest chains in plants, and a bound for work per posture."""

MOST_PLACED = 2000
"""Arms, and frames, of a cell: some hundred times what stands in one, and still placed within a
tenth of a second."""

MOST_STEPS = 1000
"""Turns one after the other: far more than anybody writes, and products of so many stay within
some 2e-13 of a rotation."""

RIGID_SILENT = 1e-12
"""max |R^T R - I| that products of doubles reach by themselves; not worth a word."""

RIGID_REPAIRED = 5e-3
"""max |R^T R - I| of matrices typed with three decimals; beyond it the typing is at fault."""

QUATERNION_SILENT = 1e-6
"""Deviation of the norm from 1 that six printed decimals leave."""

QUATERNION_ZERO = 1e-6
"""Norm below which a quaternion's direction is lost in its rounding."""

# --- angle triples -------------------------------------------------------------------------
LOCK_EXACT = 9e-13
"""Radians from gimbal lock at which the last angle is put to 0. The rotation then changes by no
more than this, so that all forms still return to the same matrix within 1e-12."""

LOCK_NOTICE = 1e-7
"""Radians from gimbal lock within which the middle angle prints as locked (four decimals of a
degree are 1.7e-6 rad) while first and last swing with the last digits of the input."""

# --- drive map -----------------------------------------------------------------------------
DRIVE_MAP_SINGULAR = 1e-9
"""Smallest over largest singular value of C over the driven rows: ratios are typed with some six
digits, so a map this close to singular was meant to be singular."""

# --- singularity (pure numbers: linear rows over L, prismatic columns times L) --------------
SINGULAR = 1e-9
"""Smallest singular value that counts as zero: a joint within about 1e-9 rad of the place, far
below any encoder's step (1e-6 rad), and far above the rounding of the kernels (1e-15)."""

NEAR_SINGULAR = 0.06
"""Smallest singular value that counts as near, over that of the best sample posture: the joints
must move some sixteen times faster than at their best for the same tool speed. A share, since L is
the sum of all links: long arms reach 0.2 at best and gantries 0.9, and with one number for all
either a fifth of an arm's postures would be near or a gantry never. A warning that is mostly on is
worth nothing; the shares for each demonstration arm are in DEVELOPERS.md."""

GENERIC_RANK = 1e-4
"""Singular value, relative to the largest, that a motion must reach in some posture to count as
one the arm was built for. Angles typed with four decimals (5e-5 rad) tilt parallel axes by less."""

SAMPLE_POSTURES = 16
"""Postures whose best rank counts as generic; fixed by the wire's contract."""

# --- rotations -----------------------------------------------------------------------------
HALF_TURN_NOISE = 2e-15
"""Radians from a half turn that products of doubles leave by themselves. Within it -180 deg is read
as 180 deg and a quaternion's w as 0, so that the sign of rounding noise decides no sign."""

SAME_AXIS = 2e-15
"""Sine between directions that are one: products of doubles leave this by themselves, and a turn
about the one moves nothing by more than this from a turn about the other."""

NO_TURN = 1e-14
"""Radians below which what is left of turns that cancel may be called rounding of the angles that
went in; ten turns and one back leave this much. Left out, it moves nothing by more."""

SHORT_VECTOR = 1e-10
"""Length below which sin(x)/x and x/sin(x) are 1 to the last digit (the next term is x^2/6)."""

AXES_PARALLEL = 1e-4
"""Sine between axes that count as parallel: covers angles typed with four decimals of a radian."""

AXES_MEET = 1e-6
"""Distance, over L, of axes that count as meeting: lengths are typed to a micrometre at best."""

KIND_AT = 1e-6
"""Measure of a kind at a singular posture: joint values typed with six decimals of a degree."""

KIND_NEARBY = 0.3
"""Measure beyond which no geometric kind explains a near posture, and its joints name it."""

KIND_TYPICAL = 1e-3
"""Measure that a kind must reach in some posture; below it the arm is built that way."""

SUPPORT_AT = 1e-5
"""Share of a unit null motion by which a joint takes part; rounding leaves some 1e-15."""

SUPPORT_NEAR = 0.05
"""The same near a singular posture, where the weakest motion also stirs the other joints."""

NUDGE = 1e-6
"""Radians (or L) by which a joint is moved aside to tell a lost direction from a missing one; the
direction found is off by no more than about this."""

LOST_PART = 1e-3
"""Share of the moving (or turning) part of a lost motion below which words leave it out."""

NAMED_AXIS = 0.9998
"""Cosine within which a direction is called by its axis: about one degree, as people see it."""

UNMET_TWIST = 1e-9
"""Share of a twist that may be left unmet without a word: far above rounding near regular
postures (condition below 1e4), far below what a tool path would show."""

LEVEL_VALUE = 1e-12
"""Change of a singular value per radian (or L) below which it counts as level: rounding leaves
1e-15, and the singular place would lie further off than any joint can turn."""

TRAVEL_TIE = 1e-9
"""Relative difference within which two joints' travels to a singular place are the same length,
and the lower joint is named: rounding must not choose."""

FURTHEST_STEP = 100.0
"""Radians, or L, of a first-order step to a singular place beyond which it is not told: no joint
travels that far, and the step says only that the value hardly changes here."""

MOST_SPARE = 2
"""Spare joint motions up to which the fewest joints are looked for: the search tries every pair of
joints, and every triple would take a hundred times as long for arms that hardly exist."""

SETTLED_DECIMALS = 9
"""Decimals to which shares of an axis are compared, so that rounding does not choose the axis."""

KIND_TIED = 1.5
"""Measures of kinds within this factor of the closest are told together near a posture that both
lead to."""

LINES_CROSS = 1e-12
"""Difference of slopes, pure numbers, below which two lines of a joint demand do not cross."""

# --- guesses of what a screen shows ----------------------------------------------------------
MOST_READOUTS = 100
"""Readouts of one screen: three settle what it shows, and a hundred are still answered within half
a second."""

SHOWN_TURN = 12.566370614359172
"""Radians, two turns: beyond it nobody shows an orientation, and 90 on a screen are no half turns.
With a unit that is said any angle will do."""

SHOWN_LENGTH = 0.05
"""How far off 1 a shown quaternion or axis may be in length, and a matrix off a rotation: two
decimals leave 0.01, and numbers further off mean something else."""

GUESS_FITS = 0.008726646259971648
"""Radians (0.5 deg) within which a reading explains a readout, unless the caller says otherwise:
what edges and levels show a careful eye, and ten times what encoders and screens leave."""

GUESS_FITS_MOST = 0.5235987755982988
"""Radians (30 deg); with a wider tolerance half of all readings would explain anything."""

GUESS_DECIMALS = 9
"""Decimals of a radian to which residuals are told: beyond them rounding would rank what is equal,
and no screen shows as many."""

TOLD_APART = 0.17453292519943295
"""Radians (10 deg) between predictions that anybody sees by looking at the tool."""

LOCK_AVOIDED = 0.2617993877991494
"""Radians (15 deg) that numbers to bring onto a screen keep from gimbal lock, and a rotation vector
from a half turn: near it a screen shows one of several triples, and not the one asked for."""

PAIRS_TRIED = 12_000_000
"""Pairs of maps held against each other in search of the next readout: a tenth of a second."""

# --- relations between frames ----------------------------------------------------------------
LOOP_CLOSED = 1e-6
"""Metres, and radians, within which a loop of relations closes: lengths are typed to a micrometre
and angles to four decimals of a degree (1.7e-6 rad) at best."""

USUAL_POSITION_SD = 1e-3
"""Metres; the standard deviation of a relation that states none: what a frame taught by touching
is good to. Only its ratio to others matters to the estimate."""

USUAL_ANGLE_SD = 1e-3
"""Radians; a millimetre over a metre, which is how such a frame's axes are found."""

SMALLEST_SD = 1e-9
"""Metres, and radians; rounding of the relation itself is of this size where they are large."""

LARGEST_SD = 1e3
"""Metres, and radians; what is known no better than this is not known."""

ESTIMATE_SETTLED = 1e-8
"""Length of the last step of an estimate over its own standard deviation: no digit that means
anything still changes."""

SDS_APART = 1e5
"""Ratio of standard deviations, of positions or of angles, within one estimate. Normal equations
square it. Up to here estimates that settle agree with those of an orthogonal factorisation to 1e-6
of their own deviation, or to the rounding of coordinates where that is more, and redundancies to
2e-5; at ten times as much, one in seven with all deviations at either end no longer settles. No
plant has gauges as far apart as 10 nm and 1 mm."""

ROUNDING_AMPLIFIED = 4e12
"""Condition number of the normal equations, their diagonal scaled to 1, beyond which an estimate
has not converged: a thousandth of each step is rounding then. A ring of 200 frames, each 100 m from
the next, has a tenth of it."""

RELATION_WRONG = 22.457744484825323
"""Reduction of the weighted sum of squares, when a relation is left out, beyond which it is more
than chance: the 0.999 quantile of chi-square with the six numbers of a relation. Baarda, A Testing
Procedure for Use in Geodetic Networks, 1968, takes one in a thousand likewise."""

UNCONTROLLED = 1e-7
"""Share of a mistake that shows in the residuals (the redundancy) below which nothing checks it:
rounding leaves some 1e-10 of it."""

SUSPECTS_ALIKE = 1e-6
"""Relative difference of two relations' statistics within which neither is the more likely wrong:
in a single loop all are the same, but for rounding and the bend of large residuals."""

# --- joint motions for a pose ----------------------------------------------------------------
TARGET_POSITION = 1e-5
"""Metres (0.01 mm) by which an arm with fewer than six joints may miss a target that states no
tolerance of its own: what two decimals of a millimetre leave; fixed by the wire's contract."""

TARGET_ANGLE = 1.7453292519943296e-4
"""Radians (0.01 deg), likewise: what two decimals of a degree leave."""

TRAVEL_EDGE = 1e-7
"""Radians or metres by which a joint value may exceed its limit and be put onto it, if the tool is
then still on the target: a stretched arm's joint values are good to the root of the rounding."""

PASSIVE_FITS = 1e-7
"""Radians or metres by which a row without a joint value may be off the motion its couplings give
it: far above the rounding of solutions, far below what whole turns through a ratio make."""

MOST_TURNS = 256
"""Postures of one solution that are looked at: six joints of two turns each have 64."""

LOST_RANK = 1e-6
"""Smallest singular value, lengths over the arm's, of solutions that may be points of a continuum,
and beside which a no is not proved: joint values are good to some 1e-10 there, tens of times less
than the tolerance of poses leaves open."""

NEARLY_ALIGNED = 1e-2
"""The same of five joints with the missing one put in: a typed target is off by some 1e-4 rad,
which an axis that is in line but for a hundredth meets by turning through a degree and more."""

WORTH_COMPROMISING = 100.0
"""Tolerances by which a solution of five joints may miss, where it is in line with the missing one,
for a no not to be proved: what a hundredfold magnification leaves of an error."""

SAME_COMPROMISE = 1e-6
"""Radians, or metres, within which two postures that miss a target least are one: steps downhill
end within the root of the rounding of what is left."""

NEARLY_REACHED = 10.0
"""Tolerances by which an arm of few joints may fall short at some stage and still be tried for a
pose within tolerance: shortfalls of one stage are not yet errors of the pose."""

AXES_WELL_ASLANT = 0.01
"""Sine between tool z and the axes of an arm that cannot tilt from which on a target has one turn
about tool z alone: below it the tolerance of an angle leaves some degrees of that turn open."""
