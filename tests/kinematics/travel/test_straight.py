"""Straight legs against brute force, and where they break against places known by hand."""

from collections import Counter

import numpy as np
import pytest
from scipy.optimize import least_squares

from kinematics.arm import Arm
from kinematics.chain import tool_in_base
from kinematics.reach.checks import Reacher
from kinematics.reach.targets import ORIENTATION, SPIN, Target
from kinematics.table import Travel
from kinematics.tolerances import TARGET_ANGLE, TARGET_POSITION
from kinematics.transforms import pose
from kinematics.travel.courses import Courses
from kinematics.travel.lines import line_between
from kinematics.travel.moves import (
    BEYOND_TRAVEL,
    OFF_LINE,
    SINGULAR,
    Course,
    Leg,
    Place,
)
from kinematics.travel.straight import OnLines, Run
from kinematics.travel.trails import STALLS, WHOLE
from kinematics.travel_limits import travel_margin
from tests.kinematics.example_arms import FIVE, PLANAR, arm_of, prismatic
from tests.kinematics.inverse.seeds import fresh
from tests.kinematics.reach.arm_classes import postures_within_travel
from tests.kinematics.travel.bounded import (
    FLANGE,
    UPRIGHT,
    along,
    bounded,
    offset_arm,
    parallel_arm,
    selective_arm,
    upright_arm,
)
from tests.kinematics.travel.dense import ARRIVES, ENDS, LEAVES_TRAVEL, BruteForce

USUAL = (TARGET_POSITION, TARGET_ANGLE)
HOW = {WHOLE: ARRIVES, BEYOND_TRAVEL: LEAVES_TRAVEL, STALLS: ENDS, SINGULAR: ENDS}


def share_of(run: Run) -> float:
    return float(run.track.shares[run.many - 1])


def postures_of(lines: OnLines, run: Run) -> np.ndarray:
    return run.track.values[: run.many] * lines.scale


def off_line(lines: OnLines, run: Run) -> float:
    """Return how far the postures of a run are off its line, m and rad, through the chain."""
    tools = tool_in_base(lines.arm, postures_of(lines, run), lines.tool_in_flange)
    shares = run.track.shares[: run.many]
    return max(
        float(np.abs(tool - run.way.at(float(share))).max())
        for tool, share in zip(tools, shares, strict=True)
    )


@pytest.mark.parametrize("make", [offset_arm, upright_arm, parallel_arm])
def test_same_verdict_and_break_as_brute_force(make) -> None:  # noqa: ANN001
    random, arm = fresh(), make()
    lines, brute = OnLines(arm, FLANGE), BruteForce(arm, FLANGE)
    ends = Counter[str]()
    for start, other in postures_within_travel(random, arm, 40).reshape(20, 2, -1):
        goal = start + random.choice([0.15, 0.4, 1.0]) * (other - start)
        way = line_between(*tool_in_base(arm, np.stack([start, goal]), FLANGE))
        run = lines.run(way, start, USUAL)
        dense = brute.follow(way, start, 5e-4)
        assert HOW[run.kind] == dense.how
        assert abs(share_of(run) - dense.share) * max(way.length, way.angle) < 2e-5
        assert off_line(lines, run) < 1e-8
        ends[dense.how] += 1
        if dense.how == ARRIVES:
            assert postures_of(lines, run)[-1] == pytest.approx(dense.joint_values, abs=1e-7)
    assert ends[ARRIVES] >= 3
    assert ends[LEAVES_TRAVEL] >= 3


