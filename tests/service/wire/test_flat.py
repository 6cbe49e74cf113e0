"""Flat answers: order of keys, flags, limits, and the same keys when there is no answer."""

from typing import Any

import pytest

from service.wire.flat import (
    FLAGS,
    JACOBIAN_DECIMALS,
    NO_ENTRY,
    NO_NUMBER,
    flat_jacobian,
    flat_jacobian_refusal,
    flat_pose,
    flat_pose_refusal,
    jacobian_keys,
)
from service.wire.single import SingleAnswer

STAMP = {"seq": 1, "tag": 2, "t_ms": 3}
REGULAR = {"state": "regular", "condition_number": 3.5}
ORIENTATION = {"form": "xyz-fixed", "values": [4.0, 5.0, 6.0]}


def answer(margin: float = 0.25, codes: Any = (), **item: Any) -> SingleAnswer:
    return SingleAnswer(
        head={"arm": {"revision": 7, "digest": "0af70af7"}, "units": "mm-deg"},
        item={"code": 0, "singularity": REGULAR, **item},
        margin=margin,
        tool_number=8,
        frame_number=9,
        codes=frozenset(codes),
    )


def pose(**changes: Any) -> dict[str, Any]:
    given = answer(position=[1.0, 2.0, 3.0], orientation=ORIENTATION, **changes)
    return flat_pose(given, form="xyz-fixed", **STAMP)


def jacobian(joints: int, entry: float = 1.0) -> dict[str, Any]:
    return flat_jacobian(answer(matrix=[[entry] * joints] * 6), **STAMP)


def test_a_pose() -> None:
    expected = {
        "ok": 1, "code": 0, "flags": 0, "seq": 1, "tag": 2, "t_ms": 3,
        "x": 1.0, "y": 2.0, "z": 3.0, "r1": 4.0, "r2": 5.0, "r3": 6.0, "form": "xyz-fixed",
        "units": "mm-deg", "tool_no": 8, "frame_no": 9, "state": "regular", "condition": 3.5,
        "margin": 0.25, "revision": 7, "digest": "0af70af7",
    }  # fmt: skip
    assert list(pose().items()) == list(expected.items())


def test_a_refusal_has_the_same_keys_in_the_same_order() -> None:
    assert list(flat_pose_refusal(104, **STAMP)) == list(pose())
    for joints in range(10):
        refusal = flat_jacobian_refusal(104, joints, **STAMP)
        assert list(refusal) == list(jacobian(joints))
        assert {refusal[key] for key in jacobian_keys(joints)} <= {NO_ENTRY}
    refusal = flat_pose_refusal(104, **STAMP)
    assert (refusal["ok"], refusal["code"], refusal["flags"]) == (0, 104, 0)
    gone = [key for key, value in refusal.items() if value == NO_NUMBER]
    assert gone == ["x", "y", "z", "r1", "r2", "r3", "condition", "margin"]
    kinds = {key: type(value) for key, value in pose().items()}
    assert {key: type(value) for key, value in refusal.items()} == kinds


def test_entries_of_a_jacobian_stand_by_rows() -> None:
    matrix = [[10.0 * row + column for column in (1, 2, 3)] for row in range(1, 7)]
    told = flat_jacobian(answer(matrix=matrix), **STAMP)
    assert [key for key in told if key[0] == "j"] == list(jacobian_keys(3))
    assert jacobian_keys(3)[:4] == ("j11", "j12", "j13", "j21")
    assert all(told[f"j{entry:.0f}"] == entry for row in matrix for entry in row)


@pytest.mark.parametrize("joints", range(1, 12))
def test_entries_keep_as_many_decimals_as_fit(joints: int) -> None:
    decimals = JACOBIAN_DECIMALS[min(joints, 8)]
    told = jacobian(joints, 1 / 3)
    assert told["j11"] == round(1 / 3, decimals)
    assert decimals >= 6


def test_no_entry_is_minus_zero() -> None:
    assert str(jacobian(2, -1e-17)["j11"]) == "0.0"


def test_flags_add_up() -> None:
    assert FLAGS == {1: 1, 2: 2, 3: 4, 4: 8, 5: 16, 6: 32, 7: 64, 8: 128}
    assert pose(codes=[0, 1, 3, 6])["flags"] == 1 + 4 + 32
    assert pose(codes=range(9))["flags"] == 255


def test_limits() -> None:
    assert pose(margin=float("inf"))["margin"] == 9.9999
    assert pose(margin=-0.5)["margin"] == -0.5
    for condition, shown in [(None, 999999.9), (1e12, 999999.9), (12.5, 12.5)]:
        told = {"state": "singular", "condition_number": condition}
        assert pose(singularity=told)["condition"] == shown


def test_an_arm_without_joints_has_no_state() -> None:
    told = pose(singularity=None, margin=float("inf"))
    assert (told["state"], told["condition"]) == ("none", 0.0)
