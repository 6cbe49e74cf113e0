"""One table of codes, one shape of refusal (RFC 9457).

Left out: the classes that are raised (``errors.py``), how pydantic's complaints are read
(``validation.py``) and how a problem is sent.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import NamedTuple

from pydantic import ValidationError

from kinematics.errors import KinematicsError
from service.details import Detail, Location, as_given, encodable
from service.errors import ServiceError
from service.validation import details_of

MEDIA_TYPE = "application/problem+json"
# Enough to mend a table in one go, few enough to stay within a controller's 16 kB.
MOST_DETAILS = 20


class Kind(NamedTuple):
    """A row of the table: the integer of flat answers, the HTTP statuses, what it means.

    What is in the path cannot be found (404) and what is in the body cannot be used (422); so some
    codes have a second status beside the one they have where nothing else is said.
    """

    number: int
    statuses: tuple[int, ...]
    title: str

    @property
    def status(self) -> int:
        """The status where nothing else is said."""
        return self.statuses[0]


KINDS: Mapping[str, Kind] = {
    "unparseable": Kind(100, (400,), "The request cannot be read"),
    "duplicate-key": Kind(100, (400,), "A key stands twice in one object"),
    "wrong-media-type": Kind(100, (415,), "The body is of a type this address does not read"),
    "request-timeout": Kind(100, (408,), "The body did not arrive in time"),
    "wrong-joint-count": Kind(101, (422,), "Not one joint value per driven row"),
    "not-finite": Kind(102, (422,), "A number is NaN or infinite"),
    "unknown-arm": Kind(103, (404, 422), "No arm or cell of this name"),
    "unknown-survey": Kind(103, (404,), "No survey of this id"),
    "unknown-record": Kind(103, (404,), "No record of this id"),
    "unknown-tool": Kind(104, (422,), "No tool of this name or number"),
    "unknown-frame": Kind(104, (422,), "No frame of this name or number"),
    "unusable-value": Kind(105, (422,), "A value cannot be used"),
    "missing-field": Kind(105, (422,), "A required field is missing"),
    "out-of-range": Kind(105, (422,), "A value is beyond 1e9 m or 1e9 rad"),
    "not-connected": Kind(105, (422,), "No relations lead from the one frame to the other"),
    "not-rigid": Kind(106, (422,), "A matrix is no rigid motion"),
    "unknown-revision": Kind(107, (404, 422), "No revision of this number"),
    "digest-differs": Kind(107, (409,), "The arm is not the one that was expected"),
    "name-taken": Kind(107, (409,), "The name is taken"),
    "in-use": Kind(107, (409,), "Something stored still needs it"),
    "revision-differs": Kind(107, (412,), "Arm or cell has been changed since it was read"),
    "precondition-required": Kind(107, (428,), "A write must say which revision it replaces"),
    "too-large": Kind(108, (413, 422), "The request is too large"),
    "not-available": Kind(109, (503, 422), "Not available now"),
    "not-finished": Kind(109, (409,), "The survey has no result, or not yet"),
    "no-live-pose": Kind(109, (409,), "No joint values have come, or none of that time"),
    "internal": Kind(109, (500,), "The service failed"),
    "unknown-field": Kind(110, (422,), "A field or parameter is not known"),
    "unknown-path": Kind(110, (404,), "No such address"),
    "method-not-allowed": Kind(110, (405,), "The address does not take this method"),
    "tool-not-said": Kind(111, (422,), "The arm has tools and no default tool"),
    "form-not-flat": Kind(112, (422,), "The orientation form does not fit a flat answer"),
    "number-does-not-fit": Kind(113, (422,), "A number does not fit its fixed-width field"),
}

# Codes that items and flat answers carry and that are no refusals.
STALE_CODE, SIMULATED_CODE = 7, 8
"""Of live poses; the codes below come from what is computed (kinematics/findings.py)."""

ANSWERS: Mapping[int, str] = {
    0: "fine",
    1: "near singular",
    2: "singular",
    3: "outside working travel",
    4: "outside travel",
    5: "angles not unique",
    6: "input repaired",
    STALE_CODE: "stale",
    SIMULATED_CODE: "simulated",
    200: "unreachable",
    201: "outside travel (reach)",
    202: "not found",
}


@dataclass(frozen=True, slots=True)
class Problem:
    """A refusal ready to be sent; ``document`` is its JSON, ``number`` goes into flat answers."""

    code: str
    status: int
    detail: str
    errors: tuple[Detail, ...] = ()
    headers: Mapping[str, str] = field(default_factory=dict)

    @property
    def number(self) -> int:
        """The integer that flat answers and items carry."""
        return KINDS[self.code].number

    def document(self, request_id: str) -> dict[str, object]:
        """Return the problem document of RFC 9457 with our own members."""
        return {
            "type": f"/docs/problems#{self.code}",
            "title": KINDS[self.code].title,
            "status": self.status,
            "detail": encodable(self.detail),
            "code": self.code,
            "number": self.number,
            "errors": [detail.document() for detail in self.errors[:MOST_DETAILS]],
            "request_id": request_id,
        }


def problem_of(exc: Exception, *, location: Location = "body", body: object = ...) -> Problem:
    """Return what to answer to ``exc``; anything unforeseen becomes ``internal``, without its text.

    Parameters
    ----------
    exc : ServiceError, KinematicsError or pydantic's ValidationError.
    location : where the core's and pydantic's complaints point into; a ServiceError knows itself.
    body : the parsed body, so that pointers lead to places that exist; ``...`` when there is none.

    Examples
    --------
    >>> from service.errors import UnknownField
    >>> problem = problem_of(UnknownField("no", where=("unit",), location="query"))
    >>> problem.code, problem.number, problem.status
    ('unknown-field', 110, 422)
    """
    if isinstance(exc, ServiceError):
        details = [as_given(detail, body) for detail in exc.details()]
        return _problem(exc.say, _by_weight(details), exc.status, exc.headers)
    if isinstance(exc, KinematicsError):
        detail = Detail(exc.code, exc.say, exc.where, location, exc.value, exc.way_out)
        # A count of rows is no oversized body: well-formed, and not usable.
        return _problem(exc.say, (as_given(detail, body),), 422)
    if isinstance(exc, ValidationError):
        details = _by_weight(details_of(exc, location=location, body=body))
        more = exc.error_count() - 1
        say = details[0].say + (f" (and {more} more)" if more else "")
        return _problem(say, details, None)
    return Problem("internal", 500, "The service failed; the log tells more under this request id.")


def _problem(
    say: str,
    details: Sequence[Detail],
    status: int | None,
    headers: Mapping[str, str] | None = None,
) -> Problem:
    code = details[0].code
    return Problem(code, status or KINDS[code].status, say, tuple(details), headers or {})


def _by_weight(details: Sequence[Detail]) -> list[Detail]:
    # With several codes the highest wins, as in flat answers; the first of equals. It stands
    # first, so that it is among those shown.
    return sorted(details, key=lambda detail: -KINDS[detail.code].number)
