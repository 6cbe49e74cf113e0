"""What a sender calls its request."""

import pytest
from starlette.requests import Request

from service.errors import UnusableValue
from service.wire.senders_key import LONGEST_KEY, kept_key, senders_key


def request(*keys: str) -> Request:
    headers = [(b"idempotency-key", key.encode("latin-1")) for key in keys]
    return Request({"type": "http", "headers": headers})


@pytest.mark.parametrize("key", ["a", "8a1f-77", "x" * LONGEST_KEY, "grün"])
def test_a_key_is_taken_as_it_is(key: str) -> None:
    assert senders_key(request(key)) == key
    assert senders_key(request()) is None


@pytest.mark.parametrize("key", ["", "x" * (LONGEST_KEY + 1), "a\tb", "\x7f"])
def test_an_unusable_key_is_refused(key: str) -> None:
    with pytest.raises(UnusableValue) as caught:
        senders_key(request(key))
    assert (caught.value.where, caught.value.location) == (("idempotency-key",), "header")


def test_what_is_kept_has_one_length_and_tells_keys_apart() -> None:
    assert kept_key(None) is None
    assert len({kept_key("a"), kept_key("b"), kept_key("a ")}) == 3
    assert {len(kept_key(key) or "") for key in ("a", "x" * 200)} == {64}
