"""Thresholds of envelopes, each with its reason. Shares are pure numbers."""

AREA_AGREES = 1e-12
"""Share of an area by which two halves of a strip may differ from the whole: what rounding leaves
of a dozen terms; some hundred strips then stay within 1e-9."""

MOST_AREA_HALVINGS = 24
"""Of a strip in which two boundary curves cross: what is left of it then is 1e-7 of its height,
and its share of the area less than 1e-13."""

MOST_STRIPS = 2000
"""Halved at a time; some hundred are where all goes well, and then ever fewer."""

IN_ONE_PLANE = 1e-9
"""Share of an arm's length by which its point may leave a plane, or a joint move it, and not count:
what the rounding of twenty rows leaves, a hundredfold; typed tables leave more, or none."""

SAME_FOLD = 1e-9
"""Share by which a determinant may change along what should be its level line: rounding, as
``IN_ONE_PLANE``."""

FIRST_LEVELS = 33
"""Level lines of a slab before any is halved: what begins and ends between two of them is missed,
and it would have to be as thin as a thirtieth of what two neighbouring corners are apart."""

MOST_LEVEL_ROUNDS = 40
"""Halvings of a gap between level lines: down to rounding, 1e-12 of the region."""

NEXT_TO_A_CORNER = 1e-12
"""Share of a region's height by which level lines stay clear of corners, and at which two lines
are one: a hundred roundings; a stretch that begins like a root is then 1e-6 wide."""

SAME_PLACE = 1e-9
"""Share of a region's size within which two points are one: nothing is drawn that fine."""

MOST_PAIR_TURN = 26.0
"""Radians, some four turns, of a joint in a pair: edges are looked at in 256 steps, and a linkage's
joint that turns farther would be looked at too rarely."""

CHORD = 1e-4
"""Share of a region's size by which a straight line between two points of a curve may be off: a
tenth of a line's width on a printed page, at some two hundred points a circle."""

AT_LIMIT = 1e-12
"""Of 1 rad or the arm's length, within which a joint stands at its limit: rounding."""

LEAST_DAMPING = 1e-12
FIRST_DAMPING = 1e-4
MOST_DAMPING = 1e6
"""Share of the mean square motion added to steps: small enough that steps near a place are whole,
above rounding where a direction is lost, and so large at last that nothing nearer is in sight."""

LONGEST_STEP = 0.6
"""Of a joint in one step, rad or lengths of the arm: beyond it a straight motion tells little."""

MOST_STEPS = 30
"""Of a search; most take six."""

NO_NEARER = 5e-3
"""Of a distance squared: a search that gains less twice in turn has come as near as it gets."""

NEAREST_TRIED = (1, 3)
"""Which of the sampled postures nearest to a place are tried after the nearest."""

OTHERS_TRIED = (2, 5, 9, 15, 24, 36)
"""The same of places beside those reached, where a no draws the boundary: farther ones too, which
bend other ways."""

CROSSING_HALVINGS = 10
"""Of the way between two places of a grid: a boundary is drawn within a thousandth of it."""

DRAWN_BOUND = 4.0
"""Standard deviations of a volume drawn: one in ten thousand is farther off, were each cube as
doubtful as can be, which they are not."""

EXTREME_STARTS = 6
"""Best sampled postures an extreme is looked for from; other branches come close behind."""

EXTREME_BEYOND = 0.05
"""Of the arm's length, how far beyond the best is looked first: samples fall short by less."""

NEAR_EXTREME = 1e-11
EXTREME_ROUNDS = 60
"""Goals are put a 32nd as far ahead each time, but for those that are reached, until they are
1e-12 of the length ahead; most extremes take ten rounds."""

POSTURES = 2**14
SEED = 1
"""Sampled postures that searches start from, and which ones: enough that each square of the default
grid has one near it, and drawn in a hundredth of a second."""

REACHED = 1e-10
"""Of the arm's length, how near a place a search must end to have reached it: what the chain's
rounding leaves, a thousandfold."""

SOME_SIZE = 1e-7
"""Of the arm's length, how far a joint must move the point along a direction to count: a reach
thinner than that has no size to be drawn."""

DEFAULT_CELLS = 64
MOST_CELLS = 2048
"""Steps of a grid along what is reached: with the first an answer takes a second and an area is
told within half a hundredth, with the second it takes minutes."""

FEWEST_CELLS = 4
"""The same: with fewer the grid says nothing of a shape."""

PLACES_DRAWN = 4000
"""In the box around what is reached: a volume is told within two to eight hundredths, in half a
second."""

AXES_MEET = 1e-6
"""Of the arm's length, or rad: axes that pass each other by less meet, as tables with four decimals
leave it."""

EXTREME_STEPS = 60
"""Of a search for an extreme: where it is flat, half as many leave 1e-7 of the length."""

MOST_CUBES = 256
"""Along what is reached, in which places are drawn: what is thinner is told as a box."""

SHORT_OF = 1.25
"""Of the box around sampled postures, what surely holds all that is reached: each side falls short
by some hundredths."""

LINKS_ROUNDING = 1e-12
"""Of the arm's length, and for each radian of travel beyond one: what rounding leaves of places
known in closed form, a hundredfold."""
