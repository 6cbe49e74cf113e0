"""The arm a request means: stored, at a revision, or given whole in the request.

Left out: what is asked about it (questions.py).
"""

from dataclasses import dataclass
from functools import lru_cache

from kinematics.arm import Arm
from kinematics.errors import KinematicsError
from kinematics.findings import Finding
from service.details import Location
from service.errors import ServiceError, UnknownArm
from service.operations.arms import Arms, StoredArm
from service.wire import models
from service.wire.arms import ReadArm, read_arm_model
from service.wire.cells import CellAt


@dataclass(frozen=True)
class MeantArm:
    """The arm a request means.

    Attributes
    ----------
    revision : None for an arm that came whole in the request.
    is_kept : whether the next request that means it will have the same ``read``.
    """

    read: ReadArm
    revision: int | None
    is_kept: bool = True

    @property
    def repaired(self) -> tuple[Finding, ...]:
        """What was mended in an arm that came whole; of a stored one it was told at the time."""
        return self.read.findings if self.revision is None else ()

    @property
    def arm(self) -> Arm:
        """The arm itself."""
        return self.read.arm

    def identity(self) -> dict[str, object]:
        """Return what leads back from an answer to the exact numbers it came from."""
        digests = self.read.digests
        return {
            "name": self.read.arm.name,
            "revision": self.revision,
            "digest": digests.digest,
            "table_digest": digests.table_digest,
            "setup_digest": digests.setup_digest,
        }


def meant_arm(arms: Arms[ReadArm], asked: str | models.ArmRevision | models.Arm) -> MeantArm:
    """Return the arm a body means: by name, by name and revision, or given whole.

    Raises
    ------
    UnknownArm, UnknownRevision : with status 422, since the address itself exists.
    ServiceError, KinematicsError : the arm given whole is refused.
    """
    if isinstance(asked, models.Arm):
        try:
            # What the cell says of an arm may be another thing at the next question.
            is_kept = asked.is_kept and asked.cell is None
            read = (
                _read_whole(_Whole(asked)) if is_kept else read_arm_model(asked, arms.newest_cell)
            )
        except KinematicsError as error:
            raise error.below("arm") from None
        except ServiceError as error:
            error.where = ("arm", *error.where)
            raise
        return MeantArm(read, None, is_kept)
    stored = stored_arm(arms, asked)
    return MeantArm(stored.read, stored.record.revision)


class _Whole:
    """An arm that came whole; what comes in the same words is one model (wire/models.py)."""

    def __init__(self, given: models.Arm) -> None:
        self.given = given

    def __hash__(self) -> int:
        return id(self.given)

    def __eq__(self, other: object) -> bool:
        return isinstance(other, _Whole) and self.given is other.given


@lru_cache(maxsize=models.WHOLE_ARMS_KEPT)
def _read_whole(whole: _Whole) -> ReadArm:
    return read_arm_model(whole.given)


def named_cell(arms: Arms[ReadArm], name: str) -> CellAt:
    """Return the cell that an arm given whole in a body names.

    Raises
    ------
    UnknownArm
    """
    try:
        return arms.newest_cell(name)
    except ServiceError as error:
        error.where = ("arm", *error.where)
        raise


def stored_arm(arms: Arms[ReadArm], asked: str | models.ArmRevision) -> StoredArm[ReadArm]:
    """Return the stored arm a body names.

    Raises
    ------
    UnknownArm, UnknownRevision : with status 422, since the address itself exists.
    """
    name, revision = (asked, None) if isinstance(asked, str) else (asked.name, asked.revision)
    try:
        return arms.get(name, revision)
    except ServiceError as error:
        if error.code in ("unknown-arm", "unknown-revision"):
            error.status, error.location = 422, "body"
            error.where = ("arm",) if isinstance(asked, str) else ("arm", "name")
            if error.code == "unknown-revision":
                error.where = ("arm", "revision")
        raise


def check_was_stored(arms: Arms[ReadArm], name: str, location: Location) -> None:
    """Refuse the name of an arm that is not stored and never was; its traces stay when it goes.

    Raises
    ------
    UnknownArm : with status 422 where the address itself exists.
    """
    try:
        arms.revisions_page(name, 0, 1)
    except UnknownArm as error:
        if location != "path":
            error.location, error.status = location, 422
        raise
