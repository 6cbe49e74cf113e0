"""What a request about many targets asks: from a JSON body, or from part locations and a query.

Left out: answering.
"""

from collections.abc import Callable, Mapping
from typing import Any

from kinematics.errors import KinematicsError
from service.errors import MissingField, UnknownArm, UnknownRevision, UnusableValue
from service.operations.arms import Arms
from service.operations.reach import (
    BEST,
    ORDERS,
    SOLUTIONS,
    ManyTargets,
    reach_question,
    wanted_solutions,
)
from service.operations.refused_query import in_query
from service.operations.single import question_asked
from service.wire.arms import ReadArm
from service.wire.controller import single_question
from service.wire.query import numbers
from service.wire.reach_csv import read_part_locations
from service.wire.reach_request import ReachRequest
from service.wire.reach_targets import read_targets


def targets_of_body(arms: Arms[ReadArm], body: object) -> ManyTargets:
    """Return the question of a JSON body.

    Raises
    ------
    pydantic.ValidationError, ServiceError, KinematicsError : what it says cannot be used, or no
        target of it can.
    """
    asked = ReachRequest.model_validate(body)
    question = reach_question(arms, asked)
    wanted = wanted_solutions(question, asked.solutions, asked.order, asked.near)
    return ManyTargets(question, read_targets(asked.targets, question.units), wanted)


def targets_of_table(
    arms: Arms[ReadArm], raw: bytes, parameters: Mapping[str, str], between: Callable[[], None]
) -> ManyTargets:
    """Return the question of a table of part locations and the query beside it.

    Parameters
    ----------
    between : called now and then; may raise to give up.

    Raises
    ------
    ServiceError, KinematicsError : what it says cannot be used, or no target of it can.
    """
    if "arm" not in parameters:
        raise MissingField(
            '"arm" is missing',
            where=("arm",),
            location="query",
            way_out="name a stored arm in the query: ?arm=...",
        )
    try:
        # The angles of a table mean what those of a flat answer do.
        asked = single_question(parameters["arm"], parameters, "csv")
        question = question_asked(arms, asked, moving=False)
    except KinematicsError as error:
        raise in_query(error) from None
    except (UnknownArm, UnknownRevision) as error:
        error.status, error.location = 422, "query"
        raise
    near = parameters.get("near")
    wanted = wanted_solutions(
        question,
        _one_of(parameters, "solutions", SOLUTIONS) or BEST,
        _one_of(parameters, "order", ORDERS),
        None if near is None else numbers(near, "near"),
        location="query",
    )
    read = read_part_locations(raw, asked.form, question.units, between)
    return ManyTargets(question, read, wanted)


def _one_of(parameters: Mapping[str, str], name: str, words: tuple[str, ...]) -> Any:
    said = parameters.get(name)
    if said is None or said in words:
        return said
    raise UnusableValue(
        f"{name}={said[:60]} is not known",
        where=(name,),
        location="query",
        value=said,
        way_out=f"one of: {', '.join(words)}",
    )
