"""Where the pieces of a block of postures lie in the one flat workspace of the chain kernels."""

BLOCK = 128
"""Postures worked on together: the workspace of 15 kB stays in the innermost cache."""

COSINE = 0
SINE = BLOCK
SLIDE = 2 * BLOCK
"""Cosine and sine of a row's turn, and how far the row lies along its axis."""

X = 3 * BLOCK
Y = 6 * BLOCK
Z = 9 * BLOCK
POINT = 12 * BLOCK
"""Three entries each of the current frame's axes and origin, in the base."""

SIZE = 15 * BLOCK
