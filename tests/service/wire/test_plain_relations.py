"""Relations read at once give what reading each by itself gives, and leave the rest to that."""

import copy
import json
from typing import Any

import numpy as np
import pytest
from pydantic import ValidationError

from kinematics.errors import KinematicsError
from kinematics.orientation_forms import FORMS, values_of
from service.convert import UNITS, orientation_out
from service.errors import DuplicateKey, ServiceError, TooLarge, Unparseable
from service.wire.frames import FramesBody, _one_by_one
from service.wire.frames_request import FramesRequest
from service.wire.plain_relations import plain_of, plain_relations
from tests.kinematics.networks import random_network

NETWORK = random_network(30, 60, seed=11)
MM = UNITS["mm-deg"]
Body = dict[str, Any]


def relation(number: int, form: str) -> Body:
    of_in = NETWORK.of_in[number]
    pose: Body
    if form == "whole":
        moved = of_in.copy()
        moved[:3, 3] *= 1000.0
        pose = {"matrix": moved.tolist()}
    else:
        values = orientation_out(MM, form, of_in[:3, :3]).tolist()
        position = (1000.0 * of_in[:3, 3]).tolist()
        pose = {"position": position, "orientation": {"form": form, "values": values}}
    found = {"of": f"f{NETWORK.outer[number]}", "in": f"f{NETWORK.inner[number]}", "pose": pose}
    if number % 3 == 0:
        found["position_sd"] = 0.5 + number
    if number % 4 == 0:
        found["angle_sd"] = None if number % 8 else 2
    return found


def body_of(*forms: str) -> Body:
    return {
        "relations": [relation(k, forms[k % len(forms)]) for k in range(60)],
        "units": "mm-deg",
        "find": [{"of": "f1", "in": "f2"}],
    }


def raw(body: object, **how: Any) -> bytes:
    return json.dumps(body, **how).encode()


@pytest.mark.parametrize("forms", [*((form,) for form in FORMS), ("whole",), ("whole", *FORMS)])
def test_at_once_is_as_one_by_one(forms: tuple[str, ...]) -> None:
    body = body_of(*forms)
    plain = plain_of(body)
    assert plain is not None
    together = plain_relations(plain, MM)
    assert together is not None
    alone = _one_by_one(FramesRequest.model_validate(body).relations, MM)
    assert (together.of, together.within) == (alone.of, alone.within)
    np.testing.assert_allclose(together.of_in, alone.of_in, rtol=0, atol=2e-15)
    assert np.array_equal(together.position_sd, alone.position_sd)
    assert np.array_equal(together.angle_sd, alone.angle_sd)
    assert together.repaired == alone.repaired == []
    assert set(together.position_sd[1:3]) == {1e-3}
    assert together.position_sd[3] == 3.5e-3
    assert together.angle_sd[8] == np.deg2rad(2)


def test_repairs_are_told_the_same_and_counted_beyond_twenty() -> None:
    body = body_of("quaternion-wxyz", "matrix", "xyz-fixed")
    for k in (3, 4, 30):
        values = body["relations"][k]["pose"]["orientation"]["values"]
        rounded = np.round(np.array(values), 3)
        body["relations"][k]["pose"]["orientation"]["values"] = rounded.tolist()
    plain = plain_of(body)
    assert plain is not None
    together = plain_relations(plain, MM)
    alone = _one_by_one(FramesRequest.model_validate(body).relations, MM)
    assert together is not None
    assert [(k, f.text()) for k, f in together.repaired] == [
        (k, f.text()) for k, f in alone.repaired
    ]
    assert [k for k, _ in together.repaired] == [3, 4, 30]
    assert together.more_repaired == 0
    for given in body["relations"]:
        given["pose"]["orientation"] = {"form": "quaternion-wxyz", "values": [0.7, 0.7, 0, 0]}
    plain = plain_of(body)
    assert plain is not None
    together = plain_relations(plain, MM)
    assert together is not None
    assert [k for k, _ in together.repaired] == list(range(20))
    assert together.more_repaired == 40


def changed(where: tuple[Any, ...], value: object) -> Body:
    """Return a body in which one place holds something else; a missing key where it is ``...``."""
    body = copy.deepcopy(body_of("xyz-fixed"))
    node: Any = body
    for step in where[:-1]:
        node = node[step]
    if value is ...:
        del node[where[-1]]
    else:
        node[where[-1]] = value
    return body