def test_a_branch_ends_where_the_elbow_is_stretched() -> None:
    """Shoulder at height 0.4, links 0.5 and 0.6, the wrist 0.1 behind the tool."""
    arm = upright_arm()
    start = np.array([0.0, 1.0, -0.7, 0.0, 0.9, 0.0])
    tool = tool_in_base(arm, start, FLANGE)
    wrist = tool[:3, 3] - 0.1 * tool[:3, 2] - [0.0, 0.0, 0.4]
    out = wrist / np.linalg.norm(wrist)
    room = 1.1 - float(np.linalg.norm(wrist))
    run = OnLines(arm, FLANGE).run(along(tool, 2.0 * room * out), start, USUAL)
    assert run.kind == STALLS
    assert share_of(run) * 2.0 * room == pytest.approx(room, abs=1e-6)
    whole = OnLines(arm, FLANGE).run(along(tool, (room - 1e-4) * out), start, USUAL)
    assert whole.kind == WHOLE


def test_a_slide_ends_at_its_limit() -> None:
    arm = selective_arm()
    start = np.array([0.3, 0.8, 0.05, 0.2])
    run = OnLines(arm, FLANGE).run(
        along(tool_in_base(arm, start, FLANGE), [0, 0, -1.0]), start, USUAL
    )
    assert (run.kind, run.limit) == (BEYOND_TRAVEL, 2)
    assert share_of(run) == pytest.approx(0.15, abs=1e-6)


def at_the_wrist() -> tuple[Arm, np.ndarray]:
    """An arm and a tool whose point is the wrist centre: turning it moves the wrist alone."""
    arm = bounded(UPRIGHT, (2.9, 2.2, 3.0, 6.1, 2.0, 6.1))
    return arm, pose(np.eye(3), [0.0, 0.0, -0.1])


def turning(arm: Arm, tool: np.ndarray, start: np.ndarray, angle: float) -> tuple[Run, OnLines]:
    """Turn the tool about the axis that joint 5 has while joint 4 is at 0."""
    lines = OnLines(arm, tool)
    at = tool_in_base(arm, start, tool)
    upright = start.copy()
    upright[3:] = [0.0, 1.0, 0.0]
    turned = upright + angle * np.eye(6)[4]
    tools = tool_in_base(arm, np.stack([upright, turned]), tool)
    end = at.copy()
    end[:3, :3] = tools[1, :3, :3] @ tools[0, :3, :3].T @ at[:3, :3]
    return lines.run(line_between(at, end), start, USUAL), lines


def test_a_wrist_that_lines_up_ends_its_branch_there() -> None:
    arm, tool = at_the_wrist()
    run, _ = turning(arm, tool, np.array([0.4, 0.9, -0.3, 0.0, -0.5, 0.0]), 1.25)
    assert run.kind == SINGULAR
    assert share_of(run) == pytest.approx(0.4, abs=5e-6)


def test_past_a_lined_up_wrist_joint_4_swings_half_around() -> None:
    arm, tool = at_the_wrist()
    start = np.array([0.4, 0.9, -0.3, -0.004, -0.5, 0.0])
    run, lines = turning(arm, tool, start, 1.0)
    assert run.kind == WHOLE
    postures = postures_of(lines, run)
    # Beside the singular posture by 0.5 sin 0.004: the branch is kept, joint 5 turns back.
    assert postures[:, 4].max() == pytest.approx(-0.0019, abs=3e-4)
    assert abs(postures[-1, 3] - postures[0, 3]) == pytest.approx(np.pi, abs=0.02)
    assert np.abs(np.diff(postures, axis=0)).max() < 0.06
    assert off_line(lines, run) < 1e-9


def test_what_would_have_to_swing_at_once_is_singular() -> None:
    """By half a billionth of a radian beside the posture, which counts as singular."""
    arm, tool = at_the_wrist()
    start = np.array([0.4, 0.9, -0.3, 1e-9, -0.5, 0.0])
    run, _ = turning(arm, tool, start, 1.0)
    leg = Leg(Place(target=Target(run.way.at(1.0))))
    broken = Courses(Reacher(arm, tool)).follow(Course(Place(start), (leg,))).broken
    assert broken is not None
    assert (broken.kind, broken.kinds) == (SINGULAR, ("wrist",))
    assert broken.share == pytest.approx(0.5, abs=5e-6)


