"""Samples of an arm's reach, told a piece at a time, and what they say together.

Left out: printing them (wire), and in which thread a piece is worked on (bulk).
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from kinematics.orientation_forms import shape_of
from kinematics.reach.sample_summary import (
    MEASURES,
    FirstAxis,
    SampleSummary,
    first_axis,
    states_of,
    summary_of,
)
from kinematics.reach.samples import JointSamples, tool_positions
from kinematics.reach.tolerances import SAMPLES_JUDGED
from kinematics.table import FloatArray
from service.convert import joint_values_out, pose_orientations_out
from service.errors import TooLarge, UnusableValue
from service.operations.arms import Arms
from service.operations.poses import placed
from service.operations.questions import Question, question_of
from service.wire.arms import ReadArm
from service.wire.formats import Format, form_for
from service.wire.models import PosesRequest
from service.wire.samples import (
    MOST_LISTED,
    MOST_SAMPLES,
    WORKING_TRAVEL,
    SamplesRequest,
    column_names,
)

_ANGLES, _QUATERNION = ("r1", "r2", "r3"), ("qw", "qx", "qy", "qz")


@dataclass(frozen=True, eq=False)
class ManySamples:
    """Samples of one arm with one tool, and what is told of each."""

    question: Question
    samples: JointSamples
    asked: SamplesRequest

    @property
    def count(self) -> int:
        """Samples in all."""
        return self.samples.count

    @cached_property
    def axis(self) -> FirstAxis | None:
        """Axis 1, which radius and height are told about."""
        return first_axis(self.question.arm)

    @cached_property
    def head(self) -> Mapping[str, object]:
        """What stands at the head of the answer."""
        return {
            **self.question.head,
            "form": self.question.form if self.asked.orientations else None,
            "count": self.count,
            "seed": self.samples.seed,
            "within": self.asked.within,
        }

    @cached_property
    def columns(self) -> list[str]:
        """Names of the columns of a table."""
        angles = _QUATERNION if self.question.form == "quaternion-wxyz" else _ANGLES
        return column_names(
            positions=self.asked.positions,
            orientation=angles if self.asked.orientations else (),
            joints=self.question.arm.joint_count if self.asked.joints else 0,
        )

    def told(self, begin: int, end: int) -> dict[str, FloatArray]:
        """Return what is told of samples ``begin`` ... ``end``, by its name, in their order."""
        question, asked = self.question, self.asked
        joint_values = self.samples.piece(begin, end)
        told: dict[str, FloatArray] = {}
        if asked.positions or asked.orientations:
            tool_in_frame = placed(question, joint_values, None)
            if asked.positions:
                told["position"] = question.units.length_out(tool_in_frame[:, :3, 3])
            if asked.orientations:
                values, _ = pose_orientations_out(question.units, question.form, tool_in_frame)
                told["orientation"] = values
        if asked.joints:
            told["joints"] = joint_values_out(question.arm, question.units, joint_values)
        return told

    def numbers(self, begin: int, end: int) -> FloatArray:
        """Return the lines of a table, (end - begin, columns)."""
        return np.hstack(list(self.told(begin, end).values()))

    def items(self, begin: int, end: int) -> list[dict[str, object]]:
        """Return samples ``begin`` ... ``end`` as in a nested answer."""
        told = {name: values.tolist() for name, values in self.told(begin, end).items()}
        each = zip(*told.values(), strict=True)
        return [dict(zip(told, values, strict=True)) for values in each]

    def summary_piece(self, begin: int, end: int) -> SampleSummary:
        """Return what samples ``begin`` ... ``end`` say together."""
        question = self.question
        tool_in_flange = question.tool.tool_in_flange
        positions = tool_positions(self.samples, tool_in_flange, begin, end)
        found = summary_of(positions, self.axis, begin, question.base_in_frame)
        judged = min(end, SAMPLES_JUDGED)
        if judged <= begin:
            return found
        assert question.prepared is not None  # an arm without joints has no samples
        return found.judged_as(
            judged - begin,
            states_of(self.samples, question.prepared[0], tool_in_flange, begin, judged),
        )

    def summary(self, pieces: Sequence[SampleSummary]) -> dict[str, object]:
        """Return what all pieces say together, as answered."""
        first, *others = pieces
        for other in others:
            first = first.merged(other)
        assert self.question.prepared is not None
        extremes: dict[str, object] = dict.fromkeys(MEASURES)
        for place, measure in enumerate(MEASURES):
            if not np.isnan(first.least[place]):
                extremes[measure] = {
                    "least": self._extreme(first.least[place], first.least_at[place]),
                    "greatest": self._extreme(first.greatest[place], first.greatest_at[place]),
                }
        shares = {"near": first.near / first.judged, "singular": first.singular / first.judged}
        task = self.question.prepared[0].task
        return {
            "extremes": extremes,
            "singularity": {"judged": first.judged, **shares, "task": task},
        }

    def _extreme(self, metres: float, number: int) -> dict[str, object]:
        question = self.question
        joint_values = self.samples.piece(int(number), int(number) + 1)[0]
        return {
            "value": question.units.value_out(float(metres), "m"),
            "sample": int(number),
            "joints": joint_values_out(question.arm, question.units, joint_values).tolist(),
        }


def samples_asked(
    arms: Arms[ReadArm], asked: SamplesRequest, wanted: Format, most: int = MOST_SAMPLES
) -> ManySamples:
    """Return the samples that a body asks for, in the format the answer will have.

    Parameters
    ----------
    most : samples of a table.

    Raises
    ------
    ServiceError, KinematicsError : arm, tool, frame, form, count or travel cannot be used.
    """
    form = form_for(wanted, asked.form, key="poses", location="body")
    shape_of(form)  # refused also where no orientation is told
    about = PosesRequest.model_construct(
        arm=asked.arm, joints=[], tool=asked.tool, frame=asked.frame, units=asked.units
    )
    question = question_of(arms, about, form)
    is_table = wanted != "json"
    lists_any = asked.positions or asked.orientations or asked.joints
    if is_table and not lists_any:
        raise UnusableValue(
            "a table of nothing: positions, orientations and joints are all false",
            where=("positions",),
            value=False,
            way_out="let one of them be true, or ask for format=json, which has the summary",
        )
    _checked_count(asked.count, MOST_LISTED if lists_any and not is_table else most)
    working = asked.within == WORKING_TRAVEL
    samples = JointSamples(question.arm, asked.count, asked.seed, working=working)
    return ManySamples(question, samples, asked)


def _checked_count(count: int, most: int) -> None:
    if 1 <= count <= most:
        return
    if count < 1:
        raise UnusableValue(
            f"{count} samples cannot be drawn",
            where=("count",),
            value=count,
            way_out=f"ask for 1 to {most}",
        )
    more = (
        f"; up to {MOST_SAMPLES} as format=npy or csv, or with positions false"
        if most < MOST_SAMPLES
        else ""
    )
    raise TooLarge(
        f"{count} samples in one answer, and at most {most}",
        where=("count",),
        value=count,
        way_out=f"ask for at most {most}{more}",
        status=422,
    )
