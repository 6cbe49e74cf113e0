"""What tests of turns share: turns in few words, drawn ones, and Rodrigues' formula in mpmath.

Left out: what is expected of them.
"""

from collections.abc import Sequence

import mpmath
import numpy as np

from kinematics.rotation_steps import RotationStep, checked_step

X, Y, Z = (1.0, 0.0, 0.0), (0.0, 1.0, 0.0), (0.0, 0.0, 1.0)
QUARTER = np.pi / 2
EXACT = 1e-12
"""All forms and lists return to one matrix within this: LOCK_EXACT moves it by no more."""


def fixed(axis: Sequence[float], angle: float) -> RotationStep:
    return checked_step(list(axis), angle, about_fixed=True)


def current(axis: Sequence[float], angle: float) -> RotationStep:
    return checked_step(list(axis), angle, about_fixed=False)


def said(steps: Sequence[RotationStep]) -> list[tuple[str, float, bool]]:
    names = {X: "x", Y: "y", Z: "z"}
    return [(names[step.axis], round(step.angle, 12), step.about_fixed) for step in steps]


def random_steps(count: int, seed: int, *, named: float = 0.7) -> list[RotationStep]:
    """Return turns of which many share an axis with a neighbour."""
    rng = np.random.default_rng(seed)
    steps = []
    for _ in range(count):
        axis = np.eye(3)[rng.integers(3)] if rng.random() < named else rng.normal(size=3)
        steps.append(checked_step(axis, rng.uniform(-7, 7), about_fixed=bool(rng.random() < 0.5)))
    return steps


def in_mpmath(start: np.ndarray, steps: Sequence[RotationStep]) -> np.ndarray:
    """Return where turns lead by Rodrigues' formula with forty digits."""
    with mpmath.workdps(40):
        rotation = mpmath.matrix(start.tolist())
        for step in steps:
            x, y, z = (mpmath.mpf(part) for part in step.axis)
            length = mpmath.sqrt(x * x + y * y + z * z)
            x, y, z = x / length, y / length, z / length
            k = mpmath.matrix([[0, -z, y], [z, 0, -x], [-y, x, 0]])
            angle = mpmath.mpf(step.angle)
            turn = mpmath.eye(3) + mpmath.sin(angle) * k + (1 - mpmath.cos(angle)) * k * k
            rotation = turn * rotation if step.about_fixed else rotation * turn
        return np.array(rotation.tolist(), dtype=np.float64)
