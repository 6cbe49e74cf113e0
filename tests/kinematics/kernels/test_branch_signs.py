"""Signs of features after the product of exponentials, against plain rotations."""

import numpy as np

from kinematics.kernels.branch_signs import ABOVE, AHEAD, SIDE, SPREAD, branch_codes, branch_signs
from kinematics.rotations import rotation_about


def moved(
    axis: np.ndarray, point: np.ndarray, slides: np.ndarray, motions: np.ndarray, rows: int
) -> tuple[np.ndarray, np.ndarray]:
    """Return rotation and shift that so many rows make."""
    turn, shift = np.eye(3), np.zeros(3)
    for row in range(rows):
        step = np.eye(3) if slides[row] else rotation_about(axis[row], motions[row])
        way = motions[row] * axis[row] if slides[row] else point[row] - step @ point[row]
        shift = turn @ way + shift
        turn = turn @ step
    return turn, shift


def test_features_are_those_of_places_moved_one_by_one() -> None:
    random = np.random.default_rng(2)
    axis = random.normal(size=(4, 3))
    axis /= np.linalg.norm(axis, axis=1)[:, None]
    point, slides = random.normal(size=(4, 3)), np.array([False, True, False, False])
    after = np.sort(random.integers(0, 5, size=7))
    points = (random.random(7) < 0.5).astype(float)
    places = np.column_stack([random.normal(size=(7, 3)), points, after])
    features = np.array(
        [[kind, *random.integers(0, 7, 5)] for kind in (AHEAD, ABOVE, SIDE, SPREAD)]
    )
    motions = random.uniform(-3.0, 3.0, size=(5, 4))
    signs = np.empty((5, 4))
    branch_signs(motions, axis, point, slides, places, features, signs)
    for posture in range(5):
        at = []
        for place in places:
            turn, shift = moved(axis, point, slides, motions[posture], int(place[4]))
            at.append(turn @ place[:3] + place[3] * shift)
        for feature, (kind, a, b, c, d, _) in enumerate(features):
            way, up = at[c] - at[a], at[d]
            expected = {
                AHEAD: way @ up,
                ABOVE: (way @ way) * ((at[b] - at[a]) @ up) - (way @ up) * ((at[b] - at[a]) @ way),
                SIDE: np.cross(way, at[b] - at[a]) @ up,
                SPREAD: np.cross(at[a], at[b]) @ at[c],
            }[kind]
            np.testing.assert_allclose(signs[posture, feature], expected, atol=1e-12)


def test_an_upright_line_is_told_by_the_side_of_its_triangle() -> None:
    places = np.array(
        [[0.0, 0, 0, 1, 0], [0.3, 0, 0.5, 1, 0], [0, 0, 1, 1, 0], [0, 0, 1, 0, 0], [0, 1, 0, 0, 0]]
    )
    lines = np.empty((0, 3)), np.empty((0, 3)), np.empty(0, bool)
    signs = np.empty((1, 1))
    branch_signs(np.empty((1, 0)), *lines, places, np.array([[ABOVE, 0, 1, 2, 3, 4]]), signs)
    np.testing.assert_allclose(signs, [[0.3]])


def test_codes_are_bits_and_what_shares_them_is_numbered() -> None:
    signs = np.array([[1.0, -1.0], [-1.0, 1.0], [1.0, -1.0], [1.0, -1.0]])
    codes = np.empty(4, np.int64)
    branch_codes(signs, np.ones(2), 0.0, np.array([0, 0, 0, 1]), 8, codes)
    assert codes.tolist() == [2, 1, 2 + 4, 2]
    branch_codes(signs, np.array([-1.0, 1.0]), 0.0, np.array([0, 0, 0, 1]), 8, codes)
    assert codes.tolist() == [3, 0, 3 + 4, 3]
