"""Which motion an arm has for a seed."""

import numpy as np
import pytest

from kinematics.travel_limits import travel_margin
from service import demo
from service.simulation.motion import USUAL_SEED, wandering_of
from service.wire.arms import read_arm

DOCUMENTS = demo.documents()
OF_THE_TABLE = ("name", "convention", "units", "rows", "combined_travel")


@pytest.mark.parametrize("document", DOCUMENTS, ids=[document["name"] for document in DOCUMENTS])
def test_each_arm_of_the_demonstration_wanders_within_its_travel(document: object) -> None:
    assert isinstance(document, dict)
    arm = read_arm({key: document[key] for key in OF_THE_TABLE if key in document}).arm
    wandering = wandering_of(arm, USUAL_SEED)
    postures = np.array([wandering.at(0.05 * step) for step in range(1200)])
    assert (travel_margin(arm, postures) > 0.0).all()
    assert (np.ptp(postures, axis=0) > 0.0).all()


def test_arms_of_one_table_move_each_in_its_own_way() -> None:
    document = {key: DOCUMENTS[0][key] for key in OF_THE_TABLE if key in DOCUMENTS[0]}
    one, same, other = (
        wandering_of(read_arm({**document, "name": name}).arm, 3).at(5.0).tolist()
        for name in ("left", "left", "right")
    )
    assert one == same
    assert one != other
