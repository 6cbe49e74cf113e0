"""Areas and volumes of data/reach.json, each read off the whole arm."""

import numpy as np
import pytest

from kinematics.envelope.envelope import envelope_of
from tests.published.cases import cases_of
from tests.published.test_reach import WAITING, arm_of

CASES = cases_of("reach")


def test_these_are_all_that_test_reach_leaves() -> None:
    asked = {name for name, case in CASES.items() if "quantity" in case["input"]}
    assert asked == set(WAITING)
    assert len(asked) == 8


@pytest.mark.parametrize("name", WAITING)
def test_published_areas_and_volumes(name: str) -> None:
    """An area is that of a plane arm's plan, a volume that of the reach; all are exact."""
    case = CASES[name]
    envelope = envelope_of(arm_of(case["input"]["arm"]), np.eye(4))
    found = {"area": envelope.plan.area, "volume": envelope.volume}[case["input"]["quantity"]]
    expected = case["expected"]["value"]
    assert envelope.exact
    assert abs(found.value - expected) <= found.error_bound
    assert abs(found.value - expected) <= case["tolerance"]["rel"] * expected
    assert found.error_bound <= case["tolerance"]["rel"] * expected
