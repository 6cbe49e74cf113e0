"""Lines of text: the width of each field as the contract has it, and what does not fit.

Left out: the lines that the service sends (contract/test_text_answers).
"""

from typing import Any

import pytest

from service.errors import NumberDoesNotFit
from service.wire.fixed_text import places, text_line, text_refusal
from service.wire.flat import flat_jacobian_row_refusal, flat_pose_refusal

CONTRACT = {
    "ok": 1, "code": 3, "flags": 5, "seq": 10, "tag": 10, "t_ms": 13, "x": 12, "y": 12, "z": 12,
    "r1": 12, "r2": 12, "r3": 12, "form": 11, "units": 6, "tool_no": 3, "frame_no": 3, "state": 8,
    "condition": 9, "margin": 7, "revision": 6, "digest": 8,
}  # fmt: skip
TOLD: dict[str, Any] = {
    "ok": 1, "code": 3, "flags": 4, "seq": 5, "tag": -7, "t_ms": 1796145917630,
    "x": 914.57007, "y": -0.00004, "z": 999999.99994, "r1": -180.0, "r2": 0.0, "r3": 1e-9,
    "form": "xyz-fixed", "units": "m-rad", "tool_no": 1, "frame_no": 12, "state": "near",
    "condition": 12.16, "margin": -0.03125, "revision": 3, "digest": "e994bb33",
}  # fmt: skip
LINE = (
    "1;3  ;4    ;5         ;-7        ;1796145917630;"
    "+000914.5701;+000000.0000;+999999.9999;-000180.0000;+000000.0000;+000000.0000;"
    "xyz-fixed  ;m-rad ;1  ;12 ;near    ;12.2     ;-0.0312;3     ;e994bb33\r\n"
)


def fields_of(line: bytes) -> dict[str, str]:
    fields = line.decode("ascii").removesuffix("\r\n").split(";")
    return dict(zip(CONTRACT, fields, strict=True))


def test_a_line_of_a_pose() -> None:
    line = text_line(TOLD)
    assert line.decode("ascii") == LINE
    assert len(line) == 197
    assert {key: len(text) for key, text in fields_of(line).items()} == CONTRACT


def test_places_count_from_one() -> None:
    line = text_line(TOLD).decode("ascii")
    fields = fields_of(line.encode())
    found = places(CONTRACT)
    assert len(found) == 21
    for key, (first, width) in found.items():
        assert line[first - 1 : first - 1 + width] == fields[key]
    assert places(["ok", "j11", "units"])["units"].first == 1 + 2 + 13


def test_a_refusal_is_as_long_and_has_its_numbers_at_the_same_place() -> None:
    line = text_refusal(flat_pose_refusal(104, seq=5, tag=7, t_ms=1796145917630))
    assert len(line) == len(LINE)
    fields = fields_of(line)
    assert {key: len(text) for key, text in fields.items()} == CONTRACT
    assert {fields[key] for key in ("x", "y", "z", "r1", "r2", "r3")} == {"-999999.9999"}
    assert (fields["condition"], fields["margin"]) == ("-999999.9", "-9.9999")
    assert (fields["ok"], fields["code"], fields["tag"]) == ("0", "104", "7         ")
    line = text_refusal(flat_pose_refusal(113, seq=5, tag=10**17, t_ms=1796145917630))
    assert fields_of(line)["tag"] == "0         "
    line = text_refusal(flat_jacobian_row_refusal(104, 8, seq=5, tag=7, t_ms=1796145917630))
    assert line.count(b";-999999.9999") == 8
    assert len(line) == 48 + 8 * 13 + 57 + 2


@pytest.mark.parametrize("key", ["x", "r3", "j11"])
@pytest.mark.parametrize("value", [999999.99996, -1e6, 1e12])
def test_a_number_beyond_its_field_is_refused(key: str, value: float) -> None:
    with pytest.raises(NumberDoesNotFit) as caught:
        text_line({key: value})
    error = caught.value
    assert (error.code, error.where, error.location) == (
        "number-does-not-fit",
        ("format",),
        "query",
    )
    assert error.value == value
    assert error.way_out


def test_a_tag_beyond_its_field_is_refused() -> None:
    assert text_line({"tag": -123456789}) == b"-123456789\r\n"
    with pytest.raises(NumberDoesNotFit) as caught:
        text_line({"tag": 12345678901})
    assert caught.value.where == ("tag",)


def test_what_has_a_largest_value_is_cut_there() -> None:
    for value, shown in [(12.0, "9.9999 "), (-12.0, "-9.9999"), (9.9999, "9.9999 ")]:
        assert text_line({"margin": value}) == f"{shown}\r\n".encode()
    assert text_line({"condition": 999999.9}) == b"999999.9 \r\n"
    assert text_line({"condition": 999999.9}, 1000) == b"+99999999\r\n"
    assert text_line({"margin": 9.9999}, 1_000_000) == b"+999999\r\n"


@pytest.mark.parametrize(
    ("value", "scale", "shown"),
    [
        (914.57007, 1000, "+00000914570"),
        (-914.57007, 1, "-00000000915"),
        (-0.4, 1, "+00000000000"),
        (99999.999999, 1_000_000, "+99999999999"),
    ],
)
def test_a_scaled_number_is_an_integer_of_the_same_width(
    value: float, scale: int, shown: str
) -> None:
    assert text_line({"x": value}, scale) == f"{shown}\r\n".encode()


def test_a_scaled_number_beyond_its_field_is_refused() -> None:
    with pytest.raises(NumberDoesNotFit):
        text_line({"x": 100000.0}, 1_000_000)
    assert text_line({"condition": 12.125, "margin": 0.25}, 100) == b"+00001212;+000025\r\n"
