"""A sixth joint for arms of five: where it is put, and that it does what the others cannot."""

import numpy as np
import pytest

from kinematics.inverse.missing_joint import with_missing_joint
from kinematics.inverse.screws import Screws, screws_of
from tests.kinematics.example_arms import AT_FLANGE, FIVE, arm_of, prismatic, revolute

OFFSET = np.eye(4)
OFFSET[0, 3] = 0.1


@pytest.mark.parametrize(("tool", "place"), [(AT_FLANGE, 4), (OFFSET, 5)], ids=["axial", "beside"])
def test_it_stands_at_the_tool_or_before_the_last(tool: np.ndarray, place: int) -> None:
    screws = screws_of(arm_of(*FIVE), tool)
    extended = with_missing_joint(screws)
    assert extended is not None
    whole, put = extended
    assert put == place
    assert whole.rows == 6
    for name in ("axis", "point", "prismatic"):
        kept = np.delete(getattr(whole, name), put, axis=0)
        np.testing.assert_array_equal(kept, getattr(screws, name))
    np.testing.assert_allclose(whole.point[put], screws.tool_at_zero[:3, 3])


def test_none_serves_an_arm_that_lacks_more_than_a_turn() -> None:
    rows = [prismatic(), *(revolute(a=0.3) for _ in range(4))]
    screws: Screws = screws_of(arm_of(*rows), AT_FLANGE)
    assert with_missing_joint(screws) is None
