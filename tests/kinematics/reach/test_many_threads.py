"""One Reacher asked by several threads at once answers each as if it were asked alone.

It is fresh, so that what is made when first wanted is made by whoever comes first. Switches between
threads are made far more often than usual.
"""

import sys
from collections.abc import Iterator
from concurrent.futures import ThreadPoolExecutor

import numpy as np
import pytest

from kinematics.reach.checks import Reacher
from kinematics.reach.targets import CONE, NONE, ORIENTATION, SPIN, Checks
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import CLASSES, postures_within_travel, targets_at

THREADS, POSTURES = 4, 8
EVERY = (NONE, SPIN, ORIENTATION, CONE)
ARMS = {
    "upright arm with wrist": EVERY,
    "1, 2 and 3 parallel": EVERY,
    "RRPR": (NONE, ORIENTATION),  # scans of its turns take a tenth of a second each
    "five, with wrist": EVERY,
    "place by RR": EVERY,
}


@pytest.fixture(autouse=True)
def _many_switches() -> Iterator[None]:
    usual = sys.getswitchinterval()
    sys.setswitchinterval(1e-5)
    yield
    sys.setswitchinterval(usual)


def told(checks: Checks) -> tuple[object, ...]:
    """Return all that is answered, as what can be compared."""
    numbers = checks.verdict, checks.proof, checks.offsets, checks.joint_values, checks.branch
    errors = checks.margin, checks.position_error, checks.angle_error
    words = [
        repr((checks.reason_of(index), checks.families_of(index), checks.findings_of(index)))
        for index in range(len(checks))
    ]
    return (*(array.tolist() for array in (*numbers, *errors)), words)


@pytest.mark.parametrize("name", ARMS)
def test_several_threads_are_answered_as_one(name: str) -> None:
    random = fresh()
    arm, tool, _ = CLASSES[name](random)
    asked = []
    for freedom in ARMS[name]:
        targets = targets_at(arm, tool, freedom, postures_within_travel(random, arm, POSTURES))
        targets.tool_in_base[::3, :3, 3] *= 3.0
        targets.cone[:] = 0.4
        asked += [targets.only(np.array([place])) for place in range(POSTURES)]
    alone = [told(Reacher(arm, tool).check(targets)) for targets in asked[::POSTURES]]
    shared = Reacher(arm, tool)
    orders = [random.permutation(len(asked)) for _ in range(THREADS)]

    def answers(order: np.ndarray) -> dict[int, object]:
        return {int(place): told(shared.check(asked[place])) for place in order}

    with ThreadPoolExecutor(THREADS) as pool:
        found = list(pool.map(answers, orders))
    assert all(each == found[0] for each in found)
    assert [found[0][place] for place in range(0, len(asked), POSTURES)] == alone
