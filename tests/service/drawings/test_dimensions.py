"""Dimensions in lanes: none through the words of another, whatever is to be told."""

from hypothesis import given, settings
from hypothesis import strategies as st

from service.drawings.boxes import Box
from service.drawings.dimensions import FIRST_LANE, LANE, Dimension, in_lanes


def lengths_told(*ends: float) -> list[Dimension]:
    return [Dimension(0.0, end, f"{abs(end):.1f}", (0.0, 0.0)) for end in ends]


def test_the_shorter_lies_nearer() -> None:
    lanes = in_lanes(lengths_told(60.0, 25.0), 5.0, (0.0, 60.0), (), upright=False)
    at = {lane.dimension.end: lane.at for lane in lanes}
    assert at == {25.0: 5.0 + FIRST_LANE, 60.0: 5.0 + FIRST_LANE + LANE}


def test_a_number_without_room_stands_beyond_its_line() -> None:
    (short,) = in_lanes(lengths_told(4.0), 0.0, (0.0, 4.0), (), upright=False)
    assert short.outside
    assert not 0.0 <= short.middle <= 4.0
    (long,) = in_lanes(lengths_told(40.0), 0.0, (0.0, 40.0), (), upright=False)
    assert not long.outside
    assert long.middle == 20.0


def test_room_that_is_taken_is_left() -> None:
    """The number of a short dimension goes to the other side when something stands on the one."""
    free = in_lanes(lengths_told(-8.0), 3.0, (-8.0, 30.0), (), upright=True)
    assert free[0].middle > 0.0
    whole = free[0].box
    taken = Box(whole.left, whole.top, whole.right, -2.0)
    other = in_lanes(lengths_told(-8.0), 3.0, (-8.0, 30.0), [taken], upright=True)
    assert not other[0].box.meets(taken)


def test_where_all_near_room_is_taken_lanes_lie_further_out() -> None:
    taken = [Box(-25.0, -200.0, 0.0, 200.0)]
    lanes = in_lanes(lengths_told(2.0, 9.0, -3.0), 3.0, (-3.0, 9.0), taken, upright=True)
    assert len(lanes) == 3
    assert not any(lane.box.meets(taken[0]) for lane in lanes)
    assert min(lane.at for lane in lanes) < 25.0 + LANE + FIRST_LANE


def test_upright_lanes_lie_to_the_left() -> None:
    (lane,) = in_lanes(lengths_told(40.0), 10.0, (0.0, 40.0), (), upright=True)
    box = lane.box
    assert box.right < -10.0
    assert (box.top, box.bottom) == (-40.0, 0.0)


@settings(max_examples=100, deadline=None)
@given(st.lists(st.floats(-90.0, 90.0).filter(lambda end: abs(end) > 0.1), max_size=4))
def test_no_two_take_the_same_room(ends: list[float]) -> None:
    lanes = in_lanes(lengths_told(*ends), 2.0, (-90.0, 90.0), (), upright=False)
    assert len(lanes) == len(ends)
    for number, one in enumerate(lanes):
        low, high = one.reach
        for other in lanes[:number]:
            least, most = other.reach
            # Those that begin at one place touch there.
            apart = high <= least + 1e-6 or most <= low + 1e-6
            assert apart or abs(one.at - other.at) >= LANE
