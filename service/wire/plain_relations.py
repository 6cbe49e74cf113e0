"""Relations in which nothing is odd, taken as lists side by side and read as arrays.

Thousands of them are read in milliseconds; whatever cannot be read so is left to the careful way,
which says what is wrong and where. Left out: that way (frames.py).
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import chain
from math import prod
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.findings import Finding
from kinematics.orientation_batches import checked_rotations
from kinematics.orientation_forms import FORMS, shape_of
from kinematics.pose_batches import poses_as_given
from kinematics.table import FloatArray
from kinematics.tolerances import (
    LARGEST_MAGNITUDE,
    LARGEST_SD,
    RIGID_SILENT,
    SMALLEST_SD,
    USUAL_ANGLE_SD,
    USUAL_POSITION_SD,
)
from kinematics.transforms import pose
from service.convert import Units, orientation_in
from service.wire.models import Pose
from service.wire.poses import read_pose

MOST_REPAIRED_TOLD = 20
"""Relations whose repair an answer tells one by one; of more it tells the number."""

UNITS_ROUND = 1e-12
"""Share by which a bound may be missed when it is said in another unit."""

_FIELDS = frozenset({"of", "in", "pose", "position_sd", "angle_sd"})
WHOLE = "whole"
"""In place of a form, for a pose that is one 4 x 4 matrix."""


@dataclass(frozen=True, eq=False)
class Relations:
    """Relations of a request, in SI.

    Attributes
    ----------
    of, within : names of frames, which may be anything yet.
    of_in : (relations, 4, 4).
    position_sd, angle_sd : (relations,), the usual ones where nothing is said.
    repaired : what was mended, with the relation's number.
    more_repaired : how many others were mended.
    """

    of: Sequence[str]
    within: Sequence[str]
    of_in: FloatArray
    position_sd: FloatArray
    angle_sd: FloatArray
    repaired: Sequence[tuple[int, Finding]] = ()
    more_repaired: int = 0


class OfOneForm(NamedTuple):
    """Poses of one orientation form: numbers of their relations, and what they hold."""

    places: list[int]
    values: list[Any]
    positions: list[Any]


@dataclass(frozen=True)
class Plain:
    """Relations in which nothing is odd: lists side by side, and how many keys the body had."""

    of: list[str]
    within: list[str]
    poses: list[dict[str, Any]]
    by_form: Mapping[str, OfOneForm]
    position_sd: list[Any]
    angle_sd: list[Any]
    keys: int


def plain_of(document: object) -> Plain | None:
    """Return the relations of a body if all of them look as relations should.

    Examples
    --------
    >>> pose = {"position": [0, 0, 1], "orientation": {"form": "xyz-fixed", "values": [0, 0, 0]}}
    >>> plain_of({"relations": [{"of": "lamp", "in": "table", "pose": pose}]}).keys
    8
    >>> plain_of({"relations": [{"of": "lamp"}]}) is None
    True
    """
    if type(document) is not dict or type(document.get("relations")) is not list:
        return None
    given = document["relations"]
    if not set(map(type, given)) <= {dict} or not set[Any]().union(*given) <= _FIELDS:
        return None
    try:
        poses = [relation["pose"] for relation in given]
        by_form = _of_one_form(poses) or _by_form(poses)
        of = [relation["of"] for relation in given]
        within = [relation["in"] for relation in given]
        # With as many keys as were looked up just now there can be no others.
        whole = len(by_form[WHOLE].places) if WHOLE in by_form else 0
        in_poses = sum(map(len, poses))
        in_orientations = sum([len(pose["orientation"]) for pose in poses if "matrix" not in pose])
    except (KeyError, TypeError):
        return None
    if not set(map(type, chain(of, within, by_form))) <= {str}:
        return None
    if (in_poses, in_orientations) != (2 * len(poses) - whole, 2 * (len(poses) - whole)):
        return None
    in_relations = sum(map(len, given))
    if in_relations == 3 * len(given):  # nothing but what was looked up
        position_sd = angle_sd = [None] * len(given)
    else:
        position_sd = [relation.get("position_sd") for relation in given]
        angle_sd = [relation.get("angle_sd") for relation in given]
    others = sum(keys_in(part) for name, part in document.items() if name != "relations")
    keys = len(document) + in_relations + in_poses + in_orientations + others
    return Plain(of, within, poses, by_form, position_sd, angle_sd, keys)


def _of_one_form(poses: Sequence[dict[str, Any]]) -> dict[str, OfOneForm] | None:
    """Return what _by_form does, sooner, if all poses are of one form and no matrix; else None."""
    if not all("orientation" in given for given in poses):
        return None
    orientations = [given["orientation"] for given in poses]
    forms = {given["form"] for given in orientations}
    if len(forms) != 1:
        return None
    values = [given["values"] for given in orientations]
    positions = [given["position"] for given in poses]
    return {forms.pop(): OfOneForm(list(range(len(poses))), values, positions)}


def _by_form(poses: Sequence[dict[str, Any]]) -> dict[str, OfOneForm]:
    """Return poses by their form.

    Raises
    ------
    KeyError, TypeError : one of them looks otherwise.
    """
    by_form: dict[str, OfOneForm] = {}
    for number, given in enumerate(poses):
        if "matrix" in given:
            form, values, position = WHOLE, given["matrix"], None
        else:
            orientation = given["orientation"]
            form, values, position = orientation["form"], orientation["values"], given["position"]
        group = by_form.get(form)
        if group is None:
            group = by_form[form] = OfOneForm([], [], [])
        group.places.append(number)
        group.values.append(values)
        group.positions.append(position)
    return by_form


def keys_in(part: object) -> int:
    """Return how many keys there are at all levels.

    Examples
    --------
    >>> keys_in([{"of": "lamp", "in": "table"}, {"a": {"b": 1}}])
    4
    """
    open_ends, keys = [part], 0
    while open_ends:
        node = open_ends.pop()
        if isinstance(node, dict):
            keys += len(node)
            open_ends.extend(node.values())
        elif isinstance(node, list):
            open_ends.extend(node)
    return keys


def plain_relations(plain: Plain, units: Units) -> Relations | None:
    """Return the relations in SI, or None if one of them cannot be used."""
    sds = sds_of(plain, units)
    if sds is None:
        return None
    of_in, mended = np.empty((len(plain.of), 4, 4)), list[int]()
    for form, group in plain.by_form.items():
        numbers = numbers_of(form, group)
        given = None if numbers is None else orientations_in(form, *numbers, units)
        if given is None:
            return None
        poses = poses_as_given(*given)
        if poses is None:
            shape, values, positions = given
            checked = checked_rotations(shape, values)
            if not checked.usable.all() or not np.abs(positions).max() <= LARGEST_MAGNITUDE:
                return None
            poses = pose(checked.rotation, positions)
            mended += [group.places[row] for row in np.flatnonzero(checked.repaired).tolist()]
        if len(plain.by_form) == 1:
            of_in = poses
        else:
            of_in[group.places] = poses
    mended.sort()
    told = [
        (number, finding)
        for number in mended[:MOST_REPAIRED_TOLD]
        for finding in read_pose(Pose.model_validate(plain.poses[number]), units, ())[1]
    ]
    more = max(len(mended) - MOST_REPAIRED_TOLD, 0)
    return Relations(plain.of, plain.within, of_in, *sds, told, more)


def numbers_of(form: str, group: OfOneForm) -> tuple[FloatArray, FloatArray | None] | None:
    """Return values and positions of poses as they stand, or None if one holds something else.

    Of whole matrices all numbers are values.
    """
    if form == WHOLE:
        matrices = _array(group.values, (4, 4))
        return None if matrices is None else (matrices, None)
    if form not in FORMS:
        return None
    values, positions = _array(group.values, shape_of(form)), _array(group.positions, (3,))
    return None if values is None or positions is None else (values, positions)


def orientations_in(
    form: str, values: FloatArray, positions: FloatArray | None, units: Units
) -> tuple[str, FloatArray, FloatArray] | None:
    """Return form, values and positions in SI; None if a whole matrix ends otherwise."""
    if positions is not None:
        return form, orientation_in(units, form, values), units.length_in(positions)
    if (np.abs(values[:, 3] - [0, 0, 0, 1]) > RIGID_SILENT).any():
        return None
    return "matrix", values[:, :3, :3], units.length_in(values[:, :3, 3])


def sds_of(plain: Plain, units: Units) -> tuple[FloatArray, FloatArray] | None:
    """Return standard deviations of positions and angles in SI; None if one cannot be used."""
    position_sd = _sds(plain.position_sd, units, "m", USUAL_POSITION_SD)
    angle_sd = _sds(plain.angle_sd, units, "rad", USUAL_ANGLE_SD)
    return None if position_sd is None or angle_sd is None else (position_sd, angle_sd)


def _array(rows: Sequence[object], shape: tuple[int, ...]) -> FloatArray | None:
    """Return nested lists of one shape as an array if they hold numbers and nothing else."""
    cells: list[Any] = list(rows)
    for length in shape:
        if not set(map(type, cells)) <= {list} or not set(map(len, cells)) <= {length}:
            return None
        cells = list(chain.from_iterable(cells))
    if not set(map(type, cells)) <= {int, float}:
        return None
    try:
        numbers = np.fromiter(cells, np.float64, len(rows) * prod(shape))
    except OverflowError:  # an integer of more than 308 digits
        return None
    if not np.isfinite(numbers).all():
        return None
    array: FloatArray = numbers.reshape(len(rows), *shape)
    return array


def _sds(given: list[Any], units: Units, unit: str, usual: float) -> FloatArray | None:
    """Return standard deviations in SI, the usual one where none is said; None if one is bad."""
    sds = np.full(len(given), usual)
    if given.count(None) == len(given):
        return sds
    said = [number for number, sd in enumerate(given) if sd is not None]
    numbers = _array([given[number] for number in said], ())
    if numbers is None:
        return None
    sds[said] = units.angle_in(numbers) if unit == "rad" else units.length_in(numbers)
    return sds if bool(np.all(are_usable(sds))) else None


def are_usable(sds: FloatArray) -> NDArray[np.bool_]:
    """Return which standard deviations can be used; the bounds themselves in any unit."""
    bounds = SMALLEST_SD * (1.0 - UNITS_ROUND), LARGEST_SD * (1.0 + UNITS_ROUND)
    within: NDArray[np.bool_] = (sds >= bounds[0]) & (sds <= bounds[1])
    return within
