"""Flat answers about one target: keys in the contract's order, within a controller's bounds."""

import json
from typing import Any

import pytest

from service.errors import NumberDoesNotFit, UnusableValue
from service.problems import problem_of
from service.wire.fixed_text import places
from service.wire.one_answer import Stamp
from service.wire.reach_flat import (
    BEGIN,
    END,
    WIDTHS,
    ReachAnswer,
    flat_reach,
    nested_reach,
    refused_reach,
)
from service.wire.reach_lines import joint_keys

STAMP: Stamp = {"seq": 9_999_999_999, "tag": 9_999_999_999, "t_ms": 1_796_145_917_630}
HEAD = {
    "arm": {"name": "n" * 32, "revision": 999_999, "digest": "e994bb33"},
    "units": "mm-deg",
    "frame": "f" * 32,
    "tool": "t" * 32,
}
KEYS = "ok code flags seq tag t_ms verdict solutions {} margin state units revision digest"


def answer(joints: list[float] | None, **changes: Any) -> ReachAnswer:
    told = ReachAnswer(
        head=HEAD,
        item={"name": None, "ok": joints is not None},
        code=0,
        verdict="reachable",
        found=8,
        joints=joints,
        joint_count=8 if joints is None else len(joints),
        margin=0.25,
        state="regular",
        codes=frozenset(),
    )
    return told._replace(**changes)


WORST = answer(
    [-123456.789012345] * 8,
    code=113,
    verdict="outside-travel",
    found=123_456,
    margin=0.2850467289719625,
    state="singular",
    codes=frozenset({1, 2, 3, 4, 5, 6}),
)


@pytest.mark.parametrize("joints", [1, 6, 8])
def test_the_keys_stand_in_the_contract_s_order(joints: int) -> None:
    wanted = KEYS.format(" ".join(joint_keys(joints))).split()
    for told in (answer([1.5] * joints), answer([1.5] * joints, code=3)):
        flat = json.loads(flat_reach(told, "flat", STAMP, None).body)
        assert list(flat) == wanted
        csv = flat_reach(told, "csv", STAMP, None).body.decode("ascii").split("\r\n")
        assert csv[0].split(",") == wanted
        assert len(csv[1].split(",")) == len(wanted)
    problem = problem_of(UnusableValue("no", where=("x",)))
    assert list(json.loads(refused_reach(problem, "flat", STAMP, joints).body)) == wanted
    assert (*BEGIN, *joint_keys(joints), *END) == tuple(wanted)


def test_eight_joints_stay_within_the_bounds() -> None:
    line = flat_reach(WORST, "txt", STAMP, None).body
    assert len(line) <= 254
    assert len(flat_reach(WORST, "flat", STAMP, None).body) <= 1000
    assert len(flat_reach(WORST, "txt", STAMP, 1).body) == len(line)


def test_every_line_has_the_same_length() -> None:
    there = flat_reach(answer([1.0] * 8), "txt", STAMP, None).body
    no = answer(None, code=200, verdict="unreachable", found=0)
    nowhere = flat_reach(no, "txt", STAMP, None).body
    refused = refused_reach(problem_of(UnusableValue("no")), "txt", STAMP, 8).body
    assert len(there) == len(nowhere) == len(refused)
    at = places((*BEGIN, *joint_keys(8), *END), WIDTHS)
    for line, verdict in ((there, b"reachable"), (nowhere, b"unreachable"), (refused, b"")):
        for first, width in at.values():
            assert line[first - 1 + width : first + width] in (b";", b"\r")
        first, width = at["verdict"]
        assert line[first - 1 : first - 1 + width].rstrip() == verdict


def test_a_no_has_no_numbers_and_keeps_what_is_known() -> None:
    no = answer(None, code=201, verdict="outside-travel", found=2)
    for scale in (None, 1000):
        told = json.loads(flat_reach(no, "flat", STAMP, scale).body)
        assert (told["ok"], told["code"], told["flags"]) == (0, 201, 0)
        assert {told[key] for key in (*joint_keys(8), "margin")} == {-999999.9999}
        assert (told["units"], told["digest"], told["state"]) == ("mm-deg", "e994bb33", "")


def test_flags_scale_and_no_limits() -> None:
    told = answer([1.5, -2.0], margin=float("inf"), codes=frozenset({1, 3}), code=3)
    flat = json.loads(flat_reach(told, "flat", STAMP, None).body)
    assert (flat["ok"], flat["code"], flat["flags"], flat["margin"]) == (1, 3, 5, 9.9999)
    scaled = json.loads(flat_reach(told, "flat", STAMP, 1000).body)
    assert (scaled["q1"], scaled["q2"]) == (1500, -2000)
    assert type(scaled["q1"]) is int


def test_a_joint_value_that_does_not_fit_is_refused() -> None:
    with pytest.raises(NumberDoesNotFit, match="q2"):
        flat_reach(answer([0.0, 1_234_567.0]), "txt", STAMP, None)


def test_the_nested_answer_begins_alike() -> None:
    told = json.loads(nested_reach(answer([1.5]), STAMP, None).body)
    assert list(told)[:5] == ["ok", "code", "seq", "tag", "t_ms"]
    assert told["results"] == [{"name": None, "ok": True}]
