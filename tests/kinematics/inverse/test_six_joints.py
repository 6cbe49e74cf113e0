"""Which method has all poses of which six joints."""

import numpy as np
import pytest

from kinematics.inverse.screws import screws_of
from kinematics.inverse.six_joints import six_joints_of
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.inverse.triple_arms import FAMILIES, _rows, arm_of


@pytest.mark.parametrize(
    ("kinds", "proof"),
    [
        ("RRRRRR", "elimination"),
        ("PRRRRR", "elimination"),
        ("PRRPRR", "elimination"),
        ("PRPRPR", "closed-form"),
    ],
)
def test_axes_in_no_special_place(kinds: str, proof: str) -> None:
    solver = six_joints_of(screws_of(arm_of(_rows(fresh()), kinds), np.eye(4)))
    assert solver is not None
    assert solver.proof == proof


@pytest.mark.parametrize("name", FAMILIES)
def test_exactly_special_axes_have_a_closed_form(name: str) -> None:
    solver = six_joints_of(screws_of(FAMILIES[name](fresh()), np.eye(4)))
    assert solver is not None
    assert solver.proof == "closed-form"


def test_four_slides_are_left_to_the_search() -> None:
    assert six_joints_of(screws_of(arm_of(_rows(fresh()), "PPPPRR"), np.eye(4))) is None
