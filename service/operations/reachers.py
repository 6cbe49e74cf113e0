"""What tells whether targets can be reached: one for an arm's table and a tool, as long as in use.

To look at an arm's geometry takes longer than to answer for a target. Left out: the answering.
"""

from collections.abc import Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING
from weakref import WeakKeyDictionary, WeakValueDictionary

import numpy as np

from kinematics.arm import Arm
from kinematics.errors import KinematicsError
from kinematics.reach.targets import PROOFS, SEARCH, Target, Targets
from kinematics.table import FloatArray
from service.errors import UnusableValue

if TYPE_CHECKING:
    from kinematics.reach.checks import Reacher

_Key = tuple[str, bytes, float | None, bytes]

_kept: WeakValueDictionary[_Key, "Reacher"] = WeakValueDictionary()
"""By the digest of the table, where the base stands, the length that singular values are told by,
and the tool's numbers: what else an arm has changes no answer."""

_QUICK_S = 3e-4
"""A few hundred microseconds of arithmetic hold up nobody."""

_quick: WeakKeyDictionary["Reacher", dict[int, bool]] = WeakKeyDictionary()

_methods: WeakKeyDictionary["Reacher", dict[frozenset[int], dict[str, object]]] = (
    WeakKeyDictionary()
)


def reacher_of(arm: Arm, table_digest: str, tool_in_flange: FloatArray) -> "Reacher":
    """Return what answers for an arm with a tool, the same one for the same numbers.

    Raises
    ------
    KinematicsError : the arm has no joints.
    """
    # Imported when first wanted: its modules and kernels are as many as all others together.
    from kinematics.reach.checks import Reacher

    key = (
        *(table_digest, arm.base_in_world.tobytes(), arm.characteristic_length),
        tool_in_flange.tobytes(),
    )
    known = _kept.get(key)
    return _kept.setdefault(key, Reacher(arm, tool_in_flange)) if known is None else known


def is_quick(reacher: "Reacher", freedom: int) -> bool:
    """Return whether one target takes less than to hand it to a thread would cost others.

    Not before ``method_of`` has been asked: to find out takes milliseconds, and holds others up.
    """
    return _quick.get(reacher, {}).get(freedom, False)


def method_of(reacher: "Reacher", targets: Targets) -> dict[str, object]:
    """Return what answers rest on, in words: a sentence for each freedom that occurs.

    Raises
    ------
    UnusableValue : a search, and nothing bounds where a sliding joint may be.
    """
    known, freedoms = _methods.setdefault(reacher, {}), frozenset(targets.freedom.tolist())
    if freedoms not in known:
        with about_the_arm():
            methods = reacher.methods(targets)
        quick = _quick.setdefault(reacher, {})
        for freedom in freedoms:
            one = Targets.of([Target(np.eye(4), freedom)])
            quick[freedom] = reacher.estimated_seconds(one) <= _QUICK_S
        proofs = {PROOFS[method.proof] for method in methods}
        if PROOFS[SEARCH] in proofs:
            _refuse_unbounded(reacher.arm)
        known[freedoms] = {
            "proof": proofs.pop() if len(proofs) == 1 else "mixed",
            "say": "; ".join(dict.fromkeys(method.say for method in methods)),
        }
    return known[freedoms]


@contextmanager
def about_the_arm() -> Iterator[None]:
    """Let what is wrong with a row of the arm lead to the arm, which may be a mere name.

    Raises
    ------
    KinematicsError : whatever was raised.
    """
    try:
        yield
    except KinematicsError as error:
        if error.where[:1] == ("rows",):
            error.where = ("arm",)
        raise


def _refuse_unbounded(arm: Arm) -> None:
    for index in arm.drive_map.driven:
        row = arm.table.rows[index]
        if not row.is_revolute and row.travel is None:
            raise UnusableValue(
                f"row {index + 1} slides without bounds, so there is no end to a search",
                where=("arm",),
                way_out=f"give row {index + 1} a travel",
                status=422,
            )
