"""Targets as they come: as arrays where nothing is odd about them, else one by one.

One that cannot be used does not fail the others. A field nobody knows, or a name that stands
twice, is a mistake of the whole request. Left out: CSV (reach_csv.py), and what is answered.
"""

from collections.abc import Sequence
from math import isfinite
from typing import Any, NamedTuple

import numpy as np

from kinematics.errors import KinematicsError
from kinematics.orientation_forms import FORMS
from kinematics.pose_batches import poses_as_given
from kinematics.reach.targets import CONE, NONE, ORIENTATION
from kinematics.reach.tolerances import LARGEST_CONE
from kinematics.table import FloatArray
from kinematics.tolerances import LARGEST_MAGNITUDE, TARGET_ANGLE, TARGET_POSITION
from kinematics.transforms import checked_position, pose
from service.convert import Units
from service.errors import MissingField, ServiceError, UnusableValue
from service.wire.approaches import read_approach
from service.wire.one_by_one import read_one_by_one
from service.wire.plain_relations import WHOLE, OfOneForm, numbers_of, orientations_in
from service.wire.poses import read_pose
from service.wire.reach_alike import PLACE, alike_targets, read_alike
from service.wire.reach_gathered import (
    FIELD,
    FREEDOM_WORDS,
    USUAL_FORM,
    Gathered,
    Left,
    OneTarget,
    ReadTargets,
    refuse_same_names,
    refuse_too_many,
)
from service.wire.reach_request import LONGEST_NAME, Cone, ReachTarget

_FIELDS = frozenset({"name", "pose", "position", "freedom", "tolerance"})


class _Plain(NamedTuple):
    """A target in which nothing is odd but perhaps its numbers."""

    form: str
    values: Any
    position: Any
    left: Left


def read_targets(given: object, units: Units) -> ReadTargets:
    """Return the targets of a body.

    Raises
    ------
    UnusableValue, TooLarge : no list, none in it or too many, a name twice.
    UnknownField : one of them has a field that is not known.
    ServiceError : none of them can be used.
    """
    rows = _listed(given)
    alike = alike_targets(rows)
    read = None if alike is None else read_alike(alike, units)
    if read is not None:
        refuse_same_names(read.names, _place_of_name)
        return read
    gathered, odd, names = Gathered(len(rows)), list[int](), list[str | None]()
    by_form: dict[str, OfOneForm] = {}
    for place, item in enumerate(rows):
        name = item.get("name") if type(item) is dict else None
        names.append(name if type(name) is str else None)
        plain = _plain(item, units)
        if plain is None:
            odd.append(place)
            continue
        group = by_form.setdefault(plain.form, OfOneForm([], [], []))
        group.places.append(place)
        group.values.append(plain.values)
        group.positions.append(plain.position)
        gathered.leave(place, *plain.left)
    refuse_same_names(names, _place_of_name)
    for form, group in by_form.items():
        poses = _poses_of(form, group, units)
        if poses is None:
            odd += group.places
        else:
            gathered.place(group.places, poses, USUAL_FORM if form in (PLACE, WHOLE) else form)
    _read_odd(rows, sorted(odd), units, gathered)
    return gathered.read(names)


def _place_of_name(place: int) -> tuple[str, int, str]:
    return FIELD, place, "name"


def _listed(given: object) -> list[Any]:
    if not isinstance(given, list):
        raise UnusableValue(
            "targets must be a list",
            where=(FIELD,),
            value=given,
            way_out='give a list: [{"name": "part-1", "position": [...]}]',
        )
    refuse_too_many(len(given))
    return given


def _plain(item: object, units: Units) -> _Plain | None:
    """Return a target that looks as targets should, else None."""
    if type(item) is not dict or not item.keys() <= _FIELDS:
        return None
    name = item.get("name")
    if name is not None and (type(name) is not str or len(name) > LONGEST_NAME):
        return None
    given, is_place = item.get("pose"), "position" in item
    left = _plain_left(item, units, ORIENTATION if is_place else NONE)
    if left is None or is_place == (given is not None):
        return None
    if is_place:
        free = left.freedom == ORIENTATION
        return _Plain(PLACE, None, item["position"], left) if free else None
    if type(given) is not dict:
        return None
    if len(given) == 1:
        return _Plain(WHOLE, given["matrix"], None, left) if "matrix" in given else None
    orientation = given.get("orientation")
    if len(given) != 2 or type(orientation) is not dict or len(orientation) != 2:
        return None
    form = orientation.get("form")
    if type(form) is not str or form not in FORMS:
        return None
    if "values" not in orientation or "position" not in given:
        return None
    return _Plain(form, orientation["values"], given["position"], left)