def test_few_joints_hold_what_they_can_of_a_turn() -> None:
    """A tilt of the tool that four upright joints cannot make uses its tolerance up evenly."""
    arm, start = selective_arm(), np.array([0.3, 0.8, 0.05, 0.2])
    at = tool_in_base(arm, start, FLANGE)
    end = at.copy()
    end[:3, :3] = at[:3, :3] @ pose_turned(0.01)
    end[:3, 3] += [0.02, 0.0, 0.0]
    way = line_between(at, end)
    run = OnLines(arm, FLANGE).run(way, start, (1e-5, 0.004))
    assert run.kind == OFF_LINE
    assert share_of(run) == pytest.approx(0.4, abs=1e-4)
    assert OnLines(arm, FLANGE).run(way, start, (1e-5, 0.0101)).kind == WHOLE
    # Where the orientation is left open nothing is off.
    assert OnLines(arm, FLANGE, ORIENTATION).run(way, start, USUAL).kind == WHOLE


def pose_turned(angle: float) -> np.ndarray:
    """Return a turn about x."""
    c, s = np.cos(angle), np.sin(angle)
    return np.array([[1.0, 0, 0], [0, c, -s], [0, s, c]])


def test_five_joints_miss_a_line_by_the_least_they_can() -> None:
    """Held against a fit by scipy at each posture of the track."""
    random, arm = fresh(), bounded(FIVE, (2.9, 2.2, 2.6, 3.1, 6.0))
    lines = OnLines(arm, FLANGE)
    weights = np.array([1.0] * 3 + [TARGET_POSITION / TARGET_ANGLE] * 3)
    met = Counter[int]()
    for start in postures_within_travel(random, arm, 30):
        at = tool_in_base(arm, start, FLANGE)
        end = at.copy()
        end[:3, 3] += random.normal(scale=0.03, size=3)
        run = lines.run(line_between(at, end), start, (1e-4, 1.0))
        met[run.kind] += 1
        postures, shares = postures_of(lines, run), run.track.shares[: run.many]
        for posture, share in list(zip(postures, shares, strict=True))[1::4]:
            wanted = run.way.at(float(share))

            def gap(q: np.ndarray, wanted: np.ndarray = wanted) -> np.ndarray:
                way = line_between(tool_in_base(arm, q, FLANGE), wanted)
                return weights * np.concatenate([way.shift, way.turn])

            best = least_squares(gap, posture, xtol=1e-15, ftol=1e-15, gtol=1e-15)
            assert np.linalg.norm(gap(posture)) <= np.linalg.norm(best.fun) + 1e-8
    assert met[WHOLE] >= 3


def test_a_free_spin_lets_five_joints_go_straight() -> None:
    random, arm = fresh(), bounded(FIVE, (2.9, 2.2, 2.6, 3.1, 6.0))
    tool = pose(pose_turned(0.5), [0.0, 0.0, 0.1])
    lines, whole = OnLines(arm, tool, SPIN), 0
    for start in postures_within_travel(random, arm, 12):
        at = tool_in_base(arm, start, tool)
        run = lines.run(along(at, random.normal(scale=0.05, size=3)), start, USUAL)
        whole += run.kind == WHOLE
        tools = tool_in_base(arm, postures_of(lines, run), tool)
        assert tools[:, :3, 2] == pytest.approx(np.tile(at[:3, 2], (run.many, 1)), abs=1e-8)
    assert whole >= 4


def test_a_planar_arm_keeps_to_its_plane() -> None:
    arm = bounded(PLANAR, (3.0, 3.0))
    start = np.array([0.5, 1.0])
    at = tool_in_base(arm, start, FLANGE)
    lines = OnLines(arm, FLANGE, ORIENTATION)
    assert lines.run(along(at, [-0.1, 0.05, 0.0]), start, USUAL).kind == WHOLE
    run = lines.run(along(at, [-0.1, 0.0, 0.001]), start, USUAL)
    assert run.kind == OFF_LINE
    assert share_of(run) == pytest.approx(0.01, abs=1e-4)


