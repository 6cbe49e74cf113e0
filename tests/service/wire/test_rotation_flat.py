"""One orientation on one level: keys in order, widths, and decimals that lose nothing."""

import pytest

from kinematics.orientation_forms import FORMS, TRIPLES
from service.convert import UNITS
from service.errors import NumberDoesNotFit
from service.wire import fixed_text
from service.wire.one_answer import Stamp
from service.wire.rotation_flat import WIDTHS, conversion_content, decimals_of, refused_conversion
from service.wire.rotation_query import ConversionQuestion, width_of

STAMP: Stamp = {"seq": 12, "tag": 7, "t_ms": 1_796_145_917_630}
HEAD = {"code": 0, "findings": []}


def asked(to: str, scale: int | None = None, units: str = "mm-deg") -> ConversionQuestion:
    return ConversionQuestion("xyz-fixed", to, UNITS[units], [0.0, 0.0, 0.0], scale)


def test_a_line_by_hand() -> None:
    values = {"xyz-fixed": [-29.99996, 0.0, 90.0]}
    content = conversion_content(values, HEAD, asked("xyz-fixed"), "txt", STAMP)
    assert content.media_type == "text/plain; charset=us-ascii"
    assert content.body == (
        b"1;0  ;0    ;12        ;7         ;1796145917630;"
        b"-000030.0000;+000000.0000;+000090.0000;xyz-fixed      ;mm-deg\r\n"
    )


def test_a_refused_line_by_hand() -> None:
    assert refused_conversion(102, "quaternion-wxyz", "txt", STAMP).body == (
        b"0;102;0    ;12        ;7         ;1796145917630;"
        b"-999999.9999;-999999.9999;-999999.9999;-999999.9999;               ;      \r\n"
    )


def test_every_form_has_its_place() -> None:
    assert WIDTHS["form"] == max(map(len, FORMS)) == 15
    for key in ("ok", "code", "flags", "seq", "tag", "t_ms", "r1", "r3", "units"):
        assert WIDTHS[key] == fixed_text.WIDTHS[key]
    for form in FORMS:
        line = refused_conversion(100, form, "txt", STAMP).body
        assert len(line) == 72 + 13 * width_of(form)
        assert len(line) <= 254


def test_degrees_have_four_decimals_and_all_else_nine() -> None:
    for form in FORMS:
        angular = form in TRIPLES or form == "rotation-vector"
        assert decimals_of(form, UNITS["in-deg"]) == (4 if angular else 9)
        assert decimals_of(form, UNITS["m-rad"]) == 9


def test_a_scaled_number_that_does_not_fit() -> None:
    values = {"matrix": [[1.0, 0.0, 0.0]] * 3}
    line = conversion_content(values, HEAD, asked("matrix", 1_000_000), "txt", STAMP).body
    assert line.count(b"+00001000000") == 3
    with pytest.raises(NumberDoesNotFit, match="r1 does not fit"):
        conversion_content(
            {"xyz-fixed": [1e9, 0.0, 0.0]}, HEAD, asked("xyz-fixed", 1000), "txt", STAMP
        )


def test_flags_add_up() -> None:
    head = {"code": 6, "findings": [{"code": 6}, {"code": 5}, {"code": 0}]}
    content = conversion_content({"matrix": [[1.0]]}, head, asked("matrix"), "csv", STAMP)
    assert content.body.split(b"\r\n")[1].startswith(b"1,6,48,12,7,")