R = ("relations", 7)
ODD: list[tuple[tuple[Any, ...], object]] = [
    ((*R,), 5),
    ((*R, "of"), ...),
    ((*R, "in"), 7),
    ((*R, "off"), "x"),
    ((*R, "pose"), None),
    ((*R, "pose", "position"), [0, 0]),
    ((*R, "pose", "position"), [0, 0, "0"]),
    ((*R, "pose", "position", 1), True),
    ((*R, "pose", "position", 1), 1e13),
    ((*R, "pose", "position", 1), 10**400),
    ((*R, "pose", "matrix"), [[1]]),
    ((*R, "pose", "more"), 1),
    ((*R, "pose", "orientation"), "none"),
    ((*R, "pose", "orientation", "form"), "xyz"),
    ((*R, "pose", "orientation", "form"), ["xyz-fixed"]),
    ((*R, "pose", "orientation", "values"), [0, 0, 0, 1]),
    ((*R, "pose", "orientation", "values", 2), float("nan")),
    ((*R, "pose", "orientation", "more"), 1),
    ((*R, "position_sd"), 0),
    ((*R, "position_sd"), -1.0),
    ((*R, "angle_sd"), "2"),
    ((*R, "angle_sd"), 1e9),
]


@pytest.mark.parametrize(("where", "value"), ODD)
def test_what_is_odd_is_refused_the_careful_way(where: tuple[Any, ...], value: object) -> None:
    body = changed(where, value)
    plain = plain_of(body)
    assert plain is None or plain_relations(plain, MM) is None
    with pytest.raises((ValidationError, KinematicsError, ServiceError)) as caught:
        FramesBody(raw(body)).relations(MM)
    if isinstance(caught.value, KinematicsError | ServiceError):
        assert caught.value.where[:2] == R
    else:
        assert caught.value.errors()[0]["loc"][:2] == R


def test_layouts_of_the_text_do_not_matter() -> None:
    body = body_of("whole", "xyz-fixed")
    compact = FramesBody(raw(body, separators=(",", ":")))
    for text in (raw(body, indent=2), raw(body, separators=(" , ", " : ")), b"\n" + raw(body)):
        other = FramesBody(text)
        assert other.document == compact.document
        assert np.array_equal(other.relations(MM).of_in, compact.relations(MM).of_in)


@pytest.mark.parametrize(
    "text",
    [
        '{"relations":[{"of":"a","of":"b","in":"c","pose":{"matrix":[]}}]}',
        '{"relations":[],"units":"mm-deg","units":"m-rad"}',
        '{"relations":[],"units" :"mm-deg","units":"m-rad"}',
        '{"relations":[],"find":[{"of":"a","in":"b","in":"b"}]}',
        '{"relations":[],"units":"a\\":b","units":"m-rad"}',
    ],
)
def test_a_key_that_stands_twice_is_never_passed_over(text: str) -> None:
    with pytest.raises(DuplicateKey):
        FramesBody(text.encode())


@pytest.mark.parametrize(
    "text", [b"", b"[1, 2", b'{"relations": [NaN}', b"\xff", b'{"a":"\\ud800"}']
)
def test_what_is_no_json(text: bytes) -> None:
    with pytest.raises(Unparseable):
        FramesBody(text)


@pytest.mark.parametrize(("name", "most"), [("relations", 20_000), ("find", 10_000), ("arms", 100)])
def test_more_than_one_answer_holds(name: str, most: int) -> None:
    with pytest.raises(TooLarge) as caught:
        FramesBody(raw({name: [0] * (most + 1)}))
    assert caught.value.where == (name,)
    assert caught.value.status == 422
    FramesBody(raw({name: [0] * most}))


@pytest.mark.parametrize("name", ["", "A", "a_b", "-a", "a.b.c", "a.", "a\nb", "x" * 49, "ä"])
def test_names_that_are_none(name: str) -> None:
    with pytest.raises(ServiceError, match="is no name of a frame") as caught:
        FramesBody(raw(changed((*R, "in"), name))).relations(MM)
    assert caught.value.where == (*R, "in")


def test_names_that_are_some() -> None:
    for name in ("a", "0", "a-b-9", "arm.flange", "x" * 48, f"{'x' * 48}.{'y' * 48}"):
        FramesBody(raw(changed((*R, "of"), name))).relations(MM)


def test_the_forms_are_all_tried() -> None:
    assert values_of("matrix", NETWORK.of_in[:, :3, :3]).shape == (60, 3, 3)
    assert len(FORMS) == 28
