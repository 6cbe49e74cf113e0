"""Results of several solvers put together, and a search for more than one solution."""

from dataclasses import replace

import numpy as np

from kinematics.chain import tool_in_base
from kinematics.inverse.found import Found, none_found
from kinematics.inverse.several import Several, joined, picked
from tests.kinematics.example_arms import AT_FLANGE, SIX, arm_of


def found_for(target: list[int], targets: int, marks: list[float]) -> Found:
    count = len(target)
    return replace(
        none_found(targets, 1),
        motions=np.array(marks).reshape(count, 1),
        target=np.array(target, dtype=np.intp),
        position_error=np.zeros(count),
        angle_error=np.zeros(count),
    )


def test_more_is_put_beside_what_was_found_for_the_same_target() -> None:
    first = found_for([0, 2], 3, [1.0, 2.0])
    more = replace(found_for([0, 1, 1], 2, [3.0, 4.0, 5.0]), open=np.array([True, False]))
    both = joined(first, more, np.array([1, 2]))
    assert both.target.tolist() == [0, 1, 2, 2, 2]
    assert both.motions.ravel().tolist() == [1.0, 3.0, 2.0, 4.0, 5.0]
    assert both.open.tolist() == [False, True, False]


def test_some_are_picked() -> None:
    found = found_for([0, 1, 1], 2, [1.0, 2.0, 3.0])
    assert picked(found, np.ones(3, bool)) is found
    assert picked(found, np.array([True, False, True])).motions.ravel().tolist() == [1.0, 3.0]


def test_a_search_finds_several_solutions() -> None:
    arm = arm_of(*SIX)
    target = tool_in_base(arm, np.array([[0.3, -0.8, 0.6, 0.9, 0.8, 0.2]]), AT_FLANGE)
    found = Several(arm, AT_FLANGE, "pose").solve(np.concatenate([target, target + 9.0]))
    counts = found.count_per_target()
    assert counts[0] >= 3
    assert counts[1] == 0
    assert len(np.unique(found.motions.round(5), axis=0)) == counts[0]
