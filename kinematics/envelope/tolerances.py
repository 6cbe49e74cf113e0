"""Thresholds of envelopes, each with its reason. Shares are pure numbers."""

AREA_AGREES = 1e-12
"""Share of an area by which two halves of a strip may differ from the whole: what rounding leaves
of a dozen terms; some hundred strips then stay within 1e-9."""

MOST_AREA_HALVINGS = 24
"""Of a strip in which two boundary curves cross: what is left of it then is 1e-7 of its height,
and its share of the area less than 1e-13."""

IN_ONE_PLANE = 1e-9
"""Share of an arm's length by which its point may leave a plane, or a joint move it, and not count:
what the rounding of twenty rows leaves, a hundredfold; typed tables leave more, or none."""
