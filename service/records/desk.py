"""Records as their users see them: made of a pose, looked up, listed.

A record is the pose as any answer tells it, together with all that leads back to it. It is written
before it is answered, and never changed. Left out: addresses and formats (routes, wire).
"""

import hashlib
from collections.abc import Callable, Sequence
from datetime import datetime, timedelta
from math import isfinite
from typing import Any

from kinematics.findings import OUTSIDE_TRAVEL
from service.errors import (
    DigestDiffers,
    NoLivePose,
    UnknownRecord,
    UnknownRevision,
    UnusableValue,
)
from service.operations.arms import Arms
from service.operations.joint_rows import read_joint_row_at
from service.operations.poses import pose_item
from service.operations.questions import Question, question_of
from service.operations.stored import utc_now
from service.records.measured import Measured
from service.records.ports import Filter, Record, RecordKeyUsed, RecordStorage, Sent, Widths
from service.sorted_ids import ID, new_id
from service.wire.arms import ReadArm
from service.wire.flat import FLAGS
from service.wire.models import ArmRevision, PosesRequest
from service.wire.record_lines import numbers_of
from service.wire.records import RecordRequest
from service.wire.senders_key import kept_key, other_request
from service.wire.stored import time_of
from service.wire.times import time_in

_USUAL_FORM = "quaternion-wxyz"
_AHEAD = timedelta(days=1)
"""How far a sender's clock may be ahead of ours; more is a wrong date, and would be kept for years.
What is long past may well be handed in late."""


Live = Measured | NoLivePose


class Records:
    """The records of one service."""

    def __init__(
        self,
        store: RecordStorage,
        arms: Arms[ReadArm],
        version: str,
        *,
        now: Callable[[], datetime] = utc_now,
    ) -> None:
        self._store, self._arms = store, arms
        self._version, self._now = version, now

    def create(
        self, arm: str, asked: RecordRequest, live: Live, key: str | None, raw: bytes
    ) -> Record:
        """Keep a pose, and return it as kept.

        Parameters
        ----------
        live : the live values of the moment, or why there are none; for a request without joints.
        key, raw : what the sender calls this request, and its bytes: the same again for the same
            arm give the record that the first gave.

        Raises
        ------
        UnknownArm, UnknownRevision, DigestDiffers : of the arm.
        NoLivePose : there are no live values of the arm, and none were given.
        UnusableValue : the key came with another request before, or the time is far ahead.
        ServiceError, KinematicsError : the request is refused.
        """
        received = self._now()
        hashed = kept_key(key)
        digest = hashlib.sha256(arm.encode() + b"\0" + raw).hexdigest()
        sent = None if hashed is None else self._store.sent(hashed)
        if sent is not None:
            return _same(sent, digest, key)
        question = self._question(arm, asked)
        measured = _measured(asked, question, live, received)
        record = self._made(question, measured, asked)
        try:
            self._store.add(record, key=hashed, digest=digest)
        except RecordKeyUsed as used:
            return _same(used.sent, digest, key)
        return record

    def get(self, record: str, arm: str | None = None) -> Record:
        """Return one record, of an arm if that is said.

        Raises
        ------
        UnknownRecord
        """
        found = self._store.get(record) if ID.fullmatch(record) else None
        if found is None or arm not in (None, found.arm):
            raise UnknownRecord(
                f"there is no record {record[:60]!r}" + (f" of {arm[:60]!r}" if arm else ""),
                where=("record",),
                location="path",
                value=record,
                way_out="GET /v1/records lists them",
            )
        return found

    def page(self, which: Filter, before: str, size: int) -> tuple[Sequence[Record], bool]:
        """Return up to ``size`` records, the newest first, and whether older ones follow."""
        found = self._store.newest(which, before, size + 1)
        return found[:size], len(found) > size

    def oldest(self, which: Filter, after: str, size: int) -> Sequence[Record]:
        """Return up to ``size`` records, the oldest first, that follow ``after``."""
        return self._store.oldest(which, after, size)

    def widths(self, which: Filter) -> Widths:
        """Return how many columns lines of these records take."""
        return self._store.widths(which)

    def _question(self, arm: str, asked: RecordRequest) -> Question:
        try:
            stored = self._arms.get(arm, asked.revision)
        except UnknownRevision as error:
            error.where, error.location, error.status = ("revision",), "body", 422
            raise
        digest = stored.read.digests.digest
        if asked.expect is not None and asked.expect != digest:
            raise DigestDiffers(
                f"the arm's digest is {digest}, not {asked.expect[:60]}",
                where=("expect",),
                value=asked.expect,
                way_out="read the arm anew and check what was changed",
            )
        about = PosesRequest.model_construct(
            arm=ArmRevision(name=arm, revision=stored.record.revision),
            joints=[],
            tool=asked.tool,
            frame=asked.frame,
            units=asked.units,
            task=None,
        )
        return question_of(self._arms, about, asked.form or _USUAL_FORM)

    def _made(self, question: Question, measured: Measured, asked: RecordRequest) -> Record:
        answered = pose_item(question, list(measured.joints))
        item: dict[str, Any] = dict(answered.items[0])
        margin = answered.margins[0]
        findings = item["findings"]
        codes = measured.codes | {finding["code"] for finding in findings}
        quality, reason = measured.quality, measured.reason
        if quality == "good" and OUTSIDE_TRAVEL in codes:
            quality, reason = "uncertain", "outside-travel"
        computed = self._now()
        document = {
            "id": new_id(computed),
            **question.head,
            "source": measured.source,
            "quality": quality,
            "reason": reason,
            "code": max(codes, default=0),
            "flags": sum(FLAGS[code] for code in codes),
            "joints": _as_they_came(question, measured.joints),
            "position": item["position"],
            "orientation": item["orientation"],
            "margin": margin if isfinite(margin) else None,
            "singularity": item["singularity"],
            "findings": findings,
            "sampled_at": time_of(measured.sampled_at),
            "received_at": time_of(measured.received_at),
            "computed_at": time_of(computed),
            "serial": asked.serial,
            "tag": asked.tag,
            "fields": asked.fields,
            "software": self._version,
        }
        return Record(
            id=str(document["id"]),
            arm=question.arm.name,
            serial=asked.serial,
            tag=asked.tag,
            quality=quality,
            sampled_at=measured.sampled_at,
            joint_count=question.arm.joint_count,
            orientation_count=len(numbers_of(item["orientation"]["values"])),
            document=document,
        )


