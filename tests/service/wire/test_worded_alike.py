"""Bodies in the same words: read from their numbers alone they give what reading them whole gives.

Oracle: the body read as a whole, as it is while its words are new.
"""

import json
from random import Random
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from pydantic import ValidationError

from kinematics.errors import KinematicsError
from kinematics.orientation_forms import FORMS
from service.errors import ServiceError
from service.wire import worded_alike as module
from service.wire.frames import FramesBody
from service.wire.worded_alike import worded_alike
from tests.service.wire.test_plain_relations import MM, body_of, raw

SMALL: dict[str, Any] = {
    "relations": [
        {
            "of": "lamp",
            "in": "table",
            "pose": {
                "position": [0, 20.5, 1e3],
                "orientation": {"form": "xyz-fixed", "values": [0, -10, 20]},
            },
            "angle_sd": 0.5,
        },
        {
            "of": "table",
            "in": "world",
            "pose": {"matrix": [[1, 0, 0, 5], [0, 1, 0, 0], [0, 0, 1, 0], [0, 0, 0, 1]]},
        },
    ],
    "find": [{"of": "lamp", "in": "world"}],
    "units": "mm-deg",
}


@pytest.fixture(autouse=True)
def _nothing_seen() -> None:
    forget()


def forget() -> None:
    module._sightings.cache_clear()
    module._wording.cache_clear()


def read(text: bytes) -> tuple[Any, ...]:
    """Return what a body says, or what is wrong with it."""
    try:
        body = FramesBody(text)
        found = body.relations(MM)
        asked = body.asked.model_dump(exclude={"relations"})
    except (ServiceError, KinematicsError) as error:
        return type(error), str(error), error.where, repr(error.value), error.way_out
    except ValidationError as error:
        return (repr(error.errors()),)
    sds = found.position_sd.tolist(), found.angle_sd.tolist()
    names = list(found.of), list(found.within)
    return asked, *names, *sds, found.of_in.tolist(), list(found.repaired), found.more_repaired


def first_and_again(text: bytes) -> list[tuple[Any, ...]]:
    forget()
    return [read(text) for _ in range(3)]


@pytest.mark.parametrize(
    "forms", [*((form,) for form in FORMS), ("whole",), ("whole", "xyz-fixed", "quaternion-xyzw")]
)
def test_other_numbers_in_the_same_words(forms: tuple[str, ...]) -> None:
    body, other = (
        {**body_of(*forms), "relations": body_of(*forms)["relations"][:30]} for _ in "12"
    )
    others = body_of(*reversed(forms))["relations"][:29:-1]
    for relation, another in zip(other["relations"], others, strict=True):
        relation["pose"] = another["pose"]
    expected = read(raw(other))
    forget()
    read(raw(body))
    read(raw(body))
    alike = worded_alike(raw(other))
    before = worded_alike(raw(body))
    assert alike is not None
    assert before is not None
    assert alike.wording is before.wording
    assert FramesBody(raw(other))._alike is not None
    assert read(raw(other)) == expected


def test_words_are_looked_into_the_second_time() -> None:
    assert [worded_alike(raw(SMALL)) is None for _ in range(3)] == [True, False, False]
    assert worded_alike(raw(SMALL, indent=1)) is None


ODD = (
    *("", "1,", ",1", "1,,2", "1 2", "01", "+1", "-", "--1", ".5", "1.", "1e", "1e999", "1E+2"),
    *(
        "NaN",
        "null",
        "true",
        '"1"',
        "[1]",
        "[]",
        "0\x00",
        "9" * 400,
        "9" * 5000,
        "1e13",
        "-0",
        "1 ",
    ),
)


@pytest.mark.parametrize("odd", ODD)
@pytest.mark.parametrize("place", ["20.5", "-10", "20]", "5]", "0.5"])
def test_odd_numbers_in_known_words(odd: str, place: str) -> None:
    text = raw(SMALL).decode()
    assert text.count(place) == 1 or place == "0.5"
    bad = text.replace(place, odd + "]" * place.endswith("]"), 1).encode()
    expected = first_and_again(bad)
    assert expected[0] == expected[1] == expected[2]
    forget()
    read(raw(SMALL))
    read(raw(SMALL))
    assert read(bad) == expected[0]


