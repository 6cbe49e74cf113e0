"""All 29 cases of data/singularity.json: numbers, lost directions, null motions, kinds, warnings.

The cases' singular values mix metres and radians as they stand: a characteristic length of 1 m.
Their bases are all the world, so that base axes are the axes of their directions.
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import pytest

from kinematics.arm import Arm, SingularityThresholds
from kinematics.jacobian import ROW_NAMES, Motion, motion_of
from kinematics.lost_motion import PostureSingularity, describe
from kinematics.singular_kinds import anatomy_of
from kinematics.singularity import Judgement, judge
from kinematics.table import Convention
from kinematics.table_conversion import converted
from kinematics.task_space import TaskSpace, task_space
from tests.published.cases import (
    Case,
    arm_and_joint_values,
    assert_same_span,
    assert_within,
    cases_of,
    entries_of,
)

CASES = cases_of("singularity")
EACH = pytest.mark.parametrize("case", CASES.values(), ids=CASES)

# What the cases' words are on the wire; a "near" before them is our state.
KINDS = {
    "wrist": "wrist",
    "elbow": "elbow",
    "shoulder": "shoulder",
    "outer boundary": "boundary",
    "inner boundary": "boundary",
    "all links aligned": "alignment",
}


def named(*entries: str) -> list[str]:
    """Return the cases that expect all of these entries."""
    return [name for name, case in CASES.items() if set(entries) <= set(case["expected"])]


def test_every_case_and_every_entry_has_its_test() -> None:
    assert list(CASES) == [f"sing-{number:02d}" for number in range(1, 30)]
    assert entries_of(CASES) == {
        *("task_rows", "row_names", "singular_values", "sigma_min", "singular", "rank"),
        *("full_rank", "condition_number", "lost_directions", "lost_direction_text"),
        *("joint_motions_without_task_motion", "weakest_joint_motion", "joints_in_null_motion"),
        *("kind", "primary_joints", "must_warn"),
    }
    counts = {entry: len(named(entry)) for entry in entries_of(CASES)}
    assert counts["lost_directions"] == 22
    assert counts["joint_motions_without_task_motion"] == 19
    assert counts["weakest_joint_motion"] == 3
    assert counts["joints_in_null_motion"] == 16
    assert counts["kind"] == counts["primary_joints"] == 23
    assert counts["must_warn"] == 9
    assert counts["condition_number"] == 10
    assert counts["lost_direction_text"] == len(GEOMETRY) + 1 == 12
    for case in CASES.values():
        assert case["input"]["arm"]["base"] is None
        assert case["expected"]["task_rows"] == case["input"]["task_rows"]


@dataclass(frozen=True)
class Told:
    arm: Arm
    space: TaskSpace
    motion: Motion
    judgement: Judgement
    posture: PostureSingularity


def told_of(arm: Arm, joint_values: np.ndarray, case: Case) -> Told:
    tool = arm.tool_in_flange(None)
    space = task_space(arm, tool, [ROW_NAMES[row] for row in case["input"]["task_rows"]])
    assert space is not None
    anatomy = anatomy_of(arm, space, tool)
    motion = motion_of(arm, joint_values, tool)
    judgement = judge(arm, space, motion)
    posture = describe(
        arm, space, anatomy, joint_values, tool, motion, judgement, np.eye(3), "base"
    )
    return Told(arm, space, motion, judgement, posture)


# sing-22 is called near at 0.016 and leaves open whether that is worth a warning: what is said of
# near postures is asked with this threshold, and warnings with the package's own.
WIDE = SingularityThresholds(near=0.02)


def told(case: Case, length: float | None = 1.0, thresholds: SingularityThresholds = WIDE) -> Told:
    arm, joint_values = arm_and_joint_values(
        case, characteristic_length=length, thresholds=thresholds
    )
    return told_of(arm, joint_values, case)


def lost_of(answer: Told) -> np.ndarray:
    return np.array([np.append(lost.linear, lost.angular) for lost in answer.posture.lost_motion])


@EACH
def test_singular_values_rank_and_condition(case: Case) -> None:
    expected, tolerance = case["expected"], case["tolerance"]
    answer = told(case)
    assert [ROW_NAMES[row] for row in answer.space.rows] == expected["row_names"]
    assert answer.space.generic_rank == expected["full_rank"]
    values = answer.judgement.values
    assert_within(tolerance["abs_singular_values"], values, expected["singular_values"])
    assert_within(
        tolerance["abs_singular_values"], answer.judgement.smallest, expected["sigma_min"]
    )
    assert int(answer.judgement.rank) == expected["rank"]
    assert (answer.posture.state == "singular") is expected["singular"]
    if expected["singular"]:
        assert np.isinf(answer.judgement.condition)
    else:
        assert answer.judgement.smallest == pytest.approx(
            expected["sigma_min"], rel=tolerance["rel_sigma_min"], abs=0.0
        )
    if "condition_number" in expected:
        assert answer.judgement.condition == pytest.approx(
            expected["condition_number"], rel=tolerance["rel_sigma_min"], abs=0.0
        )


@pytest.mark.parametrize("name", named("lost_directions"))
def test_lost_directions_span_the_same_space(name: str) -> None:
    case = CASES[name]
    expected = case["expected"]["lost_directions"]
    lost = lost_of(told(case))
    rows = case["input"]["task_rows"]
    assert_same_span(case["tolerance"]["abs_direction"], lost[:, rows], expected)
    assert not np.delete(lost, rows, axis=1).any()
    assert_within(1e-15, np.linalg.norm(lost, axis=1), np.ones(len(lost)))


@pytest.mark.parametrize("name", named("joint_motions_without_task_motion"))
def test_null_motions_span_the_same_space(name: str) -> None:
    case = CASES[name]
    judgement = told(case).judgement
    null = np.hstack([judgement.right[:, int(judgement.rank) :], judgement.rest])
    expected = case["expected"]["joint_motions_without_task_motion"]
    assert_same_span(case["tolerance"]["abs_direction"], null.T, expected)


@pytest.mark.parametrize("name", named("weakest_joint_motion"))
def test_the_weakest_joint_motion(name: str) -> None:
    case = CASES[name]
    weakest = told(case).judgement.right[:, -1:].T
    expected = case["expected"]["weakest_joint_motion"]
    assert_same_span(case["tolerance"]["abs_direction"], weakest, expected)


@pytest.mark.parametrize("name", named("joints_in_null_motion"))
def test_joints_in_null_motion(name: str) -> None:
    expected = CASES[name]["expected"]["joints_in_null_motion"]
    assert list(told(CASES[name]).posture.joints) == expected


@pytest.mark.parametrize("name", named("primary_joints"))
def test_the_textbook_joints_are_among_those_named(name: str) -> None:
    """Textbooks name the joint that makes the posture, we name all that move and move nothing."""
    primary = CASES[name]["expected"]["primary_joints"]
    assert primary
    assert set(primary) <= set(told(CASES[name]).posture.joints)


@EACH
@pytest.mark.parametrize("length", [1.0, None], ids=["1 m", "own length"])
@pytest.mark.parametrize("as_", ["written", "converted"])
def test_kinds_exactly(case: Case, length: float | None, as_: str) -> None:
    """The kind is the arm's geometry: no scale and no way of writing the table changes it."""
    arm, joint_values = arm_and_joint_values(case, characteristic_length=length, thresholds=WIDE)
    if as_ == "converted":
        written_standard = arm.table.convention is Convention.STANDARD
        arm = converted(arm, Convention.MODIFIED if written_standard else Convention.STANDARD)
    posture = told_of(arm, joint_values, case).posture
    words = case["expected"].get("kind", [])
    kinds = {KINDS[word.removeprefix("near ")] for word in words}
    assert set(posture.kinds) == kinds
    assert len(posture.kinds) == len(kinds)
    near = bool(words) and all(word.startswith("near ") for word in words)
    singular = case["expected"]["singular"]
    assert posture.state == ("singular" if singular else "near" if near else "regular")