def on_a_track(reach: float) -> Arm:
    rows = (prismatic(alpha=-np.pi / 2, travel=Travel(-reach, reach)), *offset_arm().table.rows)
    return arm_of(*rows)


def test_a_spare_joint_stays_within_travel_and_on_the_line() -> None:
    random, arm = fresh(), on_a_track(0.5)
    lines, whole = OnLines(arm, FLANGE), 0
    for start in postures_within_travel(random, arm, 25):
        way = along(tool_in_base(arm, start, FLANGE), random.normal(scale=0.15, size=3))
        run = lines.run(way, start, USUAL)
        assert off_line(lines, run) < 1e-8
        assert travel_margin(arm, postures_of(lines, run))[:-1].min(initial=0.0) > -1e-5
        whole += run.kind == WHOLE
    assert whole >= 6


def test_a_track_at_its_end_is_held_and_the_arm_goes_on() -> None:
    arm = on_a_track(0.02)
    start = np.array([0.0, 0.1, 0.7, -1.0, 0.3, 0.8, 0.2])
    at = tool_in_base(arm, start, FLANGE)
    lines = OnLines(arm, FLANGE)
    # The track runs along base z.
    run = lines.run(along(at, [0.0, 0.0, 0.2]), start, USUAL)
    assert run.kind == WHOLE
    track = postures_of(lines, run)[:, 0]
    assert np.abs(track).max() == pytest.approx(0.02, abs=2e-7)
    assert np.abs(np.diff(run.track.shares[: run.many])).min() > 0.0
    assert off_line(lines, run) < 1e-8


def test_a_start_off_the_line_is_told_as_such() -> None:
    arm = selective_arm()
    start = np.array([0.3, 0.8, 0.05, 0.2])
    at = tool_in_base(arm, start, FLANGE)
    at[:3, :3] = at[:3, :3] @ pose_turned(0.5)
    run = OnLines(arm, FLANGE).run(along(at, [0.05, 0.0, 0.0]), start, USUAL)
    assert (run.kind, share_of(run)) == (OFF_LINE, 0.0)


def test_a_line_of_no_length_is_whole() -> None:
    arm, start = selective_arm(), np.array([0.3, 0.8, 0.05, 0.2])
    at = tool_in_base(arm, start, FLANGE)
    run = OnLines(arm, FLANGE).run(line_between(at, at), start, USUAL)
    assert run.kind == WHOLE
    assert postures_of(OnLines(arm, FLANGE), run)[-1] == pytest.approx(start, abs=1e-12)


@pytest.mark.parametrize("spared", [-5e-7, 0.0, 5e-7])
def test_an_excursion_between_two_postures_is_neither_missed_nor_made_up(spared: float) -> None:
    """Past the base joint 2 bends most where the line is nearest: by the law of cosines."""
    nearest = 0.35
    bend = np.arccos((nearest**2 - 0.42**2 - 0.31**2) / (2 * 0.42 * 0.31))
    arm = bounded(PLANAR, (3.0, float(bend) + spared))
    lines = OnLines(arm, FLANGE, ORIENTATION)
    end = [nearest, 0.3, 0.0]
    way = line_between(pose(np.eye(3), [nearest, -0.4, 0.0]), pose(np.eye(3), end))
    far = np.hypot(nearest, 0.4)
    elbow = np.arccos((far**2 - 0.42**2 - 0.31**2) / (2 * 0.42 * 0.31))
    turned = np.arctan2(-0.4, nearest) - np.arctan2(
        0.31 * np.sin(elbow), 0.42 + 0.31 * np.cos(elbow)
    )
    run = lines.run(way, np.array([turned, elbow]), USUAL)
    if spared < 0.0:
        assert run.kind == BEYOND_TRAVEL
        # So little is exceeded within some 0.3 mm of the nearest place.
        assert share_of(run) == pytest.approx(0.4 / 0.7, abs=1e-3)
        assert share_of(run) < 0.4 / 0.7
    else:
        assert run.kind == WHOLE
