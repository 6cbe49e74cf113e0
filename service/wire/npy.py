"""Tables of numbers as NPY files, version 1.0: a text header, then the bare doubles.

Read by hand and to the letter: no pickles, no other types, no other orders. Left out: what the
numbers mean.
"""

import ast
import struct

import numpy as np

from kinematics.table import FloatArray
from service.errors import ServiceError, Unparseable, UnusableValue

MEDIA_TYPE = "application/x-npy"
_MAGIC = b"\x93NUMPY"
_LONGEST_HEADER = 4096
_ALIGNED = 64
_KEYS = ["descr", "fortran_order", "shape"]


def read_npy(raw: bytes) -> FloatArray:
    """Return the table (rows, columns) of an NPY file, as a view on ``raw``.

    Raises
    ------
    Unparseable : no NPY file, or one that is broken: header, length.
    UnusableValue : a sound one of another version, type, order or number of axes.

    Examples
    --------
    >>> table = np.array([[1.0, 2.0], [3.0, 4.0], [5.0, 6.0]])
    >>> read_npy(npy_head(table.shape) + table.tobytes()).tolist()
    [[1.0, 2.0], [3.0, 4.0], [5.0, 6.0]]
    """
    if not raw:
        raise Unparseable("the body is empty", way_out="send an NPY file")
    if len(raw) < 10 or raw[:6] != _MAGIC:
        raise _broken("it does not begin as one")
    if raw[6:8] != b"\x01\x00":
        raise UnusableValue(
            f"the NPY file is of version {raw[6]}.{raw[7]}",
            value=f"{raw[6]}.{raw[7]}",
            way_out="send version 1.0",
        )
    (length,) = struct.unpack("<H", raw[8:10])
    begin = 10 + length
    if length > _LONGEST_HEADER or len(raw) < begin:
        raise _broken(f"its header is said to be {length} bytes long")
    rows, columns = _shape(raw[10:begin])
    if len(raw) - begin != rows * columns * 8:
        raise Unparseable(
            f"the header tells of {rows} x {columns} doubles, but {len(raw) - begin} bytes follow",
            value=len(raw) - begin,
            way_out=f"send {rows * columns * 8} bytes after the header",
        )
    table: FloatArray = np.frombuffer(raw, "<f8", offset=begin).reshape(rows, columns)
    return table


def npy_head(shape: tuple[int, ...]) -> bytes:
    """Return the bytes that stand before the doubles of an array in C order.

    Examples
    --------
    >>> len(npy_head((3, 7))) % 64
    0
    """
    text = f"{{'descr': '<f8', 'fortran_order': False, 'shape': {shape}, }}".encode("ascii")
    padding = -(10 + len(text) + 1) % _ALIGNED
    header = text + b" " * padding + b"\n"
    return _MAGIC + b"\x01\x00" + struct.pack("<H", len(header)) + header


def npy_bytes(array: FloatArray) -> memoryview:
    """Return the doubles of an array as they stand in the file, not copied where they stand so."""
    return np.ascontiguousarray(array, "<f8").reshape(-1).view(np.uint8).data


def _shape(header: bytes) -> tuple[int, int]:
    """Return the shape that the header tells, after all else in it has been found right."""
    said = _said(header)
    if said["descr"] != "<f8":
        raise UnusableValue(
            "the numbers are not little-endian doubles",
            value=said["descr"],
            way_out="send dtype '<f8'",
        )
    if said["fortran_order"] is not False:
        raise UnusableValue(
            "the numbers stand column by column",
            value=said["fortran_order"],
            way_out="send them row by row: C order, fortran_order False",
        )
    shape = said["shape"]
    if not isinstance(shape, tuple) or not all(type(n) is int and n >= 0 for n in shape):
        raise _broken("its shape is no tuple of whole numbers from 0")
    if len(shape) != 2:
        raise UnusableValue(
            f"the array has {len(shape)} axes",
            value=list(shape),
            way_out="send one row for each joint vector, one column for each joint",
        )
    return shape[0], shape[1]


def _said(header: bytes) -> dict[str, object]:
    try:
        tree = ast.parse(header.decode("ascii"), mode="eval").body
        said: object = ast.literal_eval(tree)
    except (ValueError, SyntaxError, TypeError, RecursionError, MemoryError):
        raise _broken("its header cannot be read") from None
    # The tree has every key, also one that stands twice.
    keys = len(tree.keys) if isinstance(tree, ast.Dict) else 0
    if not isinstance(said, dict) or keys != len(_KEYS) or {*said} != {*_KEYS}:
        raise _broken(f"its header does not say {', '.join(_KEYS)}")
    if not header.endswith(b"\n"):
        raise _broken("its header does not end with a line feed")
    return said


def _broken(why: str) -> ServiceError:
    return Unparseable(
        f"this is no NPY file that can be read: {why}",
        way_out="send what numpy.save writes for a table of doubles",
    )
