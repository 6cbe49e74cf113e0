"""Surveys as asked for and answered.

Left out: what is asked and found in each kind (service/surveys), and its result.
"""

from collections.abc import Mapping, Sequence
from typing import Annotated, Any, Literal

from pydantic import Field, RootModel

from service.errors import MissingField
from service.storage.ports import Survey
from service.wire.answer_models import ArmIdentity, Open
from service.wire.envelopes import EnvelopeAnswer
from service.wire.formats import form_for
from service.wire.models import Strict, UnitsName
from service.wire.poses import checked_form
from service.wire.query import whole_number
from service.wire.samples import SamplesAnswer
from service.wire.stored import time_of

LONGEST_TITLE = 200


class SurveyRequest(Strict):
    """Long work of a kind; `request` is what the address of that kind takes, with more in it.

    `reach-checks`: as `/v1/reach/checks`, with up to 1 000 000 targets. `samples`: as
    `/v1/reach/samples`, with up to 10 000 000 samples; orientations are quaternions.
    `envelope`: as `/v1/reach/envelope`, as fine as time allows.
    """

    kind: Literal["reach-checks", "samples", "envelope"]
    title: Annotated[str, Field(max_length=LONGEST_TITLE)] | None = None
    request: dict[str, Any]


class SurveyAnswer(Open):
    """A survey: how far it is, what it is of, where its parts are.

    `state`: `queued`, `running`, `succeeded`, `failed` (with `reason`) or `cancelled`. `done` of
    `total` never goes back: targets, samples, or pieces of an envelope, of about a second each, of
    which the last puts all together; `remaining_s` is null where nobody can tell. `counts` is what
    was found so far.
    """

    id: str
    kind: str
    title: str | None
    state: Literal["queued", "running", "succeeded", "failed", "cancelled"]
    done: int
    total: int
    remaining_s: float | None
    reason: str | None
    created_at: str
    started_at: str | None
    finished_at: str | None
    arm: ArmIdentity
    units: UnitsName
    software: str
    counts: dict[str, int]
    links: dict[str, str]


class SurveyDetails(SurveyAnswer):
    """A survey with its request as it is kept, the arm at its revision, without targets."""

    request: dict[str, Any]


class SurveyListAnswer(Open):
    """Surveys, the newest first; `next_page_token` asks for those that follow."""

    surveys: list[SurveyAnswer]
    next_page_token: str | None


class ResultItem(Open):
    """One target: verdict, what it rests on, and solutions, the best first.

    `reason` as in reach checks. A target that could not be used has a `problem`, whose `pointer`
    leads into the target, and `reason` with its sentence. `position` is what was asked for, in
    units and frame of the survey; null where that cannot be used.
    """

    name: str | None
    position: list[float] | None
    ok: bool
    code: int
    verdict: str | None
    proof: str | None
    reason: dict[str, Any] | None
    found: int
    solutions: list[dict[str, Any]]


class TargetsResult(Open):
    """What a survey of targets found, in the order asked."""

    survey: str
    arm: ArmIdentity
    units: UnitsName
    frame: str
    tool: Any
    method: dict[str, str]
    results: list[ResultItem]
    summary: dict[str, int]


class SamplesResult(SamplesAnswer):
    """What a survey of samples found."""

    survey: str
    software: str


class EnvelopeResult(EnvelopeAnswer):
    """What a survey of an envelope found."""

    survey: str
    software: str


class SurveyResult(RootModel[TargetsResult | SamplesResult | EnvelopeResult]):
    """What a survey found, by its kind."""


TABLE_PARAMETERS = {
    "kind": "Kind of the survey.",
    "title": "Title of the survey.",
    "arm": "Name of a stored arm.",
    "revision": "Revision of the arm; the newest if left out.",
    "tool": "Name of the tool.",
    "frame": "Frame the targets are given in.",
    "units": "Units of the targets and of the result.",
    "solutions": "`best` or `all`.",
    "order": "Which solution comes first.",
}
CSV_PARAMETERS = {**TABLE_PARAMETERS, "form": "What r1 r2 r3 of CSV mean: an angle triple."}
_OUTSIDE = ("form", "kind", "title", "arm", "revision")


def request_beside_table(parameters: Mapping[str, str]) -> SurveyRequest:
    """Return what the query beside a table asks.

    Raises
    ------
    pydantic.ValidationError : kind or title cannot be used.
    MissingField : no kind, no arm.
    """
    for name in ("kind", "arm"):
        if name not in parameters:
            raise MissingField(
                f'"{name}" is missing', where=(name,), location="query", way_out="say it"
            )
    arm: Any = parameters["arm"]
    if "revision" in parameters:
        arm = {"name": arm, "revision": whole_number(parameters["revision"], "revision")}
    request = {name: said for name, said in parameters.items() if name not in _OUTSIDE}
    return SurveyRequest.model_validate(
        {
            "kind": parameters["kind"],
            "title": parameters.get("title"),
            "request": {**request, "arm": arm},
        }
    )


def angles_of_csv(parameters: Mapping[str, str]) -> str:
    """Return what the angles of part locations mean: what those of a flat answer do.

    Raises
    ------
    FormNotFlat : no angle triple.
    """
    form = form_for("csv", parameters.get("form"), key="poses", location="query")
    return checked_form(form)


def survey_answer(survey: Survey, remaining_s: float | None) -> dict[str, object]:
    """Return a ``SurveyAnswer``."""
    here = f"/v1/surveys/{survey.id}"
    times = (survey.created_at, survey.started_at, survey.finished_at)
    created, started, finished = (None if at is None else time_of(at) for at in times)
    return {
        "id": survey.id,
        "kind": survey.kind,
        "title": survey.title or None,
        **progress(survey, remaining_s),
        "created_at": created,
        "started_at": started,
        "finished_at": finished,
        "arm": survey.about["arm"],
        "units": survey.about["units"],
        "software": survey.about["software"],
        "counts": {key.replace("-", "_"): count for key, count in survey.counts.items()},
        "links": {part: f"{here}/{part}" for part in ("progress", "result", "report", "cancel")},
    }


def progress(survey: Survey, remaining_s: float | None) -> dict[str, object]:
    """Return how far a survey is."""
    return {
        "state": survey.state,
        "done": survey.done,
        "total": survey.total,
        "remaining_s": None if remaining_s is None else round(remaining_s, 1),
        "reason": survey.reason or None,
    }


def survey_list_answer(
    surveys: Sequence[dict[str, object]], next_token: str | None
) -> dict[str, object]:
    """Return a ``SurveyListAnswer``."""
    return {"surveys": list(surveys), "next_page_token": next_token}
