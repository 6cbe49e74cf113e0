"""GET /v1/rotations: one orientation by query string, nested and flat, and how it is refused.

Left out: turns (test_rotations) and many at once (test_rotation_conversions).
"""

from typing import Any

import httpx
import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from kinematics.orientation_forms import FORMS, TRIPLES
from service.problems import KINDS
from service.wire.fixed_text import places
from service.wire.rotation_flat import WIDTHS
from service.wire.rotation_query import VALUE_PARAMETERS, width_of
from tests.contract.refusals import only_entry

pytestmark = pytest.mark.anyio

PATH = "/v1/rotations"
TILT = {"from": "zyx-current", "r1": "90", "r2": "0", "r3": "-30", "units": "mm-deg"}
TO_ANGLES = TILT | {"to": "xyz-fixed"}
HEAD = ["ok", "code", "flags", "seq", "tag", "t_ms"]
NO_NUMBER = -999999.9999


async def ask(client: httpx.AsyncClient, **query: Any) -> httpx.Response:
    return await client.get(PATH, params=query)


def fields(line: str, count: int) -> dict[str, str]:
    """Cut a line of text by position."""
    keys = [*HEAD, *VALUE_PARAMETERS[:count], "form", "units"]
    return {
        key: line[first - 1 : first - 1 + width]
        for key, (first, width) in places(keys, WIDTHS).items()
    }


async def test_nested(client: httpx.AsyncClient) -> None:
    answer = await ask(client, **TILT, tag="42")
    told = answer.json()
    assert answer.status_code == 200
    assert answer.headers["cache-control"] == "no-store"
    stamped = [key for key in HEAD if key != "flags"]
    assert list(told) == [*stamped, "units", "orientation", "findings"]
    assert (told["ok"], told["code"], told["tag"], told["units"]) == (True, 0, 42, "mm-deg")
    ((form, values),) = told["orientation"].items()
    assert form == "quaternion-wxyz"
    expected = Rotation.from_euler("ZYX", [90, 0, -30], degrees=True).as_quat(scalar_first=True)
    np.testing.assert_allclose(values, expected, rtol=0, atol=1e-15)


async def test_flat(client: httpx.AsyncClient) -> None:
    told = (await ask(client, **TILT, format="flat", tag="7")).json()
    assert list(told) == [*HEAD, "r1", "r2", "r3", "form", "units"]
    assert (told["ok"], told["code"], told["flags"], told["tag"]) == (1, 0, 0, 7)
    assert (told["form"], told["units"]) == ("xyz-fixed", "mm-deg")
    assert [told["r1"], told["r2"], told["r3"]] == pytest.approx([-30, 0, 90], abs=1e-12)


@pytest.mark.parametrize("to", FORMS)
async def test_text_has_each_field_at_its_place(client: httpx.AsyncClient, to: str) -> None:
    answer = await ask(client, **TILT, to=to, format="txt", tag="7")
    assert answer.headers["content-type"] == "text/plain; charset=us-ascii"
    flat = (await ask(client, **TILT, to=to, format="flat", tag="7")).json()
    count = width_of(to)
    found = fields(answer.text, count)
    assert ";".join(found.values()) + "\r\n" == answer.text
    assert len(answer.text) <= 254
    assert (found["ok"], found["tag"].strip(), found["form"].strip()) == ("1", "7", to)
    # Degrees to four decimals; pure numbers to nine, which would lose half their digits in four.
    angular = to in TRIPLES or to == "rotation-vector"
    for key in VALUE_PARAMETERS[:count]:
        assert float(found[key]) == pytest.approx(flat[key], abs=5.1e-5 if angular else 5.1e-10)


async def test_radians_have_nine_decimals_in_text(client: httpx.AsyncClient) -> None:
    query = {"from": "xyz-fixed", "r1": "0", "r2": "0", "r3": "3.141592653589793"}
    answer = await ask(client, **query, units="m-rad", format="txt")
    assert fields(answer.text, 3)["r3"] == "+3.141592654"


