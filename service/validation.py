"""Pydantic's complaints read as ours: a code of the table, a pointer that exists, the way out.

Left out: models themselves, and the words pydantic chose where they already say it.
"""

from collections.abc import Iterator, Mapping, Sequence
from types import EllipsisType
from typing import Any, Literal, get_args, get_origin

from pydantic import BaseModel, ValidationError

from kinematics.errors import KinematicsError
from kinematics.known_names import way_out_of_unknown
from service.details import Detail, Location

Where = tuple[str | int, ...]

_CODES = {
    "extra_forbidden": "unknown-field",
    "unexpected_keyword_argument": "unknown-field",
    "missing": "missing-field",
    "finite_number": "not-finite",
}
# What to do instead, by pydantic's kind of complaint; its context fills the braces.
_WAYS_OUT = {
    "literal_error": "give {expected}",
    "enum": "give {expected}",
    "float_type": "give a number, without quotes",
    "int_type": "give a whole number, without quotes",
    "bool_type": "give true or false, without quotes",
    "string_type": "give a text in quotes",
    "list_type": "give a list",
    "dict_type": "give an object",
    "model_type": "give an object",
    "model_attributes_type": "give an object",
    "finite_number": "give a finite number; a failed measurement cannot be computed with",
    "greater_than_equal": "give {ge} or more",
    "greater_than": "give more than {gt}",
    "less_than_equal": "give {le} or less",
    "less_than": "give less than {lt}",
    "too_short": "give at least {min_length}",
    "too_long": "give at most {max_length}",
    "string_too_short": "give at least {min_length} characters",
    "string_too_long": "give at most {max_length} characters",
    "string_pattern_mismatch": "give a text that matches {pattern}",
    "int_from_float": "give a whole number",
    "not_printable": "leave out line breaks and control characters",
    "not_exact": "give it as a text, in quotes",
    "not_plain": "give what is nested as fields of its own",
}
_OBJECT = "must be an object"
# What is said in place of pydantic's words, which name a class of this program.
_SAYS = {"dict_type": _OBJECT, "model_type": _OBJECT, "model_attributes_type": _OBJECT}
# A bulk body can be wrong at a hundred thousand places; twenty are shown.
_MOST_READ = 1000
# Names pydantic puts into a path for a member of a union, where no body is there to tell.
_TAGS = frozenset({"str", "int", "float", "bool", "list", "dict", "none", "tuple"})


def details_of(
    exc: ValidationError, *, location: Location = "body", body: object = ...
) -> tuple[Detail, ...]:
    """Return the complaints of ``exc``, at most a thousand, each with a pointer into ``body``.

    Examples
    --------
    >>> class Row(BaseModel, extra="forbid"):
    ...     alpha: float
    >>> try:
    ...     Row.model_validate({"alhpa": 90})
    ... except ValidationError as error:
    ...     for detail in details_of(error, body={"alhpa": 90}):
    ...         print(detail.code, detail.where, detail.way_out)
    missing-field ('alpha',) add "alpha"
    unknown-field ('alhpa',) did you mean "alpha"?
    """
    complaints = exc.errors(include_url=False)[:_MOST_READ]
    return tuple(_detail(exc.title, error, location, body) for error in complaints)


def _detail(title: str, error: Mapping[str, Any], location: Location, body: object) -> Detail:
    kind: str = error["type"]
    code = _CODES.get(kind, "unusable-value")
    where = place(error["loc"], body, missing=code == "missing-field")
    core = (error.get("ctx") or {}).get("error")
    if isinstance(core, KinematicsError):
        value = error["input"] if core.value is None else core.value
        return Detail(core.code, core.say, where + core.where, location, value, core.way_out)
    if code == "unknown-field":
        name = str(error["loc"][-1])
        way_out = way_out_of_unknown(name, known_names(title, error["loc"][:-1]))
        return Detail(code, f'unknown field "{name}"', where, location, error["input"], way_out)
    if code == "missing-field":
        name = str(error["loc"][-1])
        say = f'"{name}" is missing'
        choice = _choice(title, error["loc"])
        return Detail(code, say, where, location, None, f'add "{name}"{choice}')
    say = _SAYS.get(kind) or _sentence(error["msg"])
    way_out = _way_out(kind, error.get("ctx") or {})
    return Detail(code, say, where, location, error["input"], way_out)


