"""Readings in words, their handedness, and which of several is the plainest."""

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from kinematics.reading_words import (
    handedness,
    lean_of,
    plainest_first,
    plainness,
    words_of,
)
from kinematics.screen_readings import Reading, families_of

PLUS = (1, 1, 1)
IN_TURN = "about the current axes z, y, x in turn"
ROWS, COLUMNS = (1, 2, 3, 4, 5, 6, 7, 8, 9), (1, 4, 7, 2, 5, 8, 3, 6, 9)
MIRRORED_Y = (1, -1, 1, -1, 1, -1, 1, -1, 1)


@pytest.mark.parametrize(("reading", "words"), [
    (Reading("zyx-current", (3, 2, 1), PLUS, "deg"),
     f"angles in degrees, {IN_TURN}; the screen lists x, y, z"),
    (Reading("zyx-current", (2, 3, 1), (1, -1, 1), "half-turns"),
     f"angles in half turns, {IN_TURN}; the screen lists x, z, y; the turn about y counts the "
     "other way"),
    (Reading("zyx-current", (1, 2, 3), (-1, -1, 1), "rad"),
     f"angles in radians, {IN_TURN}; the screen lists z, y, x; the turns about z and y count the "
     "other way (as in a frame whose x axis points the other way)"),
    (Reading("zyx-current", (1, 2, 3), (-1, -1, -1), "deg"),
     f"angles in degrees, {IN_TURN}; the screen lists z, y, x; all turns count the other way "
     "(left-handed)"),
    (Reading("zyx-current", (1, 2, 3), (-1, -1, -1), "deg", inverse=True),
     f"angles in degrees, {IN_TURN}; the screen lists z, y, x; read as the base seen from the "
     "tool, with all signs reversed"),
    (Reading("zyz-fixed", (3, 1, 2), (1, 1, -1), "deg"),
     "angles in degrees, about the fixed axes z, y, z in turn; the screen lists the second, the "
     "third, the first turn; of the turns the third counts the other way"),
    (Reading("rotation-vector", (2, 1, 3), PLUS, "rad"),
     "a rotation vector, the axis times the angle in radians; the screen lists y, x, z"),
    (Reading("quaternion-wxyz", (4, 1, 2, 3), (1, -1, -1, -1), None),
     "a quaternion; the screen lists x, y, z, w; all components count the other way "
     "(left-handed)"),
    (Reading("quaternion-xyzw", (1, 2, 3, 4), (1, -1, 1, 1), None, inverse=True),
     "a quaternion; the screen lists x, y, z, w; y counts the other way; read as the base seen "
     "from the tool"),
    (Reading("axis-angle", (2, 3, 4, 1), (1, 1, 1, 1), "deg"),
     "an axis and the angle about it in degrees; the screen lists the angle, x, y, z"),
    (Reading("matrix", ROWS, (1,) * 9, None),
     "a rotation matrix, its columns the axes of the tool; the screen lists it row by row"),
    (Reading("matrix", COLUMNS, MIRRORED_Y, None),
     "a rotation matrix, its columns the axes of the tool; the screen lists it column by column; "
     "as in a frame whose y axis points the other way"),
])  # fmt: skip
def test_a_reading_in_words(reading: Reading, words: str) -> None:
    assert words_of(reading) == words