def _as_they_came(question: Question, joints: Sequence[float]) -> list[float]:
    """Return joint values in the user's units, 30 and not 29.999999999999996."""
    shown, units = question.units.shortest_out, question.arm.joint_units
    return [shown(value, unit) for value, unit in zip(joints, units, strict=True)]


def _measured(asked: RecordRequest, question: Question, live: Live, received: datetime) -> Measured:
    if asked.joints is not None:
        return _given(asked.joints, asked.sampled_at, question, received)
    if asked.sampled_at is not None:
        raise UnusableValue(
            "sampled_at without joints: the live values have a time of their own",
            where=("sampled_at",),
            value=asked.sampled_at,
            way_out="leave it out, or give joints",
        )
    if isinstance(live, NoLivePose):
        raise live
    if len(live.joints) != question.arm.joint_count:
        raise NoLivePose(
            f"the live values of {question.arm.name!r} are of another revision",
            where=("revision",),
            value=asked.revision,
            way_out="leave revision out, or give joints",
        )
    return live


def _given(
    joints: list[Any], sampled_at: str | None, question: Question, received: datetime
) -> Measured:
    sampled = received if sampled_at is None else time_in(sampled_at, ("sampled_at",))
    if sampled > received + _AHEAD:
        raise UnusableValue(
            "sampled_at is more than a day ahead of the clock here",
            where=("sampled_at",),
            value=sampled_at,
            way_out="check the sender's clock, or leave sampled_at out",
        )
    values = read_joint_row_at(question.arm, question.units, joints, ("joints",))
    return Measured(tuple(values.tolist()), "given", "good", None, sampled, received)


def _same(sent: Sent, digest: str, key: str | None) -> Record:
    """Return what a key made before, if it came with the same request."""
    if sent.digest != digest:
        raise other_request(key)
    return sent.record