def place(loc: Sequence[str | int], body: object, *, missing: bool = False) -> Where:
    """Return ``loc`` without the union tags in it, so that it leads to a real place of ``body``.

    A tag may be spelt like a key beside it; of all ways to drop tags the one that keeps most wins.

    Examples
    --------
    >>> body = {"pose": {"position": [0, 0, 0], "orientation": {"form": "xyz"}}}
    >>> place(("pose", "position", "orientation", "form"), body)
    ('pose', 'orientation', 'form')
    >>> place(("pose", "position", "orientation", "values"), body, missing=True)
    ('pose', 'orientation', 'values')
    """
    if isinstance(body, EllipsisType):
        return tuple(step for step in loc if not _looks_like_tag(step))
    return max(_readings(tuple(loc), body, missing), key=len)


def known_names(title: str, loc: Sequence[str | int]) -> set[str]:
    """Return the field names (as on the wire) that the model ``title`` knows at ``loc``."""
    return {
        info.alias or name
        for model in _models_at(title, loc)
        for name, info in model.model_fields.items()
    }


def _choice(title: str, loc: Sequence[str | int]) -> str:
    """Return the values a missing field may have, in words; nothing where there are too many."""
    for model in _models_at(title, loc[:-1]):
        for name, info in model.model_fields.items():
            if loc[-1] in (name, info.alias) and get_origin(info.annotation) is Literal:
                return f": {', '.join(map(str, get_args(info.annotation)))}"
    return ""


def _models_at(title: str, loc: Sequence[str | int]) -> set[type[BaseModel]]:
    """Return the models that may stand at ``loc`` of the model ``title``."""
    models = {model for model in _all_models(BaseModel) if model.__name__ == title}
    for step in loc:
        below = set[type[BaseModel]]()
        for model in models:
            for name, info in model.model_fields.items():
                if step in (name, info.alias):
                    below |= set(_models_in(info.annotation))
        named = {model for model in models if model.__name__ == step}
        # A number or a tag stays where it is; a model's own name as tag narrows the choice.
        models = below or named or models
    return models


def _readings(loc: Where, node: object, missing: bool) -> Iterator[Where]:
    if not loc:
        yield ()
        return
    step, rest = loc[0], loc[1:]
    if _leads_on(step, node):
        for reading in _readings(rest, node[step], missing):  # type: ignore[index]
            yield (step, *reading)
    elif missing and not rest and isinstance(node, Mapping):
        yield (step,)
    if rest or not missing:
        yield from _readings(rest, node, missing)


def _leads_on(step: str | int, node: object) -> bool:
    if isinstance(node, Mapping):
        return step in node
    return isinstance(node, list) and isinstance(step, int) and 0 <= step < len(node)


def _looks_like_tag(step: str | int) -> bool:
    return isinstance(step, str) and (
        step in _TAGS or step[:1].isupper() or "[" in step or "(" in step
    )


def _all_models(model: type[BaseModel]) -> Iterator[type[BaseModel]]:
    for below in model.__subclasses__():
        yield below
        yield from _all_models(below)


def _models_in(annotation: object) -> Iterator[type[BaseModel]]:
    if isinstance(annotation, type) and issubclass(annotation, BaseModel):
        yield annotation
    for argument in get_args(annotation):
        yield from _models_in(argument)


def _way_out(kind: str, context: Mapping[str, Any]) -> str:
    return _WAYS_OUT.get(kind, "").format(**context)


def _sentence(message: str) -> str:
    # Pydantic puts its own words before those of a validator that raised ValueError.
    return message.removeprefix("Value error, ").removeprefix("Assertion failed, ")
