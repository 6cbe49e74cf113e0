"""Arms that come whole are checked once, and nothing else of their requests is held."""

import gc
import weakref
from typing import Any

from service.wire.models import WHOLE_ARMS_KEPT, PosesRequest


class Vector:
    """Stands for a joint vector, and can be watched."""


def asked(name: str, *joints: object) -> PosesRequest:
    row = {"joint": "revolute", "a": 0.5, "alpha": 0, "d": 0, "theta": 0}
    arm: dict[str, Any] = {"name": name, "convention": "standard", "units": "m-rad", "rows": [row]}
    return PosesRequest.model_validate({"arm": arm, "joints": list(joints)})


def test_the_same_words_are_the_same_arm() -> None:
    assert asked("same", [0.1]).arm is asked("same", [0.2]).arm
    assert asked("same").arm is not asked("other").arm


def test_nothing_else_of_a_request_is_held() -> None:
    vector = Vector()
    watched = weakref.ref(vector)
    request = asked("held-alone", vector)
    assert request.joints == [vector]
    del request, vector
    gc.collect()
    assert watched() is None


def test_who_has_not_come_for_longest_goes_first() -> None:
    first, second = asked("arm-0").arm, asked("arm-1").arm
    for number in range(2, WHOLE_ARMS_KEPT):
        asked(f"arm-{number}")
    assert asked("arm-0").arm is first
    asked("one-more")
    assert asked("arm-0").arm is first
    assert asked("arm-1").arm is not second
