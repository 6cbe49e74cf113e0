"""What a question about postures rests on: which arm, tool, frame, units and task it means.

Left out: the joint values (joint_rows.py) and the answers (poses.py, jacobians.py).
"""

from collections.abc import Hashable, Mapping
from dataclasses import dataclass, field
from functools import cached_property, lru_cache
from typing import TYPE_CHECKING, Any

from kinematics.arm import BASE, FLANGE, Arm
from kinematics.errors import UnknownFrame
from kinematics.findings import Finding
from kinematics.nearest_frame import FramePlaces
from kinematics.posture_reader import PostureReader
from kinematics.singular_kinds import Anatomy, anatomy_of
from kinematics.table import FloatArray
from kinematics.task_space import TaskSpace, rows_of, task_space
from kinematics.transforms import inverse
from service.convert import UNITS, Units
from service.operations.arms import Arms
from service.operations.meant_arms import MeantArm, meant_arm
from service.operations.reachers import reacher_of
from service.wire import models
from service.wire.arms import ReadArm
from service.wire.poses import read_pose

if TYPE_CHECKING:
    from kinematics.reach.checks import Reacher
    from kinematics.travel.courses import Courses

# One entry per arm, tool and task in use, some 5 kB each; 0.4 MB where reach has been searched.
PREPARED_KEPT = 512
TOOL_AXES = "tool"


@dataclass(frozen=True)
class MeantTool:
    """The tool a request means: its name, or its pose as it was given."""

    shown: str | dict[str, Any]
    tool_in_flange: FloatArray
    number: int | None
    repaired: tuple[Finding, ...] = ()


@dataclass(frozen=True)
class Question:
    """A question about postures of one arm, all but the joint values.

    What follows from it is worked out once, however many joint values are asked about.
    """

    meant: MeantArm
    units: Units
    tool: MeantTool
    frame: str
    form: str
    task: Hashable
    repaired: tuple[Finding, ...] = field(default=())

    @cached_property
    def arm(self) -> Arm:
        """The arm asked about."""
        return self.meant.arm

    @cached_property
    def base_in_frame(self) -> FloatArray:
        """The pose of the base in the frame asked for, (4, 4)."""
        return self.arm.base_in_frame(self.frame)

    @cached_property
    def reader(self) -> PostureReader:
        """What reads single postures for this question."""
        in_base = self.frame in (BASE, FLANGE, TOOL_AXES)
        return PostureReader(
            self.arm,
            self.tool.tool_in_flange,
            None if in_base else self.base_in_frame,
            self.form,
            None if self.prepared is None else self.prepared[0],
        )

    @cached_property
    def frame_in_base(self) -> FloatArray:
        """The pose of that frame in the base, (4, 4)."""
        return inverse(self.base_in_frame)

    @cached_property
    def frame_places(self) -> FramePlaces:
        """What tells which named frame a point is nearest to."""
        return FramePlaces(self.arm)

    @cached_property
    def reacher(self) -> "Reacher":
        """What tells whether targets can be reached."""
        digest = self.meant.read.digests.table_digest
        return reacher_of(self.arm, digest, self.tool.tool_in_flange)

    @cached_property
    def courses(self) -> "Courses":
        """What follows courses of the arm."""
        # Imported when first wanted, like what tells of targets.
        from kinematics.travel.courses import Courses

        return Courses(self.reacher)

    @cached_property
    def head(self) -> Mapping[str, object]:
        """What stands at the head of every answer about postures."""
        return {
            "arm": self.meant.identity(),
            "units": self.units.name,
            "frame": self.frame,
            "tool": self.tool.shown,
        }

    @cached_property
    def prepared(self) -> tuple[TaskSpace, Anatomy] | None:
        """What singularity is judged by; None for an arm without joints."""
        return _prepared(_Key(self))


