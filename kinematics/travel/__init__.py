"""Moves of the tool from place to place on one continuous branch of postures."""
