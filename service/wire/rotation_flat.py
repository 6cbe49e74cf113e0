"""One orientation as a flat answer: its keys, their order, and their places in a line of text.

Left out: what the query means (rotation_query.py) and what the answer says (operations).
"""

from collections.abc import Mapping
from typing import Any

from kinematics.orientation_forms import FORMS, TRIPLES
from service.convert import Units
from service.wire import fixed_text, flat
from service.wire.answers import json_bytes
from service.wire.controller import Format
from service.wire.formats import JSON
from service.wire.one_answer import Content, Stamp, on_one_level, refused_on_one_level
from service.wire.rotation_query import FLAT_FORM, VALUE_PARAMETERS, ConversionQuestion, width_of
from service.wire.whole_numbers import scaled

WIDTHS: Mapping[str, int] = {
    **{key: fixed_text.WIDTHS[key] for key in ("ok", "code", "flags", "seq", "tag", "t_ms")},
    **dict.fromkeys(VALUE_PARAMETERS, fixed_text.NUMBER_WIDTH),
    "form": max(map(len, FORMS)),
    "units": fixed_text.WIDTHS["units"],
}
"""Characters of each field; an answer has as many of ``r1`` ... ``r9`` as its form has numbers."""

_FINE_DECIMALS = 9


def decimals_of(form: str, units: Units) -> int:
    """Return the decimals of a number in a line of text.

    Degrees have as many as those of a pose. Pure numbers and radians are below 10, and would lose
    what matters: nine fit in the same width.
    """
    in_degrees = units.angle == "deg" and (form in TRIPLES or form == "rotation-vector")
    return fixed_text.DECIMALS if in_degrees else _FINE_DECIMALS


def conversion_content(
    orientation: Mapping[str, Any],
    head: Mapping[str, Any],
    asked: ConversionQuestion,
    wanted: Format,
    stamp: Stamp,
) -> Content:
    """Return one orientation in the format asked for.

    Raises
    ------
    NumberDoesNotFit : a number is wider than its field.
    """
    if wanted == "json":
        told = {"ok": True, "code": head["code"], **stamp, "units": asked.units.name}
        told |= {"orientation": orientation, "findings": head["findings"]}
        return Content(json_bytes(told if asked.scale is None else scaled(told, asked.scale)), JSON)
    values = _flattened(orientation[asked.to])
    codes = {finding["code"] for finding in head["findings"]}
    told = {
        "ok": 1,
        "code": head["code"],
        "flags": sum(flat.FLAGS[code] for code in codes if code in flat.FLAGS),
        **stamp,
        **dict(zip(VALUE_PARAMETERS, values, strict=False)),
        "form": asked.to,
        "units": asked.units.name,
    }
    return on_one_level(told, wanted, asked.scale, WIDTHS, decimals_of(asked.to, asked.units))


def refused_conversion(number: int, to: str, wanted: Format, stamp: Stamp) -> Content:
    """Return a flat answer without its numbers; ``to`` may be no form at all.

    A line of text has the length of one that is no refusal.
    """
    count = width_of(to if to in FORMS else FLAT_FORM)
    told: dict[str, object] = {
        "ok": 0,
        "code": number,
        "flags": 0,
        **stamp,
        **dict.fromkeys(VALUE_PARAMETERS[:count], flat.NO_NUMBER),
        "form": "",
        "units": "",
    }
    return refused_on_one_level(told, wanted, WIDTHS)


def _flattened(values: list[Any]) -> list[float]:
    if values and isinstance(values[0], list):
        return [entry for row in values for entry in row]
    return values
