"""Targets that are all said alike, taken as arrays side by side and read without a look at each.

Idea: long lists are made by programs, which say each target in the same fields and the same form.
Of such a list only the numbers differ, and thousands of them are read in a millisecond. Whatever
differs in one of its targets, be it a tolerance, is left to who reads each (reach_targets.py).
"""

from collections.abc import Sequence
from typing import Any, NamedTuple, cast

import numpy as np

from kinematics.orientation_forms import FORMS
from kinematics.pose_batches import poses_as_given
from kinematics.reach.targets import NONE, ORIENTATION
from kinematics.table import FloatArray
from service.convert import Units
from service.wire.plain_relations import WHOLE, OfOneForm, numbers_of, orientations_in
from service.wire.reach_gathered import USUAL_FORM, Left, ReadTargets
from service.wire.reach_request import LONGEST_NAME

PLACE = "place"
"""In place of a form, for targets that are positions and no poses."""

_STRAIGHT = "xyz-fixed", [0.0, 0.0, 0.0]
"""Of positions, so that they can be read as poses; only their places are looked at."""


class AlikeTargets(NamedTuple):
    """Targets in the user's units, as they came.

    Attributes
    ----------
    form : PLACE, of whole matrices WHOLE, else that of all orientations.
    values : (count, ...), as the form has it; of PLACE (count, 0).
    positions : (count, 3); None where ``values`` are whole matrices.
    names : None where no target has one.
    """

    form: str
    values: FloatArray
    positions: FloatArray | None
    names: Sequence[str | None] | None = None

    def rows(self) -> list[dict[str, Any]]:
        """Return the targets as a body has them.

        Examples
        --------
        >>> rows = [{"name": "lug-1", "position": [0.5, 0.0, 1.0]}, {"position": [0.5, 0.1, 1.0]}]
        >>> alike_targets(rows).rows() == rows
        True
        """
        values, names = self.values.tolist(), self.names or [None] * len(self.values)
        said: list[dict[str, Any]]
        if self.positions is None:
            said = [{"pose": {"matrix": each}} for each in values]
        elif self.form == PLACE:
            said = [{"position": each} for each in self.positions.tolist()]
        else:
            said = [
                {"pose": {"position": place, "orientation": {"form": self.form, "values": each}}}
                for place, each in zip(self.positions.tolist(), values, strict=True)
            ]
        return [
            target if name is None else {"name": name, **target}
            for name, target in zip(names, said, strict=True)
        ]


def alike_targets(rows: Sequence[object]) -> AlikeTargets | None:
    """Return targets of a body that are all said alike, else None.

    Examples
    --------
    >>> alike_targets([{"position": [1, 2, 3]}, {"position": [4, 5, 6.5]}]).positions
    array([[1. , 2. , 3. ],
           [4. , 5. , 6.5]])
    >>> alike_targets([{"position": [1, 2, 3]}, {"position": [4, 5, 6], "freedom": "none"}])
    """
    if not rows or set(map(type, rows)) != {dict}:
        return None
    given = cast(Sequence[dict[str, Any]], rows)
    names = [row.get("name") for row in given]
    unnamed = names.count(None)
    # With as many keys as are looked up here there can be no others.
    if sum(map(len, given)) != 2 * len(given) - unnamed:
        return None
    if unnamed < len(names) and not _are_names(names):
        return None
    try:
        form, group = _places_of(given) if "position" in given[0] else _poses_of(given)
    except (KeyError, TypeError):
        return None
    numbers = None if group is None else numbers_of(form, group)
    if numbers is None:
        return None
    values, positions = numbers
    if "position" in given[0]:
        form, values = PLACE, np.empty((len(given), 0))
    return AlikeTargets(form, values, positions, None if unnamed == len(names) else names)


def read_alike(alike: AlikeTargets, units: Units) -> ReadTargets | None:
    """Return the targets in SI, None where one must be mended or cannot be used.

    Examples
    --------
    >>> from service.convert import UNITS
    >>> alike = AlikeTargets(PLACE, np.empty((1, 0)), np.array([[250.0, 0.0, 500.0]]))
    >>> read_alike(alike, UNITS["mm-deg"]).tool_in_frame[0, :3, 3]
    array([0.25, 0.  , 0.5 ])
    """
    count, form, values = len(alike.values), alike.form, alike.values
    is_place = form == PLACE
    if is_place:
        form, straight = _STRAIGHT
        values = np.tile(straight, (count, 1))
    given = orientations_in(form, values, alike.positions, units)
    poses = None if given is None else poses_as_given(*given)
    if poses is None:
        return None
    left = Left(ORIENTATION if is_place else NONE)
    return ReadTargets(
        names=alike.names or [None] * count,
        places=np.arange(count),
        tool_in_frame=poses,
        freedom=np.full(count, left.freedom),
        cone=np.full(count, left.cone),
        position_tolerance=np.full(count, left.position_tolerance),
        angle_tolerance=np.full(count, left.angle_tolerance),
        forms=[USUAL_FORM if is_place or form == WHOLE else form] * count,
        repaired={},
        approaches={},
        refused={},
    )


def _are_names(names: Sequence[object]) -> bool:
    if not set(map(type, names)) <= {str, type(None)}:
        return False
    return max(map(len, cast(Sequence[str], list(filter(None, names)))), default=0) <= LONGEST_NAME


def _places_of(rows: Sequence[dict[str, Any]]) -> tuple[str, OfOneForm]:
    """Return positions as poses that are not turned.

    Raises
    ------
    KeyError : one has none.
    """
    form, straight = _STRAIGHT
    return form, OfOneForm([], [straight] * len(rows), [row["position"] for row in rows])


def _poses_of(rows: Sequence[dict[str, Any]]) -> tuple[str, OfOneForm | None]:
    """Return form and numbers of poses, None where they differ in form or hold something else.

    Raises
    ------
    KeyError, TypeError : one of them looks otherwise.
    """
    poses = [row["pose"] for row in rows]
    keys = sum(map(len, poses))
    if "matrix" in poses[0]:
        values = [pose["matrix"] for pose in poses]
        return WHOLE, OfOneForm([], values, []) if keys == len(rows) else None
    orientations = [pose["orientation"] for pose in poses]
    form, *others = {orientation["form"] for orientation in orientations}
    values = [orientation["values"] for orientation in orientations]
    positions = [pose["position"] for pose in poses]
    alike = not others and form in FORMS and keys == sum(map(len, orientations)) == 2 * len(rows)
    return form, OfOneForm([], values, positions) if alike else None