def _plain_left(item: dict[str, Any], units: Units, freedom: int) -> Left | None:
    """Return what a target leaves open, if it says so as it should."""
    left = Left(freedom)
    if "freedom" in item:
        said = item["freedom"]
        if type(said) is not str or said not in FREEDOM_WORDS:
            return None
        left = Left(FREEDOM_WORDS[said])
    if "tolerance" in item:
        said = item["tolerance"]
        if type(said) is not dict or not said.keys() <= {"position", "angle"}:
            return None
        if not all(type(number) in (int, float) and number > 0 for number in said.values()):
            return None
        try:
            left = with_tolerance(left, said.get("position"), said.get("angle"), units)
        except (ServiceError, OverflowError):
            return None
    return left


def _poses_of(form: str, group: OfOneForm, units: Units) -> FloatArray | None:
    """Return poses (count, 4, 4) that can be taken as they are; None if one cannot."""
    if form == PLACE:
        # As poses that are not turned; only their positions will be read.
        straight = [[0.0, 0.0, 0.0]] * len(group.places)
        form, group = "xyz-fixed", OfOneForm(group.places, straight, group.positions)
    numbers = numbers_of(form, group)
    given = None if numbers is None else orientations_in(form, *numbers, units)
    return None if given is None else poses_as_given(*given)


def _read_odd(rows: Sequence[object], odd: Sequence[int], units: Units, gathered: Gathered) -> None:
    """Read what is odd one by one, with care for what is wrong with each."""

    def read(row: object) -> OneTarget:
        return one_target(ReachTarget.model_validate(row), units)

    found, refused = read_one_by_one(FIELD, rows, odd, read)
    for place, target in found.items():
        gathered.take(place, target)
    gathered.refused.update(refused)


def one_target(target: ReachTarget, units: Units) -> OneTarget:
    """Return what one target says.

    Raises
    ------
    ServiceError, KinematicsError : it cannot be used; ``where`` is relative to the target.
    """
    if (target.pose is None) == (target.position is None):
        both = target.pose is not None
        refusal, say = (
            (UnusableValue, "a target has a pose or a position, not both")
            if both
            else (MissingField, "a target needs a pose or a position")
        )
        way_out = "give one of them: a pose, or a position whose orientation is free"
        raise refusal(say, where=("position",) if both else ("pose",), way_out=way_out)
    left = _left_of(target, units)
    said = target.approach
    approach = None if said is None else read_approach(said, units, ("approach",))
    if target.position is not None:
        try:
            position = checked_position(units.length_in(np.array(target.position)).tolist())
        except KinematicsError as error:
            raise error.below("position") from None
        return OneTarget(pose(np.eye(3), position), USUAL_FORM, left, (), approach)
    assert target.pose is not None
    tool_in_frame, repaired = read_pose(target.pose, units, ("pose",))
    orientation = target.pose.orientation
    form = orientation.form if orientation else USUAL_FORM
    return OneTarget(tool_in_frame, form, left, repaired, approach)


def _left_of(target: ReachTarget, units: Units) -> Left:
    said = target.freedom
    if isinstance(said, Cone):
        left = Left(CONE, cone_in(said.cone, units, ("freedom", "cone")))
    else:
        usual = NONE if target.position is None else ORIENTATION
        left = Left(usual if said is None else FREEDOM_WORDS[said])
    if target.position is not None and left.freedom != ORIENTATION:
        raise UnusableValue(
            "a position leaves the orientation free",
            where=("freedom",),
            value=said if isinstance(said, str) else None,
            way_out='say "orientation", leave freedom out, or give a pose',
        )
    if target.tolerance is None:
        return left
    return with_tolerance(left, target.tolerance.position, target.tolerance.angle, units)


def with_tolerance(left: Left, position: float | None, angle: float | None, units: Units) -> Left:
    """Return what is left open with tolerances in SI, the usual ones where none is said.

    Raises
    ------
    UnusableValue : beyond 1e9 m or rad.
    """
    metres = TARGET_POSITION if position is None else units.value_in(position, "m")
    radians = TARGET_ANGLE if angle is None else units.value_in(angle, "rad")
    if not (0 < metres <= LARGEST_MAGNITUDE and 0 < radians <= LARGEST_MAGNITUDE):
        raise UnusableValue(
            "this tolerance cannot be used",
            where=("tolerance",),
            way_out="give lengths and angles above 0, or leave it out",
        )
    return left._replace(position_tolerance=metres, angle_tolerance=radians)


def cone_in(given: float, units: Units, where: tuple[str, ...]) -> float:
    """Return the half-angle of a cone in rad.

    Raises
    ------
    UnusableValue : not above 0, or beyond half a turn.

    Examples
    --------
    >>> from service.convert import UNITS
    >>> cone_in(1.5, UNITS["m-rad"], ("cone",))
    1.5
    """
    half_angle = units.value_in(given, "rad")
    if isfinite(half_angle) and 0 < half_angle <= LARGEST_CONE:
        return half_angle
    most = units.shortest_out(LARGEST_CONE, "rad")
    raise UnusableValue(
        f"a cone of {given:.6g} {units.angle} cannot be used",
        where=where,
        value=given,
        way_out=f"give its half-angle, above 0 and at most {most:.6g} {units.angle}",
    )
