"""Whether an arm gets to a target, how, and if not, why: an honest yes and an honest no."""
