"""Compiled loops over many postures: plain arrays in and out, no arms, no checks.

Blocks of postures are worked on as structures of arrays in one flat workspace whose offsets are
compile-time constants: only then can the compiler prove that the pieces do not overlap and use
the processor's vector registers.
"""
