"""The answer to a controller's question in the format asked for: its bytes and their media type.

Left out: which keys a flat answer has (flat.py) and where they stand in a line (fixed_text.py).
"""

from collections.abc import Mapping
from typing import NamedTuple, TypedDict

from service.problems import Problem
from service.wire import fixed_text, flat
from service.wire.answers import json_bytes
from service.wire.controller import Format
from service.wire.single import SingleAnswer, SingleQuestion
from service.wire.whole_numbers import scaled

_JSON = "application/json"


class Stamp(TypedDict):
    """What tells an answer from a late one."""

    seq: int
    tag: int
    t_ms: int


class Content(NamedTuple):
    """The body of an answer."""

    body: bytes
    media_type: str


def nested(answer: SingleAnswer, key: str, stamp: Stamp, scale: int | None) -> Content:
    """Return the answer as a body's, with one item under ``key``."""
    head, item = answer.head, answer.item
    if scale is not None:
        head, item = scaled(head, scale), scaled(item, scale)
    told = {"ok": True, "code": answer.item["code"], **stamp, **head, key: [item]}
    return Content(json_bytes(told), _JSON)


def pose(answer: SingleAnswer, asked: SingleQuestion, wanted: Format, stamp: Stamp) -> Content:
    """Return a pose on one level.

    Raises
    ------
    NumberDoesNotFit : a number is wider than its field.
    """
    told = flat.flat_pose(answer, form=asked.form, **stamp)
    return on_one_level(told, wanted, asked.scale)


def jacobian(
    answer: SingleAnswer, asked: SingleQuestion, wanted: Format, stamp: Stamp, row: int | None
) -> Content:
    """Return a Jacobian on one level: the whole matrix, or in a line of text one row.

    Raises
    ------
    NumberDoesNotFit : a number is wider than its field.
    """
    told = (
        flat.flat_jacobian(answer, scale=asked.scale, **stamp)
        if row is None
        else flat.flat_jacobian_row(answer, row, **stamp)
    )
    return on_one_level(told, wanted, asked.scale)


def refused_pose(problem: Problem, wanted: Format, stamp: Stamp) -> Content:
    """Return a pose without its numbers."""
    return refused_on_one_level(flat.flat_pose_refusal(problem.number, **stamp), wanted)


def refused_jacobian(problem: Problem, wanted: Format, stamp: Stamp, joints: int) -> Content:
    """Return the Jacobian of an arm of so many joints without its numbers; text has one row."""
    told = (
        flat.flat_jacobian_row_refusal(problem.number, joints, **stamp)
        if wanted == "txt"
        else flat.flat_jacobian_refusal(problem.number, joints, **stamp)
    )
    return refused_on_one_level(told, wanted)


def refused_inline(problem: Problem, request_id: str, stamp: Stamp) -> Content:
    """Return the problem document with what begins every answer.

    A caller that asks for it reads ``code`` where answers have it, and must find the integer
    there; the word is ``name``.
    """
    named = {"ok": False, "code": problem.number, "name": problem.code, **stamp}
    return Content(json_bytes(problem.document(request_id) | named), _JSON)


def on_one_level(
    told: Mapping[str, object],
    wanted: Format,
    scale: int | None,
    widths: Mapping[str, int] = fixed_text.WIDTHS,
    decimals: int = fixed_text.DECIMALS,
) -> Content:
    """Return a flat answer as JSON, CSV or a line of text; ``widths``, ``decimals`` are a line's.

    Raises
    ------
    NumberDoesNotFit : a number is wider than its field.
    """
    if wanted == "txt":
        line = fixed_text.text_line(told, scale, widths=widths, decimals=decimals)
        return Content(line, fixed_text.MEDIA_TYPE)
    return _as_json_or_csv(told if scale is None else scaled(told, scale), wanted)


def refused_on_one_level(
    told: Mapping[str, object], wanted: Format, widths: Mapping[str, int] = fixed_text.WIDTHS
) -> Content:
    """Return a flat refusal in the same formats."""
    if wanted == "txt":
        return Content(fixed_text.text_refusal(told, widths), fixed_text.MEDIA_TYPE)
    return _as_json_or_csv(told, wanted)


def _as_json_or_csv(told: Mapping[str, object], wanted: Format) -> Content:
    if wanted == "csv":
        return Content(flat.csv_of_one(told), flat.CSV_MEDIA_TYPE)
    return Content(json_bytes(told), _JSON)
