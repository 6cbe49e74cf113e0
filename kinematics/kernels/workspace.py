"""Where the pieces of a block of postures lie in the one flat workspace of the chain kernels."""

BLOCK = 128
"""Postures worked on together: the workspace of 14 kB stays in the innermost cache."""

COSINE = 0
SINE = BLOCK
"""Cosine and sine of a row's turn; before they are there, the row's value."""

X = 2 * BLOCK
Y = 5 * BLOCK
Z = 8 * BLOCK
POINT = 11 * BLOCK
"""Three entries each of the current frame's axes and origin, in the base."""

SIZE = 14 * BLOCK
