"""Turns made one after the other: where they lead, and how else they can be said.

Left out: many orientations at once (conversions.py), bodies and query strings (wire).
"""

from collections.abc import Sequence

import numpy as np

from kinematics.errors import KinematicsError
from kinematics.findings import FINE, Finding
from kinematics.orientation_forms import FORMS, lock_finding, shape_of
from kinematics.orientation_input import checked_rotation
from kinematics.rewritten_steps import rewritten
from kinematics.rotation_steps import (
    RotationStep,
    Turn,
    between,
    checked_step,
    refuse_too_many,
    turned,
)
from kinematics.table import FloatArray
from service.convert import UNITS, Units, finding_out, orientation_in, orientation_out
from service.details import pointer
from service.errors import MissingField
from service.wire.models import Orientation
from service.wire.poses import checked_form, read_orientation
from service.wire.rotations import RotationsRequest, TurnStep

_AXES = {"x": (1.0, 0.0, 0.0), "y": (0.0, 1.0, 0.0), "z": (0.0, 0.0, 1.0)}
_NAMES = {axis: name for name, axis in _AXES.items()}
_HALF_TURN = Finding(
    FINE,
    "axis-sign-free",
    "a half turn about an axis and about its opposite are the same; one of the two is told",
    0.0,
    0.0,
)
Told = dict[str, object]


def rotations_answer(asked: RotationsRequest) -> Told:
    """Return where the turns of a request lead, in each form, and the turns in other words.

    Raises
    ------
    ServiceError, KinematicsError : what it says cannot be used, or it asks nothing.
    """
    if asked.start is None and asked.goal is None and not asked.steps:
        raise MissingField(
            "nothing is asked: neither start nor steps nor goal",
            where=("start",),
            way_out='give "start", "steps" or "goal"; a start left out is no rotation',
        )
    units = UNITS[asked.units]
    forms = _forms(asked)
    findings: list[Told] = []
    start = _read(asked.start, "start", units, findings)
    steps = read_steps(asked.steps, units)
    reached = turned(start, steps)
    told: Told = {"orientation": _in_forms(reached, forms, units, (), findings)}
    said = rewritten(start, steps)
    told["steps"] = {
        "merged": _told_steps(said.merged, units),
        "all_fixed": _told_steps(said.all_fixed, units),
        "all_current": _told_steps(said.all_current, units),
    }
    if asked.goal is not None:
        goal = _read(asked.goal, "goal", units, findings)
        turns = {"between": between(start, goal)}
        if steps:
            turns["left"] = between(reached, goal)
        for name, pair in turns.items():
            told[name] = _both(pair, forms, units, name, findings)
    codes = [code for finding in findings if isinstance(code := finding["code"], int)]
    head: Told = {"ok": True, "code": max(codes, default=FINE), "units": units.name}
    return head | told | {"findings": findings}


def converted(form: str, values: Sequence[object], to: str, units: Units) -> tuple[Told, Told]:
    """Return one orientation in another form, ``{form: values}``, and what begins its answer.

    Raises
    ------
    KinematicsError : ``where`` is relative to the values.
    """
    numbers = orientation_in(units, form, np.array(values, dtype=np.float64))
    rotation, repaired = checked_rotation(form, numbers.reshape(shape_of(form)).tolist())
    lock = lock_finding(to, rotation)
    found = [*repaired, *(() if lock is None else (lock,))]
    head: Told = {
        "code": max((finding.code for finding in found), default=FINE),
        "findings": [finding_out(units, finding) for finding in found],
    }
    return {to: orientation_out(units, to, rotation).tolist()}, head


def read_steps(given: Sequence[TurnStep], units: Units) -> list[RotationStep]:
    """Return the turns of a request.

    Raises
    ------
    KinematicsError : with ``where`` from the body's root.
    """
    try:
        refuse_too_many(len(given))
    except KinematicsError as error:
        raise error.below("steps") from None
    steps = []
    for place, step in enumerate(given):
        axis = _AXES[step.axis] if isinstance(step.axis, str) else step.axis
        angle = float(units.angle_in(step.angle))
        try:
            steps.append(checked_step(list(axis), angle, about_fixed=step.about == "fixed"))
        except KinematicsError as error:
            raise error.below("steps", place) from None
    return steps


def _forms(asked: RotationsRequest) -> list[str]:
    """Return the forms asked for, each once; all of them where none is named."""
    if asked.forms is None:
        return list(FORMS)
    checked = (checked_form(form, ("forms", place)) for place, form in enumerate(asked.forms))
    return list(dict.fromkeys(checked))


def _read(given: Orientation | None, name: str, units: Units, findings: list[Told]) -> FloatArray:
    if given is None:
        return np.eye(3)
    rotation, repaired = read_orientation(given, units, (name,))
    place = pointer((name, "values"))
    findings += [finding_out(units, finding) | {"pointer": place} for finding in repaired]
    return rotation


def _in_forms(
    rotation: FloatArray,
    forms: Sequence[str],
    units: Units,
    at: tuple[str, ...],
    findings: list[Told],
) -> Told:
    """Return a rotation in each form, adding to ``findings`` those whose angles are not unique."""
    told: Told = {}
    for form in forms:
        told[form] = orientation_out(units, form, rotation).tolist()
        lock = lock_finding(form, rotation)
        if lock is not None:
            place = pointer((*at, "orientation", form))
            findings.append(finding_out(units, lock) | {"at": place})
    return told


def _told_steps(steps: Sequence[RotationStep], units: Units) -> list[Told]:
    return [
        {
            "axis": _NAMES.get(step.axis, list(step.axis)),
            "angle": units.shortest_out(step.angle, "rad"),
            "about": "fixed" if step.about_fixed else "current",
        }
        for step in steps
    ]


def _both(
    turns: tuple[Turn, Turn], forms: Sequence[str], units: Units, name: str, findings: list[Told]
) -> Told:
    """Return the same turn about fixed and about current axes."""
    if turns[0].is_half:
        findings.append(finding_out(units, _HALF_TURN) | {"at": pointer((name,))})
    return {
        about: {
            "axis": None if turn.axis is None else turn.axis.tolist(),
            "angle": float(units.angle_out(turn.angle)),
            "about": about,
            "orientation": _in_forms(turn.rotation, forms, units, (name, about), findings),
        }
        for about, turn in zip(("fixed", "current"), turns, strict=True)
    }
