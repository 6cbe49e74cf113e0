"""Fresh seeds for tests that must hold for any: printed, so that pytest shows them on failure."""

import secrets

import numpy as np


def fresh() -> np.random.Generator:
    """Return a generator with a seed of its own, and print the seed."""
    seed = secrets.randbits(32)
    print(f"seed {seed}")
    return np.random.default_rng(seed)