@pytest.mark.parametrize("length", [1.0, None], ids=["1 m", "own length"])
@pytest.mark.parametrize("name", named("must_warn"))
def test_warnings_where_any_threshold_would_warn(name: str, length: float | None) -> None:
    posture = told(CASES[name], length, SingularityThresholds()).posture
    assert (posture.state != "regular") is CASES[name]["expected"]["must_warn"]
    codes = [finding.code for finding in posture.findings]
    assert codes == ([1] if CASES[name]["expected"]["must_warn"] else [])


Lines = Callable[[Motion], np.ndarray]


def out_from(row: int, axis_row: int | None = None) -> Lines:
    """The line from a row's axis to the tool point; seen along an axis where one is given."""

    def line(motion: Motion) -> np.ndarray:
        out = motion.tool_in_base[:3, 3] - motion.axis_point[row]
        if axis_row is not None:
            axis = motion.axis_direction[axis_row]
            out = out - axis * (axis @ out)
        return out[None]

    return line


def along_axes(*rows: int) -> Lines:
    return lambda motion: motion.axis_direction[list(rows)]


def across(first: int, second: int) -> Lines:
    return lambda motion: np.cross(*motion.axis_direction[[first, second]])[None]


# The texts of the cases as lines of the arm, rows from 0: (text, moves or turns, lines).
GEOMETRY = {
    "sing-01": ("translation along the arm line (radial)", "move", out_from(0)),
    "sing-02": ("translation along the arm line (radial)", "move", out_from(0)),
    "sing-05": ("translation along the line of the links", "move", out_from(0)),
    "sing-06": ("translation along the line from shoulder to tip", "move", out_from(1)),
    "sing-07": ("translation normal to the plane of the arm", "move", along_axes(1)),
    "sing-08": (
        "vertical translation and translation normal to the arm plane",
        "move",
        along_axes(0, 1),
    ),
    "sing-09": (
        "with the wrist centre held, rotation about the axis normal to axes 4 and 5 is lost",
        "turn",
        across(3, 4),
    ),
    "sing-11": (
        "translation of the wrist centre along the shoulder-wrist line",
        "move",
        out_from(1),
    ),
    "sing-12": ("translation of the wrist centre normal to the arm plane", "move", along_axes(1)),
    "sing-17": ("horizontal translation along the arm line", "move", out_from(0, axis_row=0)),
    "sing-18": ("horizontal translation normal to the arm", "move", across(0, 2)),
}