@pytest.mark.parametrize("to", ["xyz-fixed", "quaternion-xyzw", "matrix", "nonsense"])
@pytest.mark.parametrize("format_", ["txt", "flat", "csv"])
async def test_a_refusal_is_as_long_as_an_answer(
    client: httpx.AsyncClient, to: str, format_: str
) -> None:
    good = await ask(client, **TILT, to=to if to in FORMS else "xyz-fixed", format=format_)
    bad = await ask(client, **TILT | {"r2": "nan"}, to=to, format=format_, tag="7")
    number = 102 if to in FORMS else 105
    assert bad.status_code == 422
    if format_ == "txt":
        assert len(bad.content) == len(good.content)
        found = fields(bad.text, width_of(to if to in FORMS else "xyz-fixed"))
        assert (found["ok"], found["code"].strip(), found["tag"].strip()) == ("0", str(number), "7")
        assert {found[key] for key in found if key in VALUE_PARAMETERS} == {str(NO_NUMBER)}
    elif format_ == "flat":
        told = bad.json()
        assert list(told) == list(good.json())
        assert (told["ok"], told["code"], told["r1"]) == (0, number, NO_NUMBER)
    else:
        keys, values = bad.text.split("\r\n")[:2]
        assert keys == good.text.split("\r\n")[0]
        assert values.startswith(f"0,{number},0,")


async def test_csv(client: httpx.AsyncClient) -> None:
    answer = await ask(client, **TILT, to="quaternion-xyzw", format="csv")
    assert answer.headers["content-type"] == "text/csv; charset=utf-8"
    keys, values, end = answer.text.split("\r\n")
    assert keys == "ok,code,flags,seq,tag,t_ms,r1,r2,r3,r4,form,units"
    assert values.endswith(",quaternion-xyzw,mm-deg")
    assert end == ""


async def test_flags_tell_of_locks_and_repairs(client: httpx.AsyncClient) -> None:
    quaternion = {"from": "quaternion-wxyz", "r1": "1", "r2": "0", "r3": "0.01", "r4": "0"}
    repaired = (await ask(client, **quaternion, units="mm-deg", format="flat")).json()
    assert (repaired["code"], repaired["flags"]) == (6, 32)
    both = (
        await ask(
            client, **quaternion | {"r3": "0", "r1": "2"}, to="zyz-fixed", units="mm-deg",
            format="flat",
        )
    ).json()  # fmt: skip
    assert (both["code"], both["flags"]) == (6, 48)


async def test_whole_numbers(client: httpx.AsyncClient) -> None:
    query = TO_ANGLES | {"r1": "90000", "r2": "0", "r3": "-30000", "scale": "1000"}
    flat = (await ask(client, **query, format="flat")).json()
    assert [flat["r1"], flat["r2"], flat["r3"]] == [-30000, 0, 90000]
    text = (await ask(client, **query, format="txt")).text
    assert fields(text, 3)["r1"] == "-00000030000"
    nested = (await ask(client, **query)).json()
    assert nested["orientation"] == {"xyz-fixed": [-30000, 0, 90000]}
    refused = await ask(client, **query | {"r1": "90000.5"})
    assert only_entry(refused, "unparseable")["pointer"] == "/r1"


async def test_numbers_as_controllers_print_them(client: httpx.AsyncClient) -> None:
    query = "from=zyx-current&to=zyx-current&r1=+9.0E+01&r2=-0.&r3=-030&units=mm-deg&format=flat"
    told = (await client.get(f"{PATH}?{query}")).json()
    assert [told["r1"], told["r2"], told["r3"]] == pytest.approx([90, 0, -30], abs=1e-12)
    assert len(f"{PATH}?{query}") < 255


async def test_a_question_with_a_matrix_fits_into_the_budget(client: httpx.AsyncClient) -> None:
    values = "&".join(f"{name}=-0.1234567890" for name in VALUE_PARAMETERS)
    address = f"{PATH}?from=matrix&to=xyz-fixed&{values}&units=mm-deg&format=txt&tag=7"
    assert len(address) <= 255
    assert (await client.get(address)).text.startswith("0;106;")


async def test_head_says_what_get_says(client: httpx.AsyncClient) -> None:
    for query in (TILT | {"format": "txt"}, TILT | {"format": "txt", "to": "nonsense"}):
        head = await client.head(PATH, params=query)
        answer = await ask(client, **query)
        assert head.status_code == answer.status_code
        assert head.headers["content-length"] == answer.headers["content-length"]


# --- what is refused -----------------------------------------------------------------------


