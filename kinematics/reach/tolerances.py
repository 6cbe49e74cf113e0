"""Thresholds of verdicts and of samples, each with its reason.

Lengths in metres, angles in radians. Left out: how close solutions come
(kinematics/tolerances.py, kinematics/inverse/tolerances.py).
"""

EXACT_REACH = 1e-9
"""Share of the length, and radians, within which six joints and more are on their target; fixed by
the wire's contract."""

BOUND_ROUNDING = 1e-9
"""Share of the arm's length by which a target must exceed a bound: a target that is exactly as
far away as the links reach is theirs, and what solvers accept is within 1e-9 as well."""

BRANCH_LEVEL = 1e-9
"""Sign of a feature, over the length, that is told as the first of its words: where two ways meet
rounding must not choose."""

BRANCH_SETTLED = 1e-6
"""The same in the posture that settles which side of an arm is which: tables are typed."""

WORTH_LEADING = 1000.0
"""Tolerances by which a solution of few joints may miss and still be led to where it misses least:
beside a fold what is typed moves it a hundred times as far and more, and leading it takes
microseconds."""

FAMILY_MEMBER = 1e-6
"""Radians, or metres, by which a posture may differ from a family in the joints that this holds
still and be one of its points: near singular places joint values are good to some 1e-8."""

MOST_FOLLOWED = 200
"""Targets checked together whose families are followed: some 5 to 20 ms each, seconds in all."""

MOST_SPARE_FOLLOWED = 1
"""The same for arms with joints to spare, whose every posture is of families: some 50 ms each."""

MOST_SPANNED = 50
"""The same for arms of which one joint is held at many values: some 10 ms each, half a second."""

MOST_LISTED = 64
"""Postures of one target that are listed, best first: nobody chooses among more."""

LARGEST_CONE = 3.141592653589793
"""Radians: a cone of half a turn to each side holds every direction."""

FEWEST_SAMPLES_KEPT = 1.0 / 1024.0
"""Share of the postures drawn in the box around travel that keep to combined travel: below it a
million samples take minutes, and the limits are most often typed wrong."""

SAMPLES_JUDGED = 16384
"""Samples whose nearness to singular postures is judged: a share is then told to half a percent,
in some 50 ms; evenly spread, they err less than so many drawn by chance."""
