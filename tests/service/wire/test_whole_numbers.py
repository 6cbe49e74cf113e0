"""Numbers as integers: which are scaled, which stay, and which cannot be printed."""

import numpy as np
import pytest

from service.errors import NumberDoesNotFit
from service.wire.whole_numbers import scaled


def test_only_numbers_with_decimals_are_scaled() -> None:
    told = {
        "code": 3, "ok": True, "none": None, "say": "at 5.5 deg", "tool": {"position": [0.5, 2]},
        "matrix": np.array([[1.25, -0.001]]), "one": np.float64(2.5),
    }  # fmt: skip
    assert scaled(told, 100) == {
        "code": 3, "ok": True, "none": None, "say": "at 5.5 deg", "tool": {"position": [50, 2]},
        "matrix": [[125, 0]], "one": 250,
    }  # fmt: skip
    assert type(scaled(1.0, 1)) is type(scaled(np.float64(1), 1)) is int


def test_an_integer_beyond_64_bits_is_refused() -> None:
    assert scaled(9e12, 10**6) == 9 * 10**18
    with pytest.raises(NumberDoesNotFit) as caught:
        scaled({"condition_number": 1e13}, 10**6)
    assert caught.value.where == ("scale",)
