"""What the service refuses, as one tree of exceptions; the table in ``problems.py`` has the codes.

Left out: refusals of the core (``kinematics.errors``) and how a refusal is answered.

ServiceError
|- Unparseable               bytes, JSON or a number that cannot be read
|  |- DuplicateKey
|  |- WrongMediaType
|  '- RequestTimeout         the body stalled
|- UnknownArm                neither an arm nor a cell of that name; a body may say 422
|- UnknownSurvey
|- UnknownRecord
|- StateDiffers
|  |- UnknownRevision
|  |- DigestDiffers          the arm is not the one that was expected
|  |- RevisionDiffers        If-Match names another revision
|  |- PreconditionRequired   a write without If-Match
|  |- InUse                 a cell in which arms stand
|  '- NameTaken
|- UnusableValue
|  '- MissingField
|- TooLarge                  a body; a count says 422
|- NotAvailable              a feature not in this version says 422
|  |- NotFinished            a survey that is still queued or running, or has no result
|  |- NoLivePose             no joint values have come, or none near the time asked for
|  |- StorageUnavailable     for now; asking again may help
|  '- StorageUnusable        asking again will not help
|- NotInTheInterface
|  |- UnknownField
|  |- UnknownPath
|  '- MethodNotAllowed
|- FormNotFlat               a flat answer holds the 24 angle triples only
'- NumberDoesNotFit          a fixed-width field is too narrow for the value
"""

from collections.abc import Mapping, Sequence
from typing import ClassVar

from service.details import Detail, Location


class ServiceError(Exception):
    """Base of all refusals of the service.

    Parameters
    ----------
    say : what is wrong, in one sentence.
    where : keys and indices that lead to the value, outermost first.
    location : the part of the request that ``where`` leads into.
    value : the offending value as it was given.
    way_out : what the caller can do about it.
    errors : several complaints at once, in place of the one above; ``say`` then sums them up.
    status : HTTP status where it differs from the table's (an unknown arm named in a body: 422).
    headers : headers of the answer, beside those its kind always has.

    Examples
    --------
    >>> error = UnknownArm('no arm "axle"', where=("arm",), value="axle", status=422)
    >>> error.code, error.details()[0].where
    ('unknown-arm', ('arm',))
    """

    code: ClassVar[str] = "internal"
    usual_headers: ClassVar[Mapping[str, str]] = {}

    def __init__(
        self,
        say: str,
        *,
        where: Sequence[str | int] = (),
        location: Location = "body",
        value: object = None,
        way_out: str = "",
        errors: Sequence[Detail] = (),
        status: int | None = None,
        headers: Mapping[str, str] | None = None,
    ) -> None:
        super().__init__(say)
        self.say = say
        self.where = tuple(where)
        self.location: Location = location
        self.value = value
        self.way_out = way_out
        self.errors = tuple(errors)
        self.status = status
        self.headers = {**self.usual_headers, **(headers or {})}

    def details(self) -> tuple[Detail, ...]:
        """Return the complaints, at least one."""
        if self.errors:
            return self.errors
        one = Detail(self.code, self.say, self.where, self.location, self.value, self.way_out)
        return (one,)


class Unparseable(ServiceError):
    """Bytes, JSON or a number that cannot be read."""

    code = "unparseable"


class DuplicateKey(Unparseable):
    """A key stands twice in one object."""

    code = "duplicate-key"


class WrongMediaType(Unparseable):
    """The body's content type is not one that the address reads."""

    code = "wrong-media-type"


class RequestTimeout(Unparseable):
    """The body stalled; the connection is closed after the answer."""

    code = "request-timeout"


class UnknownArm(ServiceError):
    """No arm or cell of this name."""

    code = "unknown-arm"


class UnknownSurvey(ServiceError):
    """No survey of this id."""

    code = "unknown-survey"


class UnknownRecord(ServiceError):
    """No record of this id."""

    code = "unknown-record"


class StateDiffers(ServiceError):
    """What is stored is not what the request supposes; raise one of the classes below it."""

    code = "revision-differs"


class UnknownRevision(StateDiffers):
    """The arm has no revision of this number."""

    code = "unknown-revision"


class DigestDiffers(StateDiffers):
    """The arm's digest is not the one of ``expect``."""

    code = "digest-differs"


class RevisionDiffers(StateDiffers):
    """``If-Match`` names another revision than the present one."""

    code = "revision-differs"


class PreconditionRequired(StateDiffers):
    """A write without ``If-Match`` or ``If-None-Match``."""

    code = "precondition-required"


class InUse(StateDiffers):
    """What is to be removed is still named by others: a cell in which arms stand."""

    code = "in-use"


class NameTaken(StateDiffers):
    """The name to be created exists."""

    code = "name-taken"


class UnusableValue(ServiceError):
    """A well-formed value that cannot be used."""

    code = "unusable-value"


class MissingField(UnusableValue):
    """A required field or parameter is not there."""

    code = "missing-field"


class TooLarge(ServiceError):
    """A body over the limit (413), or too many items (``status=422``)."""

    code = "too-large"


class NotAvailable(ServiceError):
    """Not now (503), or not in this version (``status=422``)."""

    code = "not-available"


class NotFinished(NotAvailable):
    """The survey is queued or running, or ended without a result."""

    code = "not-finished"


class NoLivePose(NotAvailable):
    """No joint values have come of the arm, or none close enough to the time asked for."""

    code = "no-live-pose"


class StorageUnavailable(NotAvailable):
    """The database does not answer; asking again may help, after the seconds it says."""

    usual_headers: ClassVar[Mapping[str, str]] = {"Retry-After": "5"}


class StorageUnusable(NotAvailable):
    """The database cannot serve: wrong version, no right to write, damaged."""


class NotInTheInterface(ServiceError):
    """The request uses something the interface does not have; raise one of the classes below it."""

    code = "unknown-field"


class UnknownField(NotInTheInterface):
    """A field or parameter that the address does not know."""

    code = "unknown-field"


class UnknownPath(NotInTheInterface):
    """No such address."""

    code = "unknown-path"


class MethodNotAllowed(NotInTheInterface):
    """The address does not take this method; ``headers`` hold ``Allow``."""

    code = "method-not-allowed"


class FormNotFlat(ServiceError):
    """The orientation form has no place in a flat answer."""

    code = "form-not-flat"


class NumberDoesNotFit(ServiceError):
    """A number is too large for its fixed-width field."""

    code = "number-does-not-fit"