def test_readings_of_different_maps_have_different_words() -> None:
    """Nobody could tell two groups apart otherwise."""
    for count in (3, 4, 9):
        families = families_of(count)
        said = [words_of(r) for f in families for same in f.readings() for r in same]
        # quaternion-wxyz and -xyzw are one thing to a screen, which has an order of its own.
        twice = 2 if count == 4 else 1
        distinct = sum(
            len(f.readings()) * (len(f.readings()[0]) // (twice if f.unit is None else 1))
            for f in families
        )
        assert len(set(said)) == distinct


@pytest.mark.parametrize("axis", "xyz")
@pytest.mark.parametrize("form", ["zyx-current", "xzy-fixed", "rotation-vector", "quaternion-wxyz"])
def test_a_mirrored_frame_has_the_signs_that_are_called_so(form: str, axis: str) -> None:
    """Worked out with scipy: mirror both frames, and see which signs bring the numbers back."""
    mirror = np.diag([-1.0 if each == axis else 1.0 for each in "xyz"])
    tool = Rotation.from_euler("zyx", [0.4, -0.7, 0.9])
    seen = Rotation.from_matrix(mirror @ tool.as_matrix() @ mirror)
    if form.startswith("q"):
        signs = np.sign(np.roll(seen.as_quat(), 1) * np.roll(tool.as_quat(), 1))
    elif form.startswith("r"):
        signs = np.sign(seen.as_rotvec() * tool.as_rotvec())
    else:
        sequence = form[:3].upper() if form.endswith("current") else form[:3]
        signs = np.sign(seen.as_euler(sequence) * tool.as_euler(sequence))
    order = tuple(range(1, len(signs) + 1))
    reading = Reading(form, order, tuple(int(sign) for sign in signs), None)
    assert handedness(reading) == f"mirrored-{axis}"


@pytest.mark.parametrize(
    ("form", "signs", "called"),
    [
        ("xyz-fixed", (1, 1, 1), "right"),
        ("xyz-fixed", (-1, -1, -1), "left"),
        ("xyz-fixed", (-1, 1, 1), "mixed"),
        ("zyz-current", (-1, -1, -1), "left"),
        ("zyz-current", (-1, 1, -1), "mirrored-y"),
        ("zyz-current", (1, -1, 1), "mirrored-z"),
        ("zyz-current", (1, 1, -1), "mixed"),
        ("zyz-current", (1, -1, -1), "mixed"),
        ("quaternion-wxyz", (1, -1, -1, -1), "left"),
        ("axis-angle", (-1, 1, -1, 1), "mirrored-y"),
        ("matrix", (1,) * 9, "right"),
        ("matrix", MIRRORED_Y, "mirrored-y"),
    ],
)
def test_handedness(form: str, signs: tuple[int, ...], called: str) -> None:
    assert handedness(Reading(form, tuple(range(1, len(signs) + 1)), signs, None)) == called


def test_the_plainer_comes_first() -> None:
    plain = Reading("xyz-fixed", (1, 2, 3), PLUS, "deg")
    ranked = [
        plain,
        Reading("zyx-current", (1, 2, 3), PLUS, "deg"),
        Reading("zxy-current", (1, 2, 3), PLUS, "deg"),
        Reading("xyz-fixed", (1, 3, 2), PLUS, "deg"),
        Reading("xyz-fixed", (3, 2, 1), PLUS, "deg"),
        Reading("xyz-fixed", (1, 2, 3), PLUS, "deg", inverse=True),
        Reading("xyz-fixed", (1, 2, 3), (1, -1, 1), "deg"),
        Reading("xyz-fixed", (1, 2, 3), PLUS, "rad"),
        Reading("xyz-fixed", (1, 2, 3), PLUS, "half-turns"),
    ]
    keys = [plainness(reading) for reading in ranked]
    assert keys == sorted(set(keys))


def test_the_plainest_of_each_map_stands_first_with_its_key() -> None:
    for family in families_of(3, "deg"):
        readings, keys = plainest_first(family)
        assert len(readings) == len(keys) == len(family.readings())
        for same, key in zip(readings, keys, strict=True):
            assert tuple(key) == plainness(same[0]) == min(map(plainness, same))


@pytest.mark.parametrize(
    ("degrees", "axis", "angle", "towards"),
    [
        ([0, 0, 0], "z", 0.0, ""),
        ([180, 0, 90], "-z", 0.0, ""),
        ([0, 90, 0], "x", 0.0, ""),
        ([0, 0.9, 0], "z", 0.9, ""),
        ([0, 30, 0], "z", 30.0, "x"),
        ([60, 0, 0], "-y", 30.0, "z"),
        ([0, -45, 0], "-x", 45.0, "z"),
        ([45, 10, 0], "-y", np.nan, "z"),
    ],
)
def test_how_the_tool_leans(degrees: list[float], axis: str, angle: float, towards: str) -> None:
    """By hand, but for two turns: there the angle is that of scipy's vector to the axis."""
    tool_z = Rotation.from_euler("xyz", degrees, degrees=True).as_matrix()[:, 2]
    lean = lean_of(tool_z)
    assert (lean.axis, lean.towards) == (axis, towards)
    expected = np.arccos(np.abs(tool_z).max()) if np.isnan(angle) else np.radians(angle)
    assert lean.angle == pytest.approx(expected, abs=1e-9)
