"""Slides by hand: a gantry, a crane, and planes that a slide moves."""

import numpy as np
import pytest

from kinematics.inverse.regional import regional
from kinematics.inverse.regional_pairs import PAIR, write_pair
from kinematics.inverse.regional_rows import FREE, MOST_ROWS_FOUND

X, Y, Z = np.eye(3)


def answers(
    slides: list[bool],
    axes: list[np.ndarray],
    start: list[float],
    goal: list[float],
    is_plane: bool = False,
) -> tuple[np.ndarray, int]:
    """Return the answers of joints through the origin, and flags."""
    pair, out, points = np.zeros(PAIR), np.zeros((MOST_ROWS_FOUND, 4)), np.zeros((3, 3))
    of = np.array(slides), np.array(axes), points
    write_pair(*of, pair)
    count, flags = regional(pair, *of, is_plane, np.array(start), np.array(goal), 1e-9, out)
    return out[:count], flags


def test_a_gantry_goes_where_the_coordinates_say() -> None:
    rows, flags = answers([True] * 3, [Y, X, Z], [0.1, 0.2, 0.3, 0], [1.1, -0.8, 0.5, 0])
    assert rows[:, :3] == pytest.approx(np.array([[-1.0, 1.0, 0.2]]))
    assert flags == 0


def test_two_slides_and_a_turn_have_two_answers_on_either_side() -> None:
    """The turn about x brings the start, at y = 1, to height 0.6: from the front or the back."""
    rows, _ = answers([True, True, False], [X, Y, X], [0.0, 1, 0, 0], [0.5, 2.0, 0.6, 0])
    assert np.sin(rows[:, 2]) == pytest.approx(0.6)
    assert np.cos(rows[:, 2]) == pytest.approx(2.0 - rows[:, 1])
    assert rows[:, 0] == pytest.approx(0.5)
    assert np.sort(rows[:, 1]) == pytest.approx([1.2, 2.8])


def test_a_turn_within_the_plane_of_two_slides_is_free() -> None:
    rows, flags = answers([True, True, False], [X, Y, Z], [1.0, 0, 0, 0], [0.5, 2.0, 0.0, 0])
    assert flags & FREE
    assert (rows[:, 3] == 2).all()
    assert len(rows) >= 12
    assert np.hypot(rows[:, 0] - 0.5, rows[:, 1] - 2.0) == pytest.approx(1.0)
    rows, _ = answers([True, True, False], [X, Y, Z], [1.0, 0, 0, 0], [0.5, 2.0, 0.1, 0])
    assert len(rows) == 0


@pytest.mark.parametrize("place", [0, 1, 2])
def test_a_slide_makes_up_the_offset_of_a_plane_wherever_it_stands(place: int) -> None:
    """Turns about z and y bring normal x to (0.48, 0.64, 0.6)."""
    slides = [joint == place for joint in range(3)]
    turns = [Z, Y]
    axes = [X + Y + Z if slide else turns.pop(0) for slide in slides]
    axes = [axis / np.linalg.norm(axis) for axis in axes]
    goal = np.array([0.48, 0.64, 0.6, 0.7])
    rows, flags = answers(slides, axes, [1.0, 0, 0, 0.2], list(goal), is_plane=True)
    assert flags == 0
    assert len(rows) == 2
    for row in rows:
        normal = np.array([1.0, 0, 0])
        offset = 0.2
        for joint in (2, 1, 0):
            axis, motion = axes[joint], row[joint]
            if slides[joint]:
                offset += motion * normal @ axis
                continue
            normal = (
                np.cos(motion) * normal
                + np.sin(motion) * np.cross(axis, normal)
                + (1.0 - np.cos(motion)) * (axis @ normal) * axis
            )
        assert normal == pytest.approx(goal[:3], abs=1e-14)
        assert offset == pytest.approx(0.7)


def test_a_slide_along_the_plane_is_of_no_use() -> None:
    """Normal z after the turns; the slide along x cannot lift the plane."""
    of = [True, False, False], [X, Z, Y], [1.0, 0, 0, 0.2]
    rows, flags = answers(*of, [0.0, 0, 1, 0.3], is_plane=True)
    assert len(rows) == 0
    assert flags & FREE
    rows, flags = answers(*of, [0.0, 0, 1, 0.2], is_plane=True)
    assert len(rows) > 0
    assert flags & FREE
