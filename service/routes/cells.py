"""Stored cells over HTTP, and what is particular to them among stored documents.

Left out: what all stored documents have in common (stored.py).
"""

from service.routes.stored import StoredRoutes
from service.routes.stored_words import StoredKind
from service.wire.models import Cell
from service.wire.stored_cells import (
    CellListAnswer,
    CellRevisionListAnswer,
    StoredCellAnswer,
    cell_list_answer,
    stored_cell_answer,
)

router = StoredRoutes(
    StoredKind(
        kind="cell",
        a="a cell",
        document=Cell,
        answer=StoredCellAnswer,
        list_answer=CellListAnswer,
        revisions_answer=CellRevisionListAnswer,
        shown=stored_cell_answer,
        listed=cell_list_answer,
        on_writing=" Each arm that names the cell gets its next revision in the same step, so "
        "that its digest and ETag follow; a change that one of them could not follow is refused.",
        on_removing=" Refused while arms name the cell.",
    )
).router()
