"""Surveys whose pieces are made one after the other in the process of the test, and an arm."""

import random
from datetime import UTC, datetime
from typing import Any

import orjson

from service.operations.arms import Arms
from service.storage.ports import SUCCEEDED, Survey, SurveyStorage
from service.surveys.kinds import Gathers, Kind
from service.surveys.registry import SURVEY_KINDS
from service.wire.arms import ReadArm

AT = datetime(2026, 3, 4, 5, 6, 7, tzinfo=UTC)
ROW = {"joint": "revolute", "a": 400, "alpha": 0, "d": 0, "theta": 0, "travel": [-170, 170]}
SLIDE = {"joint": "prismatic", "a": 0, "alpha": 0, "d": 0, "theta": 0}
ARM = {
    "name": "two-turns",
    "convention": "standard",
    "units": "mm-deg",
    "rows": [{**ROW, "working_travel": [-90, 90]}, {**ROW, "a": 300}],
}

ASKEW = {
    **ARM,
    "name": "askew",
    "rows": [
        {**ROW, "a": 100, "alpha": 90, "travel": [-100, 120], "working_travel": [-60, 60]},
        {**ROW, "a": 500, "alpha": 17},
        {**ROW, "a": 300},
    ],
}
"""Nothing tells its reach but asking."""


def made(
    store: SurveyStorage,
    arms: Arms[ReadArm],
    kind: Kind,
    request: dict[str, Any],
    seed: int | None = None,
) -> Survey:
    """Make all pieces of a survey, in an order that a seed gives, and return it as it then is.

    They are made as by two processes, of which each prepares for itself.
    """
    accepted = kind.accept(arms, request)
    about = orjson.loads(
        orjson.dumps({**accepted.about, "software": "1"}, option=orjson.OPT_SERIALIZE_NUMPY)
    )
    name = f"{seed or 0:020x}"
    survey = Survey(name, kind.name, "", accepted.request, about, accepted.total, AT)
    pieces = list(accepted.pieces)
    assert sum(piece.size for piece in pieces) == accepted.total
    store.add(survey, pieces, key=None, digest="")
    last = pieces.pop() if isinstance(kind, Gathers) else None
    prepared = [kind.prepare(kind.setup(arms, survey)) for _ in range(2)]
    if seed is not None:
        random.Random(seed).shuffle(pieces)
    store.begin(name, AT)
    for place, piece in enumerate(pieces):
        store.keep(name, [kind.make(prepared[place % 2], piece)])
    if last is not None:
        assert isinstance(kind, Gathers)
        others = [store.made(name, number) for number in range(last.number)]
        store.keep(name, [kind.gather(prepared[1], last, others)])
    store.end(name, SUCCEEDED, AT)
    found = store.get(name)
    assert found is not None
    return found


def told(store: SurveyStorage, survey: Survey, wanted: Any) -> bytes:
    answer = SURVEY_KINDS[survey.kind].told(survey, wanted, store)
    pieces = range(len(store.sizes(survey.id)))
    part = answer.part or (lambda _number, _made: b"")
    parts = [part(number, store.made(survey.id, number)) for number in pieces]
    return b"".join([answer.head, *parts, answer.tail])


def of_no_survey(document: bytes) -> dict[str, Any]:
    read: dict[str, Any] = orjson.loads(document)
    return {key: value for key, value in read.items() if key not in ("survey", "software")}
