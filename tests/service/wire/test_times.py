"""Times as written in requests."""

from datetime import UTC, datetime

import pytest

from service.errors import UnusableValue
from service.wire.times import time_in


@pytest.mark.parametrize(
    ("text", "wanted"),
    [
        ("2026-12-01T06:00:00Z", datetime(2026, 12, 1, 6, tzinfo=UTC)),
        ("2026-12-01t06:00:00z", datetime(2026, 12, 1, 6, tzinfo=UTC)),
        ("2026-12-01T06:00:00.5-02:30", datetime(2026, 12, 1, 8, 30, 0, 500_000, tzinfo=UTC)),
        ("2026-12-01T06:00:00 02:00", datetime(2026, 12, 1, 4, tzinfo=UTC)),
        ("2026-12-01T06:00:00.123456789Z", datetime(2026, 12, 1, 6, 0, 0, 123_456, tzinfo=UTC)),
        ("2024-02-29T23:59:59Z", datetime(2024, 2, 29, 23, 59, 59, tzinfo=UTC)),
    ],
)
def test_a_time_is_read_into_utc(text: str, wanted: datetime) -> None:
    found = time_in(text, ("from",), "query")
    assert found == wanted
    assert found.tzinfo is UTC


@pytest.mark.parametrize(
    "text",
    [
        *("", "now", "2026-12-01", "2026-12-01T06:00:00", "2026-12-01 06:00:00Z", "1764568800"),
        *("2026-02-30T00:00:00Z", "2026-12-01T24:30:00Z", "2026-12-01T06:00:60Z", "20261201T06Z"),
        *("0000-01-01T00:00:00Z", "0001-01-01T00:00:00+23:00", "9999-12-31T23:59:59-23:00"),
        *("2026-12-01T06:00:00+99:00", "2026-12-01T06:00:00.Z", "２０２６-12-01T06:00:00Z"),
    ],
)
def test_no_time_is_refused_by_name(text: str) -> None:
    with pytest.raises(UnusableValue) as caught:
        time_in(text, ("fields", "from"))
    assert caught.value.say == '"from" is no time'
    assert (caught.value.where, caught.value.value) == (("fields", "from"), text)