@pytest.mark.parametrize("name", GEOMETRY)
def test_the_text_of_the_lost_direction(name: str) -> None:
    case = CASES[name]
    text, verb, lines = GEOMETRY[name]
    assert case["expected"]["lost_direction_text"] == text
    answer = told(case)
    lost = lost_of(answer)
    part = lost[:, 3:] if verb == "turn" else lost[:, :3]
    assert_same_span(case["tolerance"]["abs_direction"], part, lines(answer.motion))
    for told_one in answer.posture.lost_motion:
        if verb == "turn":
            assert told_one.say.startswith("the tool cannot turn about base direction")
            assert "without moving along" in told_one.say
        else:
            assert told_one.say.startswith("the tool cannot move along base ")
    says = {told_one.say for told_one in answer.posture.lost_motion}
    assert len(says) == len(lost)
    if "vertical" in text:
        assert "the tool cannot move along base z" in says


def test_the_text_of_sing_15_holds_with_joint_1_held() -> None:
    """With the shoulder offset joint 1 moves along that line too: the text is for the others.

    The direction in the case's own numbers leans out of the arm plane for that reason.
    """
    case = CASES["sing-15"]
    text = "translation of the wrist centre along the shoulder-wrist line, within the arm plane"
    assert case["expected"]["lost_direction_text"] == text
    answer = told(case)
    (line,) = out_from(1, axis_row=1)(answer.motion)
    line /= np.linalg.norm(line)
    moved = line @ answer.motion.of_joints[:3]
    assert_within(case["tolerance"]["abs_direction"], moved[1:], np.zeros(5))
    assert abs(moved[0]) > 0.09  # the offset of 0.12 m, times the cosine of the line's rise
    (lost,) = answer.posture.lost_motion
    assert lost.say.startswith("the tool cannot move along base direction")


def test_travel_to_names_joint_5_near_the_wrist_singularity() -> None:
    """q5 = 0 is singular for any other joints, and q5 stands in the cases."""
    for name, away in (("sing-20", 1e-3), ("sing-21", 1e-6), ("sing-22", 0.05)):
        assert CASES[name]["input"]["q"][4] == away
        answer = told(CASES[name]).posture.travel_to
        assert answer is not None
        joint, value, unit = answer
        assert (joint, unit) == (5, "rad")
        # To first order: the smallest singular value is about proportional to sin q5.
        assert value == pytest.approx(-away, rel=max(away, 1e-6))
