"""The tree of refusals: drawn as it is, each with a code of its own kind and a docstring."""

import ast
import inspect
import pickle
import re
from collections.abc import Iterator
from pathlib import Path

import pytest

from kinematics import errors
from kinematics.envelope.sampled_views import UnfitResolution
from kinematics.errors import InvalidArm, KinematicsError, NotRigid

# Class and kebab code, from the table of codes on the wire.
CODES = {
    "KinematicsError": "unusable-value",
    "InvalidArm": "unusable-value",
    "TooManyRows": "too-large",
    "InvalidCoupling": "unusable-value",
    "SingularDriveMap": "unusable-value",
    "InvalidCell": "unusable-value",
    "TooManyPlaced": "too-large",
    "InvalidOrientation": "unusable-value",
    "TooManySteps": "too-large",
    "NotRigid": "not-rigid",
    "OutOfRange": "out-of-range",
    "WrongJointCount": "wrong-joint-count",
    "NotFinite": "not-finite",
    "UnknownTool": "unknown-tool",
    "UnknownFrame": "unknown-frame",
    "NotConnected": "not-connected",
    "TooLongWays": "too-large",
    "ToolNotSaid": "tool-not-said",
}


def descendants(kind: type[KinematicsError]) -> Iterator[type[KinematicsError]]:
    yield kind
    for child in kind.__subclasses__():
        yield from descendants(child)


EVERY = [kind for kind in descendants(KinematicsError) if kind.__module__ == errors.__name__]


def test_every_class_has_its_code() -> None:
    assert {kind.__name__: kind.code for kind in EVERY} == CODES


def test_the_drawn_tree_is_the_tree() -> None:
    drawn: list[tuple[int, str]] = []
    for line in (errors.__doc__ or "").splitlines():
        if match := re.match(r"^((?:\||'|  |-)*[| ' -]*)([A-Z]\w+)(\s{2,}|$)", line):
            drawn.append((len(match[1]) // 3, match[2]))
    actual: list[tuple[int, str]] = []

    def list_below(kind: type[KinematicsError], depth: int) -> None:
        actual.append((depth, kind.__name__))
        for child in kind.__subclasses__():
            if child in EVERY:
                list_below(child, depth + 1)

    list_below(KinematicsError, 0)
    assert len(drawn) == len(CODES)
    assert drawn == actual


@pytest.mark.parametrize("kind", EVERY, ids=lambda kind: kind.__name__)
def test_every_class_says_when_it_happens(kind: type[KinematicsError]) -> None:
    assert inspect.getdoc(kind) != inspect.getdoc(KinematicsError) or kind is KinematicsError
    assert issubclass(kind, ValueError)


def test_every_class_is_raised_somewhere_in_the_package() -> None:
    raised: set[str] = set()
    for path in Path(errors.__file__).parent.glob("*.py"):
        for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
            if isinstance(node, ast.Call) and isinstance(node.func, ast.Name):
                raised.add(node.func.id)
    # InvalidOrientation reaches its raise through an argument of checked_numbers.
    assert set(CODES) <= raised | {"InvalidOrientation"}


def test_an_error_carries_what_where_value_and_way_out() -> None:
    error = InvalidArm("no", where=["rows", 2, "a"], value=7, way_out="say yes")
    assert str(error) == error.say == "no"
    assert (error.where, error.value, error.way_out) == (("rows", 2, "a"), 7, "say yes")
    bare = InvalidArm("no")
    assert (bare.where, bare.value, bare.way_out) == ((), None, "")


def test_below_puts_keys_in_front_and_keeps_the_error() -> None:
    error = InvalidArm("no", where=("a",))
    assert error.below("rows", 3) is error
    assert error.below("arm").where == ("arm", "rows", 3, "a")


def test_not_rigid_states_the_defect() -> None:
    error = NotRigid("no", defect=0.1, where=(3,), value=[0], way_out="mend it")
    assert (error.defect, error.where, error.value, error.way_out) == (0.1, (3,), [0], "mend it")


@pytest.mark.parametrize(
    "error",
    [
        InvalidArm("travel is reversed", where=("rows", 0), value=[5, -5], way_out="turn it round"),
        NotRigid("no rotation", defect=0.25, where=("pose",), way_out="give one"),
        UnfitResolution(0.5, 0.001, 0.1),
    ],
    ids=lambda error: type(error).__name__,
)
def test_it_comes_from_another_process_as_it_was(error: KinematicsError) -> None:
    back = pickle.loads(pickle.dumps(error.below("arm")))
    assert type(back) is type(error)
    assert (str(back), back.args) == (str(error), error.args)
    assert vars(back) == vars(error)
