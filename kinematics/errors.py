"""What the core refuses, as one tree of exceptions.

A posture that is singular or beyond travel is an answer with a finding, never an exception.

KinematicsError
|- InvalidArm            a row, limit, coupling, tool or frame of an arm cannot be used
|  |- TooManyRows
|  |- InvalidCoupling    to itself, to a passive or missing row
|  '- SingularDriveMap   the driven rows do not move independently
|- InvalidCell           things stand in each other in a circle, or share a number
|  '- TooManyPlaced
|- InvalidOrientation    values that describe no rotation
|  '- TooManySteps
|- NotRigid              a matrix that is no rotation, or a mirrored one
|- OutOfRange            beyond 1e9 m or 1e9 rad
|- WrongJointCount
|- NotFinite             NaN or infinity
|- UnknownTool
|- UnknownFrame
|- NotConnected          no relations lead from the one frame to the other
|- TooLongWays           ways or loops through more relations than can be told
'- ToolNotSaid           an arm with several tools and no default
"""

from collections.abc import Callable, Mapping, Sequence
from typing import Any, ClassVar


class KinematicsError(ValueError):
    """Base of all refusals; says what, where, which value and the way out.

    Parameters
    ----------
    say : what is wrong, in one sentence.
    where : keys and indices that lead to the value, outermost first, e.g. ``("rows", 2, "a")``.
    value : the offending value as it was given.
    way_out : what the caller can do about it.

    Examples
    --------
    >>> error = InvalidArm("travel is reversed", where=("rows", 0, "travel"), value=[5, -5])
    >>> error.where, error.value
    (('rows', 0, 'travel'), [5, -5])
    """

    code: ClassVar[str] = "unusable-value"

    def __init__(
        self,
        say: str,
        *,
        where: Sequence[str | int] = (),
        value: object = None,
        way_out: str = "",
    ) -> None:
        super().__init__(say)
        self.say = say
        self.where = tuple(where)
        self.value = value
        self.way_out = way_out

    def below(self, *prefix: str | int) -> "KinematicsError":
        """Return the same error seen from further out: ``prefix`` is put before ``where``.

        Examples
        --------
        >>> InvalidArm("no", where=("a",)).below("rows", 3).where
        ('rows', 3, 'a')
        """
        self.where = (*prefix, *self.where)
        return self

    def __reduce__(self) -> tuple[Callable[..., "KinematicsError"], tuple[Any, ...]]:
        """Let it come from another process as it was, whatever its kind is made from."""
        return _as_it_was, (type(self), self.args, self.__dict__)


def _as_it_was(
    kind: type[KinematicsError], args: tuple[object, ...], state: Mapping[str, object]
) -> KinematicsError:
    error = kind.__new__(kind, *args)
    error.__dict__.update(state)
    return error


class InvalidArm(KinematicsError):
    """A row, limit, tool or frame of an arm cannot be used."""


class TooManyRows(InvalidArm):
    """More than 32 rows."""

    code = "too-large"


class InvalidCoupling(InvalidArm):
    """A coupling to the row itself, or to a passive or missing row."""


class SingularDriveMap(InvalidArm):
    """The couplings leave the driven rows dependent on each other."""


class InvalidCell(KinematicsError):
    """Arms and frames of a cell that stand in each other in a circle, or share a number."""


class TooManyPlaced(InvalidCell):
    """More arms or frames than a cell holds."""

    code = "too-large"


class InvalidOrientation(KinematicsError):
    """Values that describe no rotation: unknown form, wrong count, zero quaternion."""


class TooManySteps(InvalidOrientation):
    """More than 1000 turns one after the other."""

    code = "too-large"


class NotRigid(KinematicsError):
    """A matrix too far from a rotation, or a mirrored one; ``defect`` is max |R^T R - I|."""

    code = "not-rigid"

    def __init__(
        self,
        say: str,
        *,
        defect: float,
        where: Sequence[str | int] = (),
        value: object = None,
        way_out: str = "",
    ) -> None:
        super().__init__(say, where=where, value=value, way_out=way_out)
        self.defect = defect


class OutOfRange(KinematicsError):
    """A length beyond 1e9 m or an angle beyond 1e9 rad."""

    code = "out-of-range"


class WrongJointCount(KinematicsError):
    """Not one joint value per driven row."""

    code = "wrong-joint-count"


class NotFinite(KinematicsError):
    """NaN or infinity where a number is needed."""

    code = "not-finite"


class UnknownTool(KinematicsError):
    """A tool name or number that the arm does not have."""

    code = "unknown-tool"


class UnknownFrame(KinematicsError):
    """A frame name or number that neither the arm nor its cell has."""

    code = "unknown-frame"


class NotConnected(KinematicsError):
    """No relations lead from the one frame to the other."""

    code = "not-connected"


class TooLongWays(KinematicsError):
    """Ways or loops through more relations than can be told in one answer."""

    code = "too-large"


class ToolNotSaid(KinematicsError):
    """The arm has tools but no default, and the request names none."""

    code = "tool-not-said"