@pytest.mark.parametrize(
    ("changed", "code", "parameter", "way_out"),
    [
        ({"from": None}, "missing-field", "from", "from=xyz-fixed"),
        ({"from": "zyx-curent"}, "unusable-value", "from", '"zyx-current"'),
        ({"to": "ZYX"}, "unusable-value", "to", '"zyx-fixed" or "zyx-current"'),
        ({"to": ""}, "unusable-value", "to", "xyz-fixed"),
        ({"units": None}, "missing-field", "units", "mm-deg"),
        ({"units": "deg"}, "unusable-value", "units", "mm-deg"),
        ({"r2": None}, "missing-field", "r2", "r1 to r3"),
        ({"r4": "0"}, "unusable-value", "r4", "r1 to r3"),
        ({"r2": "nan"}, "not-finite", "r2", "finite"),
        ({"r2": "1e999"}, "not-finite", "r2", "finite"),
        ({"r2": "1,5"}, "unparseable", "r2", "decimal point"),
        ({"r2": ""}, "unparseable", "r2", "number"),
        ({"r2": "ninety"}, "unparseable", "r2", "-12.5"),
        ({"r2": "1e12"}, "out-of-range", "r2", "units"),
        ({"format": "xml"}, "unusable-value", "format", "json, flat, txt, csv"),
        ({"scale": "0"}, "unusable-value", "scale", "1 to 1000000"),
        ({"scale": "1.5"}, "unparseable", "scale", "12"),
        ({"tag": "x"}, "unparseable", "tag", "12"),
        ({"errors": "online"}, "unusable-value", "errors", "inline"),
        ({"form": "matrix"}, "unknown-field", "form", '"format"'),
        ({"r10": "1"}, "unknown-field", "r10", '"r1"'),
    ],
)
async def test_what_cannot_be_used(
    client: httpx.AsyncClient, changed: dict[str, str | None], code: str, parameter: str,
    way_out: str,
) -> None:  # fmt: skip
    query = {name: text for name, text in (TILT | changed).items() if text is not None}
    entry = only_entry(await ask(client, **query), code)
    assert (entry["pointer"], entry["in"]) == (f"/{parameter}", "query")
    assert way_out in entry["way_out"]


@pytest.mark.parametrize(
    ("form", "values", "code"),
    [
        ("quaternion-xyzw", [0, 0, 0, 0], "unusable-value"),
        ("matrix", [1, 0.05, 0, 0, 1, 0, 0, 0, 1], "not-rigid"),
        ("matrix", [1, 0, 0, 0, 1, 0, 0, 0, -1], "not-rigid"),
        ("rotation-vector", [9e8, 9e8, 0], "out-of-range"),
    ],
)
async def test_numbers_that_are_no_rotation(
    client: httpx.AsyncClient, form: str, values: list[float], code: str
) -> None:
    given = dict(zip(VALUE_PARAMETERS, values, strict=False))
    answer = await ask(client, **{"from": form, "units": "m-rad", **given})
    entry = only_entry(answer, code)
    assert (entry["pointer"], entry["in"]) == ("/r1", "query")


async def test_the_number_at_fault_is_pointed_at(client: httpx.AsyncClient) -> None:
    given = dict.fromkeys(VALUE_PARAMETERS, "0") | {"r6": "2e9"}
    answer = await ask(client, **{"from": "matrix", "units": "m-rad", **given})
    entry = only_entry(answer, "out-of-range")
    assert (entry["pointer"], entry["value"]) == ("/r6", "2e9")


async def test_refusals_inline(client: httpx.AsyncClient) -> None:
    answer = await ask(client, **TILT | {"units": "deg"}, errors="inline", tag="9")
    told = answer.json()
    assert answer.status_code == 200
    assert (told["ok"], told["code"], told["name"], told["tag"]) == (
        False,
        KINDS["unusable-value"].number,
        "unusable-value",
        9,
    )
    flat = await ask(client, **TILT | {"units": "deg"}, errors="inline", format="flat")
    assert (flat.status_code, flat.json()["ok"], flat.json()["code"]) == (200, 0, 105)


async def test_a_tag_that_is_too_long_for_its_field(client: httpx.AsyncClient) -> None:
    answer = await ask(client, **TILT, format="txt", tag="12345678901")
    assert answer.text.startswith("0;113;")
    good = await ask(client, **TILT, format="txt")
    assert len(answer.content) == len(good.content)