class _Key:
    """Arm and tool, told apart by digests and the tool's numbers.

    It holds the arm until that has been asked: a key that is kept must not keep an arm, which may
    have thousands of tools.
    """

    def __init__(self, question: Question) -> None:
        digests, tool = question.meant.read.digests, question.tool.tool_in_flange
        self.asked: Question | None = question
        self._identity = (
            *(digests.table_digest, digests.setup_digest, question.task),
            tool.tobytes(),
        )

    def __hash__(self) -> int:
        return hash(self._identity)

    def __eq__(self, other: object) -> bool:
        return isinstance(other, _Key) and self._identity == other._identity


@lru_cache(maxsize=PREPARED_KEPT)
def _prepared(key: _Key) -> tuple[TaskSpace, Anatomy] | None:
    asked, key.asked = key.asked, None
    assert asked is not None
    arm, tool_in_flange = asked.arm, asked.tool.tool_in_flange
    task = list(asked.task) if isinstance(asked.task, tuple) else asked.task
    assert task is None or isinstance(task, str | list)
    space = task_space(arm, tool_in_flange, task)
    return None if space is None else (space, anatomy_of(arm, space, tool_in_flange))


def meant_tool(arm: Arm, units: Units, asked: str | int | models.Pose | None) -> MeantTool:
    """Return the tool a request means, by name, number, pose, or the arm's default.

    Raises
    ------
    UnknownTool, ToolNotSaid : by name or number.
    ServiceError, KinematicsError : a pose that cannot be used.
    """
    if isinstance(asked, models.Pose):
        tool_in_flange, repaired = read_pose(asked, units, ("tool",))
        shown = asked.model_dump(mode="json", exclude_none=True)
        return MeantTool(shown, tool_in_flange, None, repaired)
    name = arm.tool_name(asked)
    number = arm.tools[name].number if name in arm.tools else None
    return MeantTool(name, arm.tool_in_flange(name), number)


def meant_units(meant: MeantArm, asked: str | None) -> Units:
    """Return the units asked for, or else the arm's own."""
    return meant.read.units if asked is None else UNITS[asked]


def meant_frame(arm: Arm, asked: str | int | None, *, moving: bool = False) -> str:
    """Return the name of the frame asked for; ``moving`` allows flange and tool axes too.

    Raises
    ------
    UnknownFrame
    """
    if asked in (FLANGE, TOOL_AXES):
        if moving:
            return str(asked)
        raise UnknownFrame(
            f"a pose cannot be given in {asked!r}, which moves with the arm",
            where=("frame",),
            value=asked,
            way_out=f"one of: {', '.join(['base', 'world', *arm.frames])}",
        )
    return arm.frame_name(asked)


def question_of(
    arms: Arms[ReadArm], asked: models.PosesRequest, form: str, *, moving: bool = False
) -> Question:
    """Return the question a body asks; the same object for what is asked in the same words."""
    meant = meant_arm(arms, asked.arm)
    task = tuple(asked.task) if isinstance(asked.task, list) else asked.task
    if isinstance(asked.tool, models.Pose) or not meant.is_kept:
        return _question(meant, asked.units, asked.tool, asked.frame, form, task, moving)
    kept = _question_in_words if meant.revision is not None else _question_about_whole
    return kept(meant, asked.units, asked.tool, asked.frame, form, task, moving)


def _question(
    meant: MeantArm,
    units_said: str | None,
    tool_said: str | models.Pose | None,
    frame: str | None,
    form: str,
    task: str | tuple[str, ...] | None,
    moving: bool,
) -> Question:
    units = meant_units(meant, units_said)
    tool = meant_tool(meant.arm, units, tool_said)
    if task is not None:
        # Also where nobody asks for a judgement: a question is refused for what it says.
        rows_of(task)
    return Question(
        meant=meant,
        units=units,
        tool=tool,
        frame=meant_frame(meant.arm, frame, moving=moving),
        form=form,
        task=task,
        repaired=meant.repaired + tool.repaired,
    )


_question_in_words = lru_cache(maxsize=PREPARED_KEPT)(_question)
# These hold arms that nothing else may hold any more.
_question_about_whole = lru_cache(maxsize=models.WHOLE_ARMS_KEPT)(_question)
