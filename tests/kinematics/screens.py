"""Screens made up for tests: what they show for an orientation, worked out with scipy's Rotation.

Left out: everything of the core but the names of forms.
"""

from dataclasses import dataclass

import numpy as np
from scipy.spatial.transform import Rotation

from kinematics.orientation_forms import FORMS

UNITS = {"deg": 180.0 / np.pi, "rad": 1.0, "half-turns": 1.0 / np.pi}
SHOWN_FORMS = (*FORMS, "axis-angle")
ANGLE_DECIMALS = {"deg": 2, "rad": 4, "half-turns": 5}


def count_of(form: str) -> int:
    """How many numbers a form is shown by."""
    if form == "matrix":
        return 9
    return 4 if form.startswith(("quaternion", "axis")) else 3


def has_unit(form: str) -> bool:
    return not form.startswith(("quaternion", "matrix"))


@dataclass(frozen=True)
class Screen:
    """A screen: value i of the form is ``signs[i]`` times the number at place ``order[i]``."""

    form: str
    order: tuple[int, ...]
    signs: tuple[int, ...]
    unit: str | None
    inverse: bool = False

    def meaning(self, shown: np.ndarray) -> Rotation:
        """The tool in the base that numbers (count,) mean."""
        values = np.array(self.signs) * np.asarray(shown)[np.array(self.order) - 1]
        said = _rotation(self.form, values, UNITS[self.unit] if self.unit else 1.0)
        return said.inv() if self.inverse else said

    def shows(self, tool_in_base: Rotation) -> np.ndarray:
        """The numbers (count,) for an orientation, all digits; away from gimbal lock."""
        values = _values(self.form, tool_in_base.inv() if self.inverse else tool_in_base)
        if self.unit and self.form == "axis-angle":
            values[3] *= UNITS[self.unit]
        elif self.unit:
            values *= UNITS[self.unit]
        shown = np.empty(len(values))
        shown[np.array(self.order) - 1] = np.array(self.signs) * values
        return shown


def screen(
    form: str,
    rng: np.random.Generator,
    unit: str = "deg",
    *,
    orders: bool = True,
) -> Screen:
    """A screen of a form with a drawn order and drawn signs; a matrix is row by row or turned."""
    count = count_of(form)
    inverse = bool(rng.integers(2)) if orders else False
    if not orders or form == "matrix":
        plain = tuple(range(1, count + 1))
        return Screen(form, plain, (1,) * count, unit if has_unit(form) else None, inverse)
    order = tuple(int(place) + 1 for place in rng.permutation(count))
    signs = tuple(int(sign) for sign in rng.choice([1, -1], count))
    return Screen(form, order, signs, unit if has_unit(form) else None, inverse)


def tilted(screen: Screen, rng: np.random.Generator, degrees: float) -> Rotation:
    """A random orientation that the screen's form keeps from gimbal lock by some degrees."""
    while True:
        drawn = Rotation.random(rng=rng)
        if not screen.form.endswith(("fixed", "current")):
            return drawn
        order = screen.form[:3].upper() if "current" in screen.form else screen.form[:3]
        seen = drawn.inv() if screen.inverse else drawn
        middle = seen.as_euler(order, degrees=True)[1]
        off = middle if order[0] == order[2] else 90.0 - abs(middle)
        if degrees <= off <= 180.0 - degrees:
            return drawn


def noisy(screen: Screen, tool_in_base: Rotation, rng: np.random.Generator) -> np.ndarray:
    """What the screen shows, off by some 0.05 degrees, to as many decimals as screens have."""
    vector = np.radians(0.05) * rng.standard_normal(3)
    if screen.form.endswith(("fixed", "current")):
        unit = UNITS[screen.unit or "rad"]
        shown = screen.shows(tool_in_base) + unit * vector
    else:
        shown = screen.shows(tool_in_base * Rotation.from_rotvec(vector))
    only_angles = screen.unit is not None and screen.form != "axis-angle"
    return np.round(shown, ANGLE_DECIMALS[screen.unit or ""] if only_angles else 5)


def _rotation(form: str, values: np.ndarray, unit: float) -> Rotation:
    if form == "matrix":
        return Rotation.from_matrix(values.reshape(3, 3))
    if form == "quaternion-wxyz":
        return Rotation.from_quat(np.roll(values, -1))
    if form == "quaternion-xyzw":
        return Rotation.from_quat(values)
    if form == "rotation-vector":
        return Rotation.from_rotvec(values / unit)
    if form == "axis-angle":
        axis = values[:3] / np.linalg.norm(values[:3])
        return Rotation.from_rotvec(axis * values[3] / unit)
    sequence, axes = form.split("-")
    return Rotation.from_euler(sequence.upper() if axes == "current" else sequence, values / unit)


def _values(form: str, rotation: Rotation) -> np.ndarray:
    if form == "matrix":
        return rotation.as_matrix().ravel()
    if form == "quaternion-wxyz":
        return np.roll(rotation.as_quat(), 1)
    if form == "quaternion-xyzw":
        return rotation.as_quat()
    if form == "rotation-vector":
        return rotation.as_rotvec()
    if form == "axis-angle":
        return np.append(rotation.as_rotvec() / rotation.magnitude(), rotation.magnitude())
    sequence, axes = form.split("-")
    return rotation.as_euler(sequence.upper() if axes == "current" else sequence)
