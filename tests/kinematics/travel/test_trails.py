"""A leg as far as it went: joint values in their own units, metres gone in between."""

import numpy as np
import pytest

from kinematics.travel.tracking import room_for
from kinematics.travel.trails import WHOLE, Trail


def trail(count: int) -> Trail:
    track = room_for(4, 2)
    track.shares[:], track.values[:] = [0.0, 0.25, 1.0, 9.0], np.arange(8.0).reshape(4, 2)
    scale, places = np.array([1.0, 0.5]), np.array([0.0, 0.1, 0.9, 9.0])[:count]
    return Trail(track, count, scale, 0.9, 0.0, 1.2, places, lambda shares: shares[:, None])


def test_what_is_beyond_the_count_is_not_told() -> None:
    whole = trail(3)
    assert whole.kind == WHOLE
    assert whole.shares.tolist() == [0.0, 0.25, 1.0]
    assert whole.postures.tolist() == [[0.0, 0.5], [2.0, 1.5], [4.0, 2.5]]
    assert (whole.last.tolist(), whole.share) == ([4.0, 2.5], 1.0)
    assert (trail(2).last.tolist(), trail(2).share) == ([2.0, 1.5], 0.25)


def test_metres_gone_rise_evenly_between_postures() -> None:
    assert trail(3).distance(0.25) == pytest.approx(0.1)
    assert trail(3).distance(0.625) == pytest.approx(0.5)
    assert trail(2).distance(1.0) == pytest.approx(0.1), "it went no further"
