"""Surveys as their users see them: taken in, looked up, listed, cancelled, removed, read.

Left out: addresses and formats (routes, wire), and the work (runner.py).
"""

import hashlib
from collections.abc import Callable, Sequence
from dataclasses import replace
from datetime import datetime

import orjson
from pydantic import ValidationError

from kinematics.errors import KinematicsError
from service.details import Detail
from service.errors import NotAvailable, NotFinished, ServiceError, UnknownSurvey
from service.operations.arms import Arms
from service.operations.stored import utc_now
from service.sorted_ids import ID, new_id
from service.storage.ports import (
    CANCELLED,
    OPEN_STATES,
    SUCCEEDED,
    Document,
    KeyUsed,
    Survey,
    SurveyStorage,
)
from service.surveys.kinds import Accepted, SentTargets
from service.surveys.pool import Pool
from service.surveys.registry import SURVEY_KINDS
from service.surveys.runner import Runner
from service.validation import details_of
from service.wire.arms import ReadArm
from service.wire.senders_key import kept_key, other_request
from service.wire.surveys import SurveyRequest

MOST_OPEN = 10_000
"""Surveys that wait: more are the mistake of a program that asks in a circle."""

_SOON_S, _LATEST_S = 1, 60
_FIELD = "request"


class Surveys:
    """The surveys of one service."""

    def __init__(
        self,
        store: SurveyStorage,
        arms: Arms[ReadArm],
        pool: Pool,
        version: str,
        *,
        now: Callable[[], datetime] = utc_now,
        days: int = 0,
    ) -> None:
        self.store, self._days = store, days
        self.runner = Runner(store, arms, pool, now=now, days=days)
        self._arms, self._version, self._now = arms, version, now

    def go_on(self) -> None:
        """Go on with what a former process left open, and with removing what is old."""
        if self._days or self.store.count_open():
            self.runner.wake()

    def stop(self) -> None:
        """Stop working; what is open stays open."""
        self.runner.stop()

    def create(
        self,
        asked: SurveyRequest,
        key: str | None,
        raw: bytes,
        sent: SentTargets | None = None,
    ) -> tuple[Survey, bool]:
        """Take a survey in, and return it and whether it is new.

        Parameters
        ----------
        key, raw : what the sender calls this request, and its bytes: the same again give the
            survey that the first gave.
        sent : targets that came beside what is asked.

        Raises
        ------
        UnusableValue : the key came with another request before.
        NotAvailable : too many are waiting.
        ServiceError, KinematicsError : the request is refused.
        """
        hashed = kept_key(key)
        digest = hashlib.sha256(raw).hexdigest()
        # Before all else: the same again is answered also when by now it would be refused.
        if hashed is not None and (before := self.store.sent(hashed)) is not None:
            return self._sent_before(*before, digest, key), False
        if self.store.count_open() >= MOST_OPEN:
            raise NotAvailable(
                f"{MOST_OPEN} surveys are waiting",
                way_out="cancel some, or ask again later",
                headers={"Retry-After": str(_LATEST_S)},
            )
        accepted = self._accepted(asked, sent)
        at = self._now()
        survey = Survey(
            id=new_id(at),
            kind=asked.kind,
            title=asked.title or "",
            request=accepted.request,
            about=_as_kept({**accepted.about, "software": self._version}),
            total=accepted.total,
            created_at=at,
        )
        try:
            self.store.add(survey, accepted.pieces, key=hashed, digest=digest)
        except KeyUsed as used:
            return self._sent_before(used.survey, used.digest, digest, key), False
        self.runner.wake()
        return survey, True

    def _sent_before(self, survey: Survey, its: str, digest: str, key: str | None) -> Survey:
        """Return the survey that a key gave before, if the same request came with it."""
        if its == digest:
            return self.runner.seen(survey)
        raise other_request(key)

    def _accepted(self, asked: SurveyRequest, sent: SentTargets | None) -> Accepted:
        """Return what a kind makes of its request, whose refusals point below ``request``."""
        try:
            return SURVEY_KINDS[asked.kind].accept(self._arms, asked.request, sent)
        except KinematicsError as error:
            raise error.below(_FIELD) from None
        except ValidationError as error:
            details = details_of(error, body=asked.request)
            raise ServiceError(details[0].say, errors=_below(details), status=422) from None
        except ServiceError as error:
            error.errors = _below(error.details())
            raise

    def get(self, survey: str) -> Survey:
        """Return one survey.

        Raises
        ------
        UnknownSurvey
        """
        found = self.store.get(survey) if ID.fullmatch(survey) else None
        if found is None:
            raise UnknownSurvey(
                f"there is no survey {survey[:60]!r}",
                where=("survey",),
                location="path",
                value=survey,
                way_out="GET /v1/surveys lists them",
            )
        return self.runner.seen(found)

    def page(self, before: str, size: int) -> tuple[Sequence[Survey], bool]:
        """Return up to ``size`` surveys, the newest first, and whether older ones follow."""
        found = [self.runner.seen(survey) for survey in self.store.page(before, size + 1)]
        return found[:size], len(found) > size

    def cancel(self, survey: str) -> Survey:
        """End a survey that is open; one that is over stays as it is.

        Raises
        ------
        UnknownSurvey
        """
        self.get(survey)
        if self.store.end(survey, CANCELLED, self._now()):
            self.runner.let_go(survey)
        return self.get(survey)

    def remove(self, survey: str) -> None:
        """Remove a survey with its result.

        Raises
        ------
        UnknownSurvey
        NotFinished : it is still open.
        """
        found = self.get(survey)
        if found.state in OPEN_STATES:
            raise NotFinished(
                f"the survey is {found.state}",
                where=("survey",),
                location="path",
                value=survey,
                way_out="cancel it first",
            )
        self.store.remove(survey)

    def arm_of(self, survey: Survey) -> Document:
        """Return the document of the arm a survey is about, as it was."""
        asked = survey.request["arm"]
        if survey.about["arm"]["revision"] is None:
            whole: Document = asked
            return whole
        return self._arms.get(asked["name"], asked["revision"]).record.document

    def finished(self, survey: str) -> Survey:
        """Return a survey that has a result.

        Raises
        ------
        UnknownSurvey
        NotFinished : it has none, or not yet; ``Retry-After`` says when to ask again.
        """
        found = self.get(survey)
        if found.state == SUCCEEDED:
            return found
        again = found.state in OPEN_STATES
        left = self.runner.remaining_s(found) or 2.0
        retry = {"Retry-After": str(round(min(max(left, _SOON_S), _LATEST_S)))} if again else {}
        raise NotFinished(
            _without_result(found),
            where=("survey",),
            location="path",
            value=survey,
            way_out="ask again later" if again else "ask for it anew",
            headers=retry,
        )


def _without_result(survey: Survey) -> str:
    if survey.state in OPEN_STATES:
        return f"the survey is {survey.state}"
    if not survey.reason:
        return f"the survey is {survey.state} and has no result"
    return f"the survey has no result, it {survey.state}: {survey.reason}"


def _below(details: Sequence[Detail]) -> tuple[Detail, ...]:
    return tuple(replace(detail, where=(_FIELD, *detail.where)) for detail in details)


def _as_kept(about: Document) -> Document:
    """Return a document as it comes back from the store, without views into what it was made of."""
    kept: Document = orjson.loads(orjson.dumps(about, option=orjson.OPT_SERIALIZE_NUMPY))
    return kept
