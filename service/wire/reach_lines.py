"""Answers about many targets as CSV (RFC 4180): the flat keys and what a planner sorts by.

One line for each target with its best solution, or one for each solution. Left out: part locations
that come in (reach_csv.py), the answer about one target (reach_flat.py).
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from kinematics.table import FloatArray
from service.wire.csv_rows import NAME
from service.wire.csv_text import FIRST, REFUSALS_FROM, line_begins, number_texts, quoted
from service.wire.flat import NO_LIMITS_MARGIN, NO_NUMBER

AFTER_STAMP = ("verdict", "solutions")
AFTER_JOINTS = ("margin", "state", "units", "revision", "digest")
PLACE = ("x", "y", "z")
BESIDE = ("solution", "proof", "branch", "position_error", "angle_error", "reason", NAME, *PLACE)
"""What a line has beside the keys of a flat answer: ``solution`` counts those of one target, and
``x y z`` are what was asked for, empty where that cannot be read."""

_END = "\r\n"


class Texts(NamedTuple):
    """A column of few different texts: the texts, and which of them each line has, -1 for none."""

    words: Sequence[str]
    which: NDArray[np.intp]

    def told(self) -> list[str]:
        """Return the text of each line, empty where there is none.

        Examples
        --------
        >>> Texts(("near", "far"), np.array([1, -1, 0])).told()
        ['far', '', 'near']
        """
        told: list[str] = np.array([*self.words, ""], dtype=object)[self.which].tolist()
        return told


@dataclass(frozen=True, eq=False)
class ReachColumns:
    """What lines say, an entry for each line.

    Attributes
    ----------
    codes : (lines,); applying : for each code that is no refusal, where it applies, (lines,).
    verdicts, proofs, branches, states : texts. reasons, names : the text of a line that has one.
    counts, ranks : solutions of the target, and which of them a line tells, from 1; 0 for none.
    joints : (lines, joints), in the user's units; NaN where there is no solution to be used.
    why : of a line with a reason, all that JSON tells of it, where that was asked for.
    margins : (lines,), infinite without travel limits; errors : (lines, 2), position and angle.
    """

    codes: NDArray[np.int64]
    applying: Mapping[int, NDArray[np.bool_]]
    verdicts: Texts
    counts: NDArray[np.int64]
    joints: FloatArray
    margins: FloatArray
    states: Texts
    ranks: NDArray[np.int64]
    proofs: Texts
    branches: Texts
    errors: FloatArray
    reasons: Mapping[int, str]
    names: Mapping[int, str]
    why: Mapping[int, Mapping[str, object]] = field(default_factory=dict)

    @property
    def targets(self) -> NDArray[np.intp]:
        """Which of the targets each line is about, counted from the first one told."""
        found: NDArray[np.intp] = np.cumsum(self.ranks <= 1) - 1
        return found


@dataclass(frozen=True)
class SameInAll:
    """What is the same in all lines."""

    seq: int
    tag: int
    t_ms: int
    units: str
    revision: int
    digest: str


def joint_keys(joints: int) -> tuple[str, ...]:
    """Return the keys of joint values, ``q1`` ... ``qn``."""
    return tuple(f"q{joint}" for joint in range(1, joints + 1))


def reach_head(joints: int) -> bytes:
    """Return the first line.

    Examples
    --------
    >>> reach_head(1)[:58]
    b'ok,code,flags,seq,tag,t_ms,verdict,solutions,q1,margin,sta'
    """
    keys = (*FIRST, *AFTER_STAMP, *joint_keys(joints), *AFTER_JOINTS, *BESIDE)
    return (",".join(keys) + _END).encode("ascii")


def reach_lines(columns: ReachColumns, places: FloatArray, same: SameInAll) -> bytes:
    """Return the lines.

    Parameters
    ----------
    places : of the targets, (targets, 3), as they are told; NaN where one cannot be read.
    """
    if not len(columns.codes):
        return b""
    begins = line_begins(columns.codes, columns.applying, (same.seq, same.tag, same.t_ms))
    none = columns.codes >= REFUSALS_FROM
    margins = np.where(np.isinf(columns.margins), NO_LIMITS_MARGIN, columns.margins)
    numbers = np.column_stack([columns.joints, margins])
    joints = number_texts(np.where(none[:, None], NO_NUMBER, numbers))
    errors = number_texts(np.where(none[:, None], NO_NUMBER, columns.errors))
    unread = np.isnan(places[:, 0]).tolist()
    where = [",," if no else text for text, no in zip(number_texts(places), unread, strict=True)]
    positions = [where[target] for target in columns.targets.tolist()]
    tail = f"{same.units},{same.revision},{same.digest}"
    reasons, names = (
        [noted.get(line, "") for line in range(len(none))]
        for noted in (columns.reasons, columns.names)
    )
    told = zip(
        begins, columns.verdicts.told(), columns.counts.tolist(), joints, columns.states.told(),
        columns.ranks.tolist(), columns.proofs.told(), columns.branches.told(), errors, reasons,
        names, positions, strict=True,
    )  # fmt: skip
    lines = [
        f"{begin},{verdict},{count},{values},{state},{tail},{rank},{proof},{quoted(branch)},"
        f"{error},{quoted(reason)},{quoted(name)},{place}"
        for (
            begin, verdict, count, values, state, rank, proof, branch, error, reason, name, place,
        ) in told
    ]  # fmt: skip
    return (_END.join(lines) + _END).encode("utf-8")
