"""The cells of the Harbour Pump Works, an invented plant: arms to try everything with."""

import json
from importlib.resources import files
from typing import Any

from service.errors import NameTaken
from service.operations.stored import Stored
from service.storage.ports import Kind

AUTHOR = "armspan"
REASON = "demonstration cell"


def documents(kind: Kind = "arm") -> list[dict[str, Any]]:
    """Return the demonstration arms, or cells, as documents, by file name."""
    folder = files(__package__).joinpath(f"{kind}s")
    names = sorted(entry.name for entry in folder.iterdir() if entry.name.endswith(".json"))
    return [json.loads(folder.joinpath(name).read_text(encoding="utf-8")) for name in names]


def seed(cells: Stored[Any], arms: Stored[Any]) -> list[str]:
    """Store the demonstration cells and arms that are not there yet, and return their names."""
    stored = []
    # Cells first: arms name them.
    for place in (cells, arms):
        for document in documents(place.kind):
            if place.storage.head_number(document["name"]) is not None:
                continue
            try:
                place.create(document, author=AUTHOR, reason=REASON, seed=True)
            except NameTaken:
                continue
            stored.append(document["name"])
    return stored
