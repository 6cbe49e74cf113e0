"""A ring of samples that never grows beyond its room."""

import numpy as np
import pytest

from service.live.history import KEPT_S, History


def test_ten_minutes_of_a_fast_input_stay_within_their_room() -> None:
    history = History(2)
    for number in range(140_000):  # 700 s at 200 Hz
        history.add(number / 200, number, False, (number / 2, 0.0))
    table = history.table(0.0)
    assert len(table) == len(history) <= 30_000
    assert table[-1, 1] == 139_999
    assert table[-1, 0] - table[0, 0] == pytest.approx(KEPT_S, abs=0.1)
    assert (np.diff(table[:, 0]) < 0.03).all()
    assert np.array_equal(table[:, 3], table[:, 1] / 2)


def test_around_a_moment() -> None:
    history = History(1)
    assert history.around(1.0) is None
    for number in range(5):
        history.add(float(number), None, number == 2, (number * 10.0,))
    before, after = history.around(1.25) or (None, None)
    assert before is not None
    assert after is not None
    assert (before.happened_s, after.happened_s) == (1.0, 2.0)
    assert (before.simulated, after.simulated) == (False, True)
    assert (before.sequence, after.joints) == (None, (20.0,))
    exact = history.around(3.0)
    assert exact is not None
    assert exact[0] is exact[1]
    assert history.around(4.0) is not None
    assert history.around(4.001) is None
    assert history.around(-0.001) is None


def test_parts_of_it_also_where_the_ring_begins_anew() -> None:
    history = History(1)
    for number in range(1000):
        history.add(number * 2.0, number, False, (0.0,))
    whole = history.table(0.0)
    assert whole[0, 0] >= 1998.0 - KEPT_S
    part = history.table(1500.0, 1510.0)
    assert part[:, 0].tolist() == [1500.0, 1502.0, 1504.0, 1506.0, 1508.0, 1510.0]
    assert history.table(5000.0).shape == (0, 4)
    part[:] = -1.0
    assert (history.table(0.0) == whole).all()  # a copy