@pytest.mark.parametrize(
    ("where", "value"),
    [
        (("find", 0, "of"), "lamp[1]"),
        (("find", 0, "of"), "lamp[1,2]"),
        (("find",), [[1, 2]]),
        (("find",), [1]),
        (("form",), "xyz[1]"),
        (("units",), [1]),
        (("units",), None),
        (("tag[1]",), 1),
        (("arms",), [{"arm": "welder", "joints": [1, 2]}]),
        (("cell",), "hall"),
        (("relations", 0, "of"), "lamp[1]"),
        (("relations", 0, "pose", "orientation", "form"), "xyz[3]"),
        (("relations", 0, "position_sd"), [1]),
        (("relations", 0, "more"), [1]),
        (("relations", 0, "pose", "matrix"), [1, 2]),
        (("relations", 1, "pose", "position"), [1, 2, 3]),
        (("relations", 0, "pose", "position"), [1, 2]),
        (("relations",), [[1, 2, 3]]),
    ],
)
def test_lists_where_they_have_no_business(where: tuple[Any, ...], value: object) -> None:
    body = json.loads(raw(SMALL))
    node = body
    for step in where[:-1]:
        node = node[step]
    node[where[-1]] = value
    first, *again = first_and_again(raw(body))
    assert again == [first, first]
    assert worded_alike(raw(body)) is None


def test_a_key_that_stands_twice_is_refused_each_time() -> None:
    text = raw(SMALL).replace(b'"in": "table"', b'"in": "table", "in": "table"')
    first, *again = first_and_again(text)
    assert first[1] == 'the key "in" stands twice in one object'
    assert again == [first, first]


def test_poses_that_are_mended_are_told_each_time() -> None:
    body = json.loads(raw(SMALL))
    body["relations"][0]["pose"]["orientation"] = {
        "form": "quaternion-wxyz",
        "values": [1.0001, 0, 0, 0],
    }
    first, *again = first_and_again(raw(body))
    assert [number for number, _ in first[-2]] == [0]
    assert repr(again) == repr([first, first])


LETTERS = b'[]{},:" \n0123456789.-eE\\ablamp\0\xff'


@given(st.integers(0, 2**32), st.integers(1, 4))
def test_a_text_spoilt_anywhere_is_read_alike_each_time(seed: int, spoils: int) -> None:
    random, text = Random(seed), bytearray(raw(SMALL))
    for _ in range(spoils):
        at = random.randrange(len(text))
        text[at : at + random.randrange(3)] = bytes(random.choices(LETTERS, k=random.randrange(3)))
    first, *again = first_and_again(bytes(text))
    assert repr(again) == repr([first, first])
    forget()
    read(raw(SMALL))
    read(raw(SMALL))
    assert repr(read(bytes(text))) == repr(first)


def test_what_is_shared_cannot_be_written_to() -> None:
    worded_alike(raw(SMALL))
    alike = worded_alike(raw(SMALL))
    assert alike is not None
    found = alike.relations(MM)
    assert found is not None
    for shared in (found.position_sd, found.angle_sd):
        assert not shared.flags.writeable
    again = alike.relations(MM)
    assert again is not None
    assert not np.shares_memory(found.of_in, again.of_in)


def test_no_more_is_kept_than_said() -> None:
    for number in range(2 * module.WORDINGS_KEPT):
        body = SMALL | {"find": [{"of": "lamp", "in": f"shelf-{number}"}]}
        worded_alike(raw(body))
        assert worded_alike(raw(body)) is not None
    assert module._wording.cache_info().currsize == module.WORDINGS_KEPT
    assert FramesBody(raw(SMALL) + b" " * module.SHORT_BYTES)._alike is None
