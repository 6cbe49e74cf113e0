"""The cells of the Harbour Pump Works, an invented plant: arms to try everything with."""

import json
from importlib.resources import files
from typing import Any

from service.errors import NameTaken
from service.operations.arms import Arms

AUTHOR = "armspan"
REASON = "demonstration cell"


def documents() -> list[dict[str, Any]]:
    """Return the demonstration arms as documents, by file name."""
    folder = files(__package__).joinpath("arms")
    names = sorted(entry.name for entry in folder.iterdir() if entry.name.endswith(".json"))
    return [json.loads(folder.joinpath(name).read_text(encoding="utf-8")) for name in names]


def seed(arms: Arms[Any]) -> list[str]:
    """Store the demonstration arms that are not there yet, and return their names."""
    stored = []
    for document in documents():
        if arms.storage.head_number(document["name"]) is not None:
            continue
        try:
            arms.create(document, author=AUTHOR, reason=REASON, seed=True)
        except NameTaken:
            continue
        stored.append(document["name"])
    return stored
