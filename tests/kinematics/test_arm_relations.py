"""An arm told as relations leads to the poses of the chain; names, links, the cell's frames."""

import numpy as np
import pytest

from kinematics.arm import Arm, NamedFrame, Tool
from kinematics.arm_relations import ArmAtJoints
from kinematics.chain import tool_in_base, walk
from kinematics.errors import UnknownFrame
from kinematics.frames import FrameGraph
from kinematics.in_cell import InCell
from kinematics.table import Convention, JointKind, Row, Table
from kinematics.transforms import inverse, pose
from tests.kinematics.networks import random_network

POSES = random_network(5, 4, seed=1).frame_in_hall
ROWS = (
    Row(JointKind.REVOLUTE, 0.4, 0.3, 0.1, 0.2),
    Row(JointKind.PRISMATIC, 0.1, -1.2, 0.3, 0.4),
    Row(JointKind.REVOLUTE, 0.2, 0.7, 0.0, 0.0, passive=True),
    Row(JointKind.REVOLUTE, 0.0, 0.1, 0.2, -0.3, direction=-1),
)
JOINTS = np.array([0.3, 0.25, -1.1])


def arm_of(convention: Convention, cell: InCell | None = None) -> Arm:
    return Arm(
        "lifter",
        Table(convention, ROWS),
        base_in_world=POSES[0],
        tools={"hook": Tool(POSES[1])},
        frames={
            "bench": NamedFrame(POSES[2]),
            "vice": NamedFrame(POSES[3], "bench"),
            "tray": NamedFrame(POSES[4], "base"),
        },
        cell=cell,
    )


@pytest.mark.parametrize("convention", Convention)
def test_relations_lead_to_the_poses_of_the_chain(convention: Convention) -> None:
    arm = arm_of(convention)
    at = ArmAtJoints(arm, JOINTS)
    links = list(at.links)
    assert links == ["link-0", "link-1", "link-2", "link-3", "link-4"]
    told = at.relations(links)
    graph = FrameGraph(
        *([part[k] for part in told] for k in (0, 1)), np.array([t[2] for t in told])
    )
    assert len(graph.loops) == 0
    hook_in_world = POSES[0] @ tool_in_base(arm, JOINTS, POSES[1])
    vice_in_world = POSES[2] @ POSES[3]
    ways = graph.ways(["lifter.hook", "lifter.vice"], ["lifter.vice", "lifter.tray"])
    expected = [
        inverse(vice_in_world) @ hook_in_world,
        inverse(POSES[0] @ POSES[4]) @ vice_in_world,
    ]
    np.testing.assert_allclose(ways.poses, expected, rtol=0, atol=1e-13)
    in_base = graph.ways([f"lifter.{link}" for link in links], ["lifter.base"] * 5).poses
    np.testing.assert_allclose(in_base, walk(arm, JOINTS).link_in_base, rtol=0, atol=1e-15)


def test_without_joint_values_the_flange_hangs_on_nothing() -> None:
    told = ArmAtJoints(arm_of(Convention.STANDARD), None).relations(["link-1"])
    assert [(of, within) for of, within, _ in told] == [
        ("lifter.base", "world"),
        ("lifter.hook", "lifter.flange"),
        ("lifter.bench", "world"),
        ("lifter.vice", "lifter.bench"),
        ("lifter.tray", "lifter.base"),
    ]


def test_frames_of_the_cell_are_called_as_the_cell_calls_them() -> None:
    cell = InCell("hall", 1, "", True, frozenset({"bench"}), {"eye": "it moves", 7: "it moves"})
    at = ArmAtJoints(arm_of(Convention.STANDARD, cell), JOINTS)
    names = ["bench", "eye", "world", "tray", "hook", "base", "link-2"]
    whole = ["bench", "eye", "world", "lifter.tray", "lifter.hook", "lifter.base", "lifter.link-2"]
    assert [at.node(name) for name in names] == whole
    told = [(of, within) for of, within, _ in at.relations(with_base=False)]
    assert told == [
        ("lifter.flange", "lifter.base"),
        ("lifter.hook", "lifter.flange"),
        ("lifter.vice", "bench"),
        ("lifter.tray", "lifter.base"),
    ]


@pytest.mark.parametrize(
    ("name", "way_out"),
    [("hok", 'did you mean "hook"?'), ("link-5", 'did you mean "link-4"?'), ("7", "known here: ")],
)
def test_unknown_frames(name: str, way_out: str) -> None:
    with pytest.raises(UnknownFrame, match="lifter has no frame") as caught:
        ArmAtJoints(arm_of(Convention.STANDARD), None).node(name)
    assert caught.value.way_out.startswith(way_out)


def test_an_arm_without_joints() -> None:
    stand = Arm(
        "stand", Table(Convention.MODIFIED, ()), tools={"pin": Tool(pose(np.eye(3), [0, 0, 1]))}
    )
    told = ArmAtJoints(stand, np.empty(0)).relations(["link-0"])
    assert [(of, within) for of, within, _ in told] == [
        ("stand.base", "world"),
        ("stand.flange", "stand.base"),
        ("stand.link-0", "stand.base"),
        ("stand.pin", "stand.flange"),
    ]
