"""Lines about many targets: the keys of a flat answer first, texts in quotes where needed."""

import csv
import io
from dataclasses import replace

import numpy as np

from service.wire.reach_flat import BEGIN, END
from service.wire.reach_lines import (
    ReachColumns,
    SameInAll,
    Texts,
    joint_keys,
    reach_head,
    reach_lines,
)

SAME = SameInAll(7, 5, 1_796_145_917_630, "mm-deg", 3, "e994bb33")


PLACES = np.array([[1.25, -0.0, 300.1], [9e5, 0.0, 0.0], [np.nan] * 3])


def columns() -> ReachColumns:
    return ReachColumns(
        codes=np.array([3, 200, 105]),
        applying={1: np.array([True, False, False]), 3: np.array([True, False, False])},
        verdicts=Texts(("reachable", "unreachable"), np.array([0, 1, -1])),
        counts=np.array([2, 0, 0]),
        joints=np.array([[1.5, -0.0], [np.nan, np.nan], [np.nan, np.nan]]),
        margins=np.array([np.inf, np.nan, np.nan]),
        states=Texts(("near",), np.array([0, -1, -1])),
        ranks=np.array([1, 0, 0]),
        proofs=Texts(("witness", "bound"), np.array([0, 1, -1])),
        branches=Texts(("wrist ahead of axis 1, elbow above",), np.array([0, -1, -1])),
        errors=np.array([[1e-9, 0.0], [np.nan, np.nan], [np.nan, np.nan]]),
        reasons={1: "31 mm too far", 2: '"x" must be a number'},
        names={0: "lug-1", 1: "lug, second", 2: 'the "third"'},
    )


def test_the_head_begins_with_the_keys_of_a_flat_answer() -> None:
    keys = reach_head(6).decode("ascii").rstrip("\r\n").split(",")
    flat = [*BEGIN, *joint_keys(6), *END]
    assert keys[: len(flat)] == flat
    assert keys[len(flat) :] == [
        *("solution", "proof", "branch", "position_error", "angle_error", "reason", "name"),
        *("x", "y", "z"),
    ]


def test_lines_can_be_read_back() -> None:
    text = (reach_head(2) + reach_lines(columns(), PLACES, SAME)).decode("utf-8")
    assert text.count("\r\n") == 4
    one, two, three = csv.DictReader(io.StringIO(text, newline=""))
    assert (one["ok"], one["code"], one["flags"]) == ("1", "3", "5")
    assert (one["q1"], one["q2"], one["margin"], one["state"]) == ("1.5", "0.0", "9.9999", "near")
    assert (one["branch"], one["name"]) == ("wrist ahead of axis 1, elbow above", "lug-1")
    assert (one["solution"], one["solutions"]) == ("1", "2")
    assert (two["ok"], two["code"], two["verdict"]) == ("0", "200", "unreachable")
    no_number = {two[key] for key in ("q1", "q2", "margin", "position_error", "angle_error")}
    assert no_number == {"-999999.9999"}
    assert (two["reason"], two["name"]) == ("31 mm too far", "lug, second")
    assert (three["reason"], three["name"]) == ('"x" must be a number', 'the "third"')
    # A no has no numbers, but for those that were asked about.
    assert [one[key] for key in "xyz"] == ["1.25", "0.0", "300.1"]
    assert [two[key] for key in "xyz"] == ["900000.0", "0.0", "0.0"]
    assert [three[key] for key in "xyz"] == ["", "", ""]
    assert {line["digest"] for line in (one, two, three)} == {"e994bb33"}


def test_each_line_has_the_place_of_its_target() -> None:
    # The first target's two postures, then a target without one.
    several = replace(columns(), ranks=np.array([1, 2, 0]))
    assert several.targets.tolist() == [0, 0, 1]
    text = (reach_head(2) + reach_lines(several, PLACES[:2], SAME)).decode("utf-8")
    assert [line["x"] for line in csv.DictReader(io.StringIO(text))] == ["1.25", "1.25", "900000.0"]


def test_none_are_none() -> None:
    numbers, whole = np.empty(0), np.empty(0, dtype=np.int64)
    texts = Texts((), whole)
    empty = ReachColumns(
        whole, {}, texts, whole, np.empty((0, 2)), numbers, texts, whole, texts, texts,
        np.empty((0, 2)), {}, {},
    )  # fmt: skip
    assert reach_lines(empty, np.empty((0, 3)), SAME) == b""
