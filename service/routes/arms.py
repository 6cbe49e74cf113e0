"""Stored arms over HTTP, and what is particular to them among stored documents.

Left out: what all stored documents have in common (stored.py).
"""

from service.routes.stored import StoredRoutes
from service.routes.stored_words import StoredKind
from service.wire.models import Arm
from service.wire.stored_arms import (
    ArmListAnswer,
    RevisionListAnswer,
    StoredArmAnswer,
    arm_list_answer,
    stored_arm_answer,
)

router = StoredRoutes(
    StoredKind(
        kind="arm",
        a="an arm",
        document=Arm,
        answer=StoredArmAnswer,
        list_answer=ArmListAnswer,
        revisions_answer=RevisionListAnswer,
        shown=stored_arm_answer,
        listed=arm_list_answer,
        on_writing=" An arm that names a cell has base and frames from it, and gets its next "
        "revision whenever the cell does.",
    )
).router()
