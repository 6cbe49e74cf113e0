"""Seeds of tests that must hold for any: one for each test, or new ones where they are asked for.

`ARMSPAN_TEST_SEED=fresh` draws new ones, a number shifts all of them; each is printed, so that
pytest shows it on failure. Without it a test draws the same in every run: a few of them meet, once
in a hundred runs, a posture so close to a fold that what they ask for is more than doubles hold.
The full sizes, with new seeds in each run, are in tests/benchmarks.
"""

import os
import secrets
import zlib

import numpy as np


def fresh() -> np.random.Generator:
    """Return a generator with a seed of its own, and print the seed."""
    said = os.environ.get("ARMSPAN_TEST_SEED", "0")
    name = os.environ.get("PYTEST_CURRENT_TEST", "").split(" ")[0]
    seed = secrets.randbits(32) if said == "fresh" else zlib.crc32(f"{said} {name}".encode())
    print(f"seed {seed}")
    return np.random.default_rng(seed)
