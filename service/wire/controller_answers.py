"""What a controller's question is answered with, as models: nested, flat, or refused.

Left out: how the answers are made (flat.py, operations).
"""

from typing import Any, Literal

from pydantic import RootModel

from service.wire.answer_models import JacobiansAnswer, Open, PosesAnswer


class SinglePose(PosesAnswer):
    """The nested answer: of several codes the highest, and what tells it from a late one."""

    ok: bool
    code: int
    seq: int
    tag: int
    t_ms: int


class SingleJacobian(JacobiansAnswer):
    """The nested answer: of several codes the highest, and what tells it from a late one."""

    ok: bool
    code: int
    seq: int
    tag: int
    t_ms: int


class InlineRefusal(Open):
    """A problem document with status 200, as `errors=inline` asks for it; `code` is its number."""

    type: str
    title: str
    status: int
    detail: str
    code: int
    number: int
    errors: list[Any]
    request_id: str
    ok: Literal[False]
    seq: int
    tag: int
    t_ms: int


class FlatHead(Open):
    """What every flat answer begins with, and ends with; `ok` 0 is a refusal without numbers."""

    ok: Literal[0, 1]
    code: int
    flags: int
    seq: int
    tag: int
    t_ms: int
    units: str
    tool_no: int
    frame_no: int
    state: Literal["regular", "near", "singular", "none", ""]
    condition: float
    margin: float
    revision: int
    digest: str


class FlatPose(FlatHead):
    """The pose on one level; the keys stand in the order of the contract."""

    x: float
    y: float
    z: float
    r1: float
    r2: float
    r3: float
    form: str


class FlatJacobian(FlatHead):
    """The Jacobian on one level, `j11` ... `j6n` by rows between `t_ms` and `units`."""


class PoseReply(RootModel[SinglePose | FlatPose | InlineRefusal]):
    """A pose, nested or flat, or a refusal with status 200."""


class JacobianReply(RootModel[SingleJacobian | FlatJacobian | InlineRefusal]):
    """A Jacobian, nested or flat, or a refusal with status 200."""
