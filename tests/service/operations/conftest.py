"""Arms in memory, without a server: what operations are asked about.

Left out: HTTP.
"""

from collections.abc import Iterator
from contextlib import closing
from typing import Any

import pytest

from service.operations.arms import Arms
from service.settings import Settings
from service.storage.opening import open_storage
from service.wire.arms import ReadArm, read_arm

STRAIGHT = {"form": "xyz-fixed", "values": [0, 0, 0]}
ROW = {"joint": "revolute", "a": 400, "alpha": 0, "d": 0, "theta": 0, "travel": [-170, 170]}


@pytest.fixture
def document() -> dict[str, Any]:
    """A planar arm of two joints in millimetres and degrees."""
    return {
        "name": "two-turns",
        "title": "Made up",
        "convention": "standard",
        "units": "mm-deg",
        "rows": [dict(ROW), {**ROW, "a": 300}],
        "tools": {
            "pen": {"position": [0, 0, 120], "orientation": STRAIGHT, "number": 3},
            "7": {"position": [0, 0, 7], "orientation": STRAIGHT},
        },
        "default_tool": "flange",
        "frames": {
            "tray": {"position": [100, 0, 0], "orientation": STRAIGHT, "in": "base", "number": 5}
        },
        "status": "measured",
    }


@pytest.fixture
def arms(document: dict[str, Any]) -> Iterator[Arms[ReadArm]]:
    """A store that holds the arm."""
    with closing(open_storage(Settings(database=":memory:"))) as opened:
        stored = Arms(opened.arms, read_arm)
        stored.create(document)
        yield stored
