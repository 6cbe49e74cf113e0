"""What the stores promise of arms that stand in a cell, held on every database.

Left out: what each store promises by itself (test_storage_contract).
"""

from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from datetime import UTC, datetime
from threading import Barrier
from typing import Any

import pytest

from service.storage.opening import OpenStorage
from service.storage.ports import (
    CellInUse,
    CellMoved,
    CellRevision,
    Draft,
    Following,
    Head,
    HeadDiffers,
    Hiding,
)

Drafts = Callable[..., Draft]
HIDING = Hiding("Bo", "scrapped", datetime(2026, 5, 6, 7, 8, 9, tzinfo=UTC))
CELL = "press-cell"


def in_cell(draft: Drafts, name: str, cell_revision: int, **changes: Any) -> Draft:
    return draft(name, cell=CellRevision(CELL, cell_revision), **changes)


@pytest.fixture
def stocked(opened: OpenStorage, draft: Drafts) -> OpenStorage:
    """A cell with two arms in it, and an arm by itself."""
    opened.cells.write(draft(CELL), Head.ABSENT)
    for name in ("right", "left"):
        opened.arms.write(in_cell(draft, name, 1), Head.ABSENT)
    opened.arms.write(draft("alone"), Head.ABSENT)
    return opened


def standing(opened: OpenStorage) -> list[tuple[str, int, CellRevision | None]]:
    return [(arm.name, arm.revision, arm.cell) for arm in opened.arms.standing_in(CELL)]


def test_the_arms_of_a_cell_are_told_by_name(stocked: OpenStorage, draft: Drafts) -> None:
    assert standing(stocked) == [("left", 1, (CELL, 1)), ("right", 1, (CELL, 1))]
    head, alone = stocked.arms.head("left"), stocked.arms.head("alone")
    assert head is not None
    assert alone is not None
    assert (head.cell, alone.cell) == (CellRevision(CELL, 1), None)
    assert list(stocked.arms.standing_in("other-cell")) == []
    # An arm that left, and one that was removed, stand there no more; their old revisions do.
    stocked.arms.write(draft("left"), 1)
    stocked.arms.hide("right", 1, HIDING)
    assert standing(stocked) == []
    old = stocked.arms.revision("left", 1)
    assert old is not None
    assert old.cell == (CELL, 1)


def test_a_cell_is_written_with_its_arms(stocked: OpenStorage, draft: Drafts) -> None:
    following = [Following(in_cell(draft, name, 2), 1) for name in ("left", "right")]
    assert stocked.cells.write(draft(CELL), 1, following=following).revision == 2
    assert standing(stocked) == [("left", 2, (CELL, 2)), ("right", 2, (CELL, 2))]
    assert stocked.arms.head_number("alone") == 1


@pytest.mark.parametrize(
    "following",
    [
        [],
        [("left", 1)],
        [("left", 1), ("right", 1), ("alone", 1)],
        [("left", 2), ("right", 1)],
        [("left", 1), ("other", 1)],
    ],
    ids=["none", "one missing", "one too many", "another head", "another arm"],
)
def test_a_cell_is_not_written_with_other_arms_than_stand_in_it(
    stocked: OpenStorage, draft: Drafts, following: list[tuple[str, int]]
) -> None:
    before = standing(stocked)
    prepared = [Following(in_cell(draft, name, 2), head) for name, head in following]
    with pytest.raises(CellMoved):
        stocked.cells.write(draft(CELL), 1, following=prepared)
    assert stocked.cells.head_number(CELL) == 1
    assert standing(stocked) == before
    assert stocked.arms.count() == 3


def test_another_head_of_the_cell_than_expected_leaves_its_arms_alone(
    stocked: OpenStorage, draft: Drafts
) -> None:
    following = [Following(in_cell(draft, name, 2), 1) for name in ("left", "right")]
    with pytest.raises(HeadDiffers):
        stocked.cells.write(draft(CELL), 7, following=following)
    assert standing(stocked) == [("left", 1, (CELL, 1)), ("right", 1, (CELL, 1))]


@pytest.mark.parametrize("number", [0, 2])
def test_an_arm_is_not_written_in_another_revision_than_the_newest(
    stocked: OpenStorage, draft: Drafts, number: int
) -> None:
    with pytest.raises(CellMoved):
        stocked.arms.write(in_cell(draft, "new", number), Head.ABSENT)
    with pytest.raises(CellMoved):
        stocked.arms.write(in_cell(draft, "left", number), 1)
    assert stocked.arms.head("new") is None
    assert stocked.arms.head_number("left") == 1


def test_an_arm_is_not_written_in_a_cell_that_is_not_there(
    stocked: OpenStorage, draft: Drafts
) -> None:
    stocked.cells.write(draft("gone"), Head.ABSENT)
    stocked.cells.hide("gone", 1, HIDING)
    for name in ("gone", "never"):
        with pytest.raises(CellMoved):
            stocked.arms.write(draft("new", cell=CellRevision(name, 1)), Head.ABSENT)


def test_a_cell_in_use_cannot_be_hidden(stocked: OpenStorage, draft: Drafts) -> None:
    with pytest.raises(CellInUse) as caught:
        stocked.cells.hide(CELL, 1, HIDING)
    assert caught.value.arms == ["left", "right"]
    assert stocked.cells.head_number(CELL) == 1
    stocked.arms.hide("left", 1, HIDING)
    stocked.arms.write(draft("right"), 1)
    stocked.cells.hide(CELL, 1, HIDING)
    assert stocked.cells.head(CELL) is None
    # The number of the cell is never used again, so its arms' old revisions stay true.
    assert stocked.cells.write(draft(CELL), Head.ABSENT).revision == 2


def test_writers_of_a_cell_and_of_its_arms_leave_every_arm_in_the_newest_cell(
    stocked: OpenStorage, draft: Drafts
) -> None:
    """Each reads, and writes what it read of; what comes late is refused, whoever is first."""
    writers, each = 4, 8
    start = Barrier(writers)

    def write_cell() -> int:
        head = stocked.cells.head_number(CELL)
        assert head is not None
        arms = stocked.arms.standing_in(CELL)
        following = [Following(in_cell(draft, a.name, head + 1), a.revision) for a in arms]
        return stocked.cells.write(draft(CELL), head, following=following).revision

    def write_arm(name: str) -> int:
        head = stocked.cells.head_number(CELL)
        assert head is not None
        return stocked.arms.write(in_cell(draft, name, head), Head.ANY).revision

    def work(writer: int) -> int:
        start.wait()
        done = 0
        for _ in range(each):
            try:
                write_cell() if writer < 2 else write_arm(("left", "right")[writer - 2])
                done += 1
            except (CellMoved, HeadDiffers):
                pass
        return done

    with ThreadPoolExecutor(writers) as pool:
        done = list(pool.map(work, range(writers)))
    newest = stocked.cells.head_number(CELL)
    assert newest == 1 + done[0] + done[1]
    assert [cell for _, _, cell in standing(stocked)] == [(CELL, newest)] * 2
    assert sum(revision - 1 for _, revision, _ in standing(stocked)) == (
        2 * (done[0] + done[1]) + done[2] + done[3]
    )
    assert sum(done) > 0
