"""Travels as they come in a body, read one by one: those that cannot be used fail no others.

Left out: what their numbers mean for an arm (operations/courses.py).
"""

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any, Generic

from kinematics.travel.tolerances import MOST_WAYS
from service.details import Detail
from service.errors import MissingField, ServiceError, TooLarge, UnusableValue
from service.wire.one_by_one import Item, read_one_by_one
from service.wire.reach_gathered import refuse_same_names
from service.wire.travel_request import MOST_POINTS_TOLD, MOST_TRAVELS, Travel

FIELD = "travels"


@dataclass(frozen=True, eq=False)
class ReadTravels(Generic[Item]):
    """The travels of a request, by index: what is asked, or what is wrong with it."""

    names: Sequence[str | None]
    asked: Mapping[int, Item]
    refused: Mapping[int, Detail]

    @property
    def count(self) -> int:
        """Travels in all."""
        return len(self.names)


def read_travels(
    given: object,
    points: int,
    read: Callable[[Travel], Item],
    *,
    every_way: bool = False,
) -> ReadTravels[Item]:
    """Return the travels of a body.

    Parameters
    ----------
    points : of each leg that are to be told, of each way if ``every_way``.
    read : makes of a travel what is asked; what it raises leads into the travel.

    Raises
    ------
    UnusableValue, TooLarge : no list, none in it or too many, too many points, a name twice.
    UnknownField : one of them has a field that is not known.
    ServiceError : none of them can be used.
    """
    rows = _listed(given)
    _refuse_too_many_points(rows, points, every_way)

    def one(row: object) -> Item:
        travel = Travel.model_validate(row)
        _refuse_half_said(travel)
        return read(travel)

    asked, refused = read_one_by_one(FIELD, rows, range(len(rows)), one)
    names = [_name(row) for row in rows]
    refuse_same_names(names, lambda place: (FIELD, place, "name"))
    if not asked:
        details = list(refused.values())
        raise ServiceError(details[0].say, errors=details, status=422)
    return ReadTravels(names, asked, refused)


def _listed(given: object) -> list[Any]:
    if not isinstance(given, list) or not given:
        raise UnusableValue(
            "there are no travels" if given == [] else "travels must be a list",
            where=(FIELD,),
            value=given,
            way_out='give a list: [{"start": {...}, "legs": [{"end": {...}}]}]',
        )
    if len(given) > MOST_TRAVELS:
        raise TooLarge(
            f"more than {MOST_TRAVELS} travels in one request",
            where=(FIELD,),
            value=len(given),
            way_out=f"send at most {MOST_TRAVELS} at a time",
            status=422,
        )
    return given


def _refuse_too_many_points(rows: Sequence[Any], points: int, every_way: bool) -> None:
    legs = sum(_most_legs(row, every_way) for row in rows)
    if legs * points > MOST_POINTS_TOLD:
        raise TooLarge(
            f"{points} points of each of {legs} legs are more than {MOST_POINTS_TOLD}",
            where=("points",),
            value=points,
            way_out=f"ask for at most {MOST_POINTS_TOLD // legs} points, or for fewer travels"
            + (', or say "solutions": "best"' if every_way else ""),
            status=422,
        )


def _most_legs(row: Any, every_way: bool) -> int:
    """Return how many legs may be told of a travel, about which something may be wrong."""
    if not isinstance(row, dict):
        return 0
    legs, start = row.get("legs"), row.get("start")
    count = len(legs) if isinstance(legs, list) else 2
    is_one_posture = isinstance(start, dict) and "joints" in start
    return count * MOST_WAYS if every_way and not is_one_posture else count


def _name(row: Any) -> str | None:
    name = row.get("name") if isinstance(row, dict) else None
    return name if isinstance(name, str) else None


def _refuse_half_said(travel: Travel) -> None:
    """Refuse what says neither of the two kinds of travel, or both."""
    to_target = {"target": travel.target, "approach": travel.approach, "retract": travel.retract}
    by_legs = {"start": travel.start, "legs": travel.legs}
    said = [name for name, value in to_target.items() if value is not None]
    wanted = to_target if said else by_legs
    wrong = [name for name, value in by_legs.items() if said and value is not None]
    if wrong:
        raise UnusableValue(
            f'a travel with "{said[0]}" has no "{wrong[0]}"',
            where=(wrong[0],),
            way_out='give "start" and "legs", or "target" with "approach" or "retract"',
        )
    for name in ("target",) if said else ("start", "legs"):
        if wanted[name] is None:
            raise _missing(name)
    if said == ["target"]:
        raise _missing("approach")


def _missing(name: str) -> MissingField:
    return MissingField(
        f'"{name}" is missing',
        where=(name,),
        way_out='give "start" and "legs", or "target" with "approach" or "retract"',
    )
