"""NPY files: what numpy writes is read, everything else is refused for a reason that is told."""

import io
import pickle
import struct
from typing import Any

import numpy as np
import pytest

from service.errors import ServiceError, Unparseable, UnusableValue
from service.wire.npy import npy_bytes, npy_head, read_npy

TABLE = np.arange(12.0).reshape(4, 3)


def saved(array: Any, version: tuple[int, int] = (1, 0), **how: Any) -> bytes:
    sink = io.BytesIO()
    np.lib.format.write_array(sink, array, version, **how)
    return sink.getvalue()


def made(header: str, body: bytes = b"", *, end: str = "\n") -> bytes:
    text = (header + end).encode("latin-1")
    return b"\x93NUMPY\x01\x00" + struct.pack("<H", len(text)) + text + body


def said(**changed: object) -> str:
    return repr({"descr": "<f8", "fortran_order": False, "shape": (1, 1)} | changed)


@pytest.mark.parametrize("shape", [(4, 3), (1, 1), (0, 3), (5, 0), (0, 0)])
def test_what_numpy_writes_is_read(shape: tuple[int, int]) -> None:
    table = np.random.default_rng(1).normal(size=shape)
    assert np.array_equal(read_npy(saved(table)), table)


@pytest.mark.parametrize("shape", [(4, 7), (0, 7), (3, 6, 2), (3, 6, 0), (100_000, 7)])
def test_what_is_written_is_read_by_numpy(shape: tuple[int, ...]) -> None:
    array = np.zeros(shape)
    raw = npy_head(shape) + npy_bytes(array)
    assert raw == saved(array)
    assert np.load(io.BytesIO(raw), allow_pickle=False).shape == shape


def test_a_header_of_any_length_will_do() -> None:
    for blanks in range(8):
        found = read_npy(made(said() + " " * blanks, struct.pack("<d", 2.5)))
        assert found.tolist() == [[2.5]]


@pytest.mark.parametrize(
    ("raw", "say"),
    [
        (b"", "empty"),
        (b"\x93NUMPY", "begin"),
        (b"PK\x03\x04" + bytes(100), "begin"),
        (pickle.dumps(TABLE), "begin"),
        (saved(TABLE)[:-1], "95 bytes follow"),
        (saved(TABLE)[:-8], "88 bytes follow"),
        (saved(TABLE) + b"\0", "97 bytes follow"),
        (saved(TABLE)[:60], "bytes long"),
        (b"\x93NUMPY\x01\x00\xff\xff" + bytes(100), "bytes long"),
        (made(said(shape=(10**15, 6)), bytes(48)), "48 bytes follow"),
        (made(said(shape=(-1, 6)), bytes(48)), "whole numbers"),
        (made(said(shape=(1.0, 6)), bytes(48)), "whole numbers"),
        (made(said(shape=(True, 6)), bytes(48)), "whole numbers"),
        (made(said(shape=[1, 6]), bytes(48)), "whole numbers"),
        (made(said(shape=6), bytes(48)), "whole numbers"),
        (made(said(more=1), bytes(8)), "does not say"),
        (made(said()[:-1] + ", 'descr': '<f8'}", bytes(8)), "does not say"),
        (made("{'descr': '<f8', 'shape': (1, 1)}", bytes(8)), "does not say"),
        (made("[]"), "does not say"),
        (made("{**{}}"), "cannot be read"),
        (made("__import__('os')"), "cannot be read"),
        (made("{[]: 1}"), "cannot be read"),
        (made("{'descr': '<f8'"), "cannot be read"),
        (made("(" * 3000), "cannot be read"),
        (made("-" * 3000 + "1"), "cannot be read"),
        (made("{'\xe4': 1}"), "cannot be read"),
        (made("{'a\0': 1}"), "cannot be read"),
        (made(said(), bytes(8), end=""), "line feed"),
    ],
)
def test_a_broken_file_cannot_be_read(raw: bytes, say: str) -> None:
    with pytest.raises(Unparseable, match=say) as caught:
        read_npy(raw)
    assert caught.value.way_out


@pytest.mark.parametrize(
    ("raw", "say"),
    [
        (saved(TABLE, (2, 0)), "version 2.0"),
        (saved(TABLE, (3, 0)), "version 3.0"),
        (saved(TABLE.astype(">f8")), "little-endian doubles"),
        (saved(TABLE.astype("<f4")), "little-endian doubles"),
        (saved(TABLE.astype("<i8")), "little-endian doubles"),
        (saved(TABLE.astype("<c16")), "little-endian doubles"),
        (saved(np.array([[None]]), allow_pickle=True), "little-endian doubles"),
        (saved(np.zeros(2, [("a", "<f8")])), "little-endian doubles"),
        (saved(np.asfortranarray(TABLE)), "column by column"),
        (made(said(fortran_order=0), bytes(8)), "column by column"),
        (saved(TABLE[0]), "1 axes"),
        (saved(TABLE[None]), "3 axes"),
        (saved(np.float64(1.0)), "0 axes"),
    ],
)
def test_a_sound_file_of_another_kind_is_not_usable(raw: bytes, say: str) -> None:
    with pytest.raises(UnusableValue, match=say) as caught:
        read_npy(raw)
    assert caught.value.way_out


def test_any_changed_byte_of_the_header_is_told_or_harmless() -> None:
    raw = saved(TABLE)
    refused = 0
    for place in range(128):
        for byte in (0, 0x20, 0x30, 0xFF):
            changed = raw[:place] + bytes([byte]) + raw[place + 1 :]
            try:
                assert read_npy(changed).shape == (4, 3)
            except ServiceError:
                refused += 1
    assert refused > 250
