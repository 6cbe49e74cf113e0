"""Stored cells as an operation: arms follow their cell, and what they could not follow is refused.

Left out: what cells have in common with arms (test_arms_operations), HTTP (tests/contract).
"""

import os
from collections.abc import Iterator
from concurrent.futures import ThreadPoolExecutor
from contextlib import closing
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from threading import Barrier
from typing import Any

import pytest
import sqlalchemy as sa

from kinematics.errors import InvalidCell, UnknownFrame
from service.errors import InUse, RevisionDiffers, StorageUnavailable, UnknownArm, UnusableValue
from service.operations.arms import Arms
from service.operations.cells import Cells
from service.operations.stored_refusals import version_of
from service.settings import Settings
from service.storage.opening import OpenStorage, open_storage
from service.storage.ports import CellMoved, Head
from service.wire.arms import ReadArm, read_arm
from tests.conftest import POSTGRES
from tests.service.storage.conftest import wipe

NOON = datetime(2026, 3, 4, 12, 0, 0, 5_000, tzinfo=UTC)
STRAIGHT = {"form": "xyz-fixed", "values": [0, 0, 0]}


def pose(*position: float) -> dict[str, Any]:
    return {"position": list(position), "orientation": STRAIGHT}


def cell(shelf: float = 500, **changes: Any) -> dict[str, Any]:
    """A cell with two arms; ``shelf`` is where its frame stands along x, in mm."""
    return {
        "name": "press-cell",
        "units": "mm-deg",
        "arms": {
            "press-arm": {"in": "world", "pose": pose(1000, 0, 0)},
            "other-arm": {"in": "shelf", "pose": pose(0, 250, 0)},
        },
        "frames": {"shelf": {"in": "world", **pose(shelf, 0, 0), "number": 7}},
        **changes,
    }


def arm(name: str = "press-arm", **changes: Any) -> dict[str, Any]:
    row = {"joint": "revolute", "a": 100, "alpha": 0, "d": 0, "theta": 0}
    document = {"name": name, "convention": "standard", "units": "mm-deg", "rows": [row]}
    return {**document, "cell": "press-cell", **changes}


@dataclass
class Plant:
    """Both stores of one service."""

    cells: Cells
    arms: Arms[ReadArm]


def plant_on(opened: OpenStorage) -> Plant:
    cells = Cells(opened.cells, opened.arms, read_arm, now=lambda: NOON)
    return Plant(cells, Arms(opened.arms, read_arm, cells, now=lambda: NOON))


@pytest.fixture
def plant() -> Iterator[Plant]:
    """A cell with an arm in it, and an arm by itself, in memory."""
    with closing(open_storage(Settings(database=":memory:"))) as opened:
        made = plant_on(opened)
        made.cells.create(cell())
        made.arms.create(arm())
        made.arms.create(arm("alone", cell=None))
        yield made


def shelf_of(plant: Plant, name: str, revision: int | None = None) -> float:
    """Return where an arm sees the shelf along world x, m."""
    seen = plant.arms.get(name, revision).read.arm
    return float(seen.frame_in_world("shelf")[0, 3])


def test_an_arm_has_base_and_frames_of_its_cell(plant: Plant) -> None:
    read = plant.arms.get("press-arm").read
    assert read.arm.base_in_world[:3, 3].tolist() == [1.0, 0.0, 0.0]
    assert read.arm.frame_name(7) == "shelf"
    assert read.document == {**arm(), "rows": read.document["rows"]}
    assert plant.arms.get("press-arm").record.cell == ("press-cell", 1)


def test_an_arm_follows_its_cell_in_the_same_step(plant: Plant) -> None:
    before = plant.arms.get("press-arm")
    alone = plant.arms.get("alone")
    plant.cells.replace("press-cell", cell(600), Head.ANY, author="Ada", reason="moved the shelf")
    after = plant.arms.get("press-arm")
    assert shelf_of(plant, "press-arm") == 0.6
    record = after.record
    assert (record.revision, record.cell) == (2, ("press-cell", 2))
    assert (record.author, record.created_at) == ("Ada", NOON)
    assert record.reason == "cell press-cell revision 2: moved the shelf"
    assert record.document == before.record.document
    assert version_of(record) != version_of(before.record)
    assert after.read.digests.table_digest == before.read.digests.table_digest
    assert after.read.digests.setup_digest != before.read.digests.setup_digest
    assert {**record.digests, "digest": record.digest} == after.read.digests._asdict()
    assert plant.arms.get("alone") is alone


def test_an_old_revision_of_an_arm_stays_in_the_cell_it_had(plant: Plant) -> None:
    first = plant.arms.get("press-arm")
    for shelf in (600, 700):
        plant.cells.replace("press-cell", cell(shelf), Head.ANY)
    assert [shelf_of(plant, "press-arm", n) for n in (1, 2, 3)] == [0.5, 0.6, 0.7]
    again = plant.arms.get("press-arm", 1)
    assert again.read.digests == first.read.digests
    (one, two, three) = plant.arms.revisions_page("press-arm", 0, 10).records
    assert [record.cell for record in (one, two, three)] == [("press-cell", n) for n in (1, 2, 3)]


def test_the_same_cell_again_is_another_revision_and_another_digest_of_its_arms(
    plant: Plant,
) -> None:
    """The set-up's digest covers the cell's revision, whatever is in it."""
    before = plant.arms.get("press-arm").read.digests
    plant.cells.replace("press-cell", cell(), Head.ANY)
    after = plant.arms.get("press-arm").read.digests
    assert before.setup_digest != after.setup_digest


def test_a_writer_of_an_arm_learns_that_its_cell_was_changed(plant: Plant) -> None:
    known = version_of(plant.arms.get("press-arm").record)
    plant.cells.replace("press-cell", cell(600), Head.ANY)
    with pytest.raises(RevisionDiffers):
        plant.arms.replace("press-arm", arm(title="mine"), {known})


def test_arms_in_a_chain_of_placements(plant: Plant) -> None:
    plant.arms.create(arm("other-arm"))
    assert plant.arms.get("other-arm").read.arm.base_in_world[:3, 3].tolist() == [0.5, 0.25, 0.0]
    plant.cells.replace("press-cell", cell(900), Head.ANY)
    assert plant.arms.get("other-arm").read.arm.base_in_world[:3, 3].tolist() == [0.9, 0.25, 0.0]


def test_an_unknown_cell_is_refused_with_the_nearest(plant: Plant) -> None:
    for store in (plant.arms.create, lambda given: plant.arms.replace("new", given, Head.ABSENT)):
        with pytest.raises(UnknownArm) as caught:
            store(arm("new", cell="pres-cell"))
        error = caught.value
        assert (error.where, error.value, error.status) == (("cell",), "pres-cell", 422)
        assert error.way_out == 'did you mean "press-cell"?'
    with pytest.raises(UnknownArm):
        plant.arms.create(arm("new", cell="../x" * 100))


def test_a_base_beside_the_cells_is_refused_and_one_that_is_not_placed_keeps_its_own(
    plant: Plant,
) -> None:
    with pytest.raises(UnusableValue) as caught:
        plant.arms.replace("press-arm", arm(base=pose(1, 2, 3)), Head.ANY)
    assert caught.value.where == ("base",)
    stored = plant.arms.create(arm("guest", base=pose(1, 2, 3)))
    assert stored.read.arm.base_in_world[:3, 3].tolist() == [0.001, 0.002, 0.003]
    assert shelf_of(plant, "guest") == 0.5


# what is done to the cell: words of what is refused, and where it points
UNFOLLOWABLE: dict[str, tuple[dict[str, Any], str, tuple[str, ...]]] = {
    "the frame an arm's own stands in is gone": (
        {"frames": {}, "arms": {}},
        "arm hanger stands in this cell and could not any more: there is no frame 'shelf'",
        ("frames",),
    ),
    "an arm with a base of its own is placed": (
        {"arms": {**cell()["arms"], "guest": {"pose": pose(0, 0, 0)}}},
        "arm guest stands in this cell and could not any more: the base of guest is given here",
        ("arms",),
    ),
    "an arm is put on a flange": (
        {"arms": {**cell()["arms"], "press-arm": {"in": "other-arm.flange", **pose(0, 0, 0)}}},
        "press-arm carried by other-arm.flange",
        ("arms",),
    ),
}


@pytest.mark.parametrize("case", UNFOLLOWABLE)
def test_what_an_arm_could_not_follow_is_refused_and_nothing_written(
    plant: Plant, case: str
) -> None:
    change, words, where = UNFOLLOWABLE[case]
    plant.arms.create(arm("guest", base=pose(1, 2, 3)))
    plant.arms.create(arm("hanger", frames={"hook": {"in": "shelf", **pose(0, 0, 10)}}))
    with pytest.raises(UnusableValue) as caught:
        plant.cells.replace("press-cell", cell(**change), Head.ANY)
    assert words in caught.value.say
    assert caught.value.where == where
    assert "arm first" in caught.value.way_out
    assert plant.cells.get("press-cell").record.revision == 1
    assert plant.arms.get("hanger").record.revision == 1


def test_an_own_frame_may_stand_in_one_of_the_cell(plant: Plant) -> None:
    plant.arms.create(arm("hanger", frames={"hook": {"in": "shelf", **pose(0, 0, 10)}}))
    plant.cells.replace("press-cell", cell(800), Head.ANY)
    hanger = plant.arms.get("hanger").read.arm
    assert hanger.frame_in_world("hook")[:3, 3].tolist() == [0.8, 0.0, 0.01]


def test_an_own_frame_goes_before_one_of_the_cell(plant: Plant) -> None:
    own = {"shelf": {"in": "world", **pose(5, 0, 0), "number": 7}}
    plant.arms.replace("press-arm", arm(frames=own), Head.ANY)
    assert shelf_of(plant, "press-arm") == 0.005
    tool = {"shelf": {**pose(0, 0, 9), "number": 7}}
    plant.arms.replace("press-arm", arm(tools=tool), Head.ANY)
    with pytest.raises(UnknownFrame):
        plant.arms.get("press-arm").read.arm.frame_name("shelf")


def test_a_cell_in_use_is_not_removed(plant: Plant) -> None:
    plant.arms.create(arm("second"))
    with pytest.raises(InUse, match="press-arm, second") as caught:
        plant.cells.remove("press-cell")
    assert (caught.value.code, caught.value.location) == ("in-use", "path")
    for name in ("press-arm", "second"):
        plant.arms.remove(name)
    plant.cells.remove("press-cell")
    with pytest.raises(UnknownArm):
        plant.cells.get("press-cell")
    # What stood in it is still to be had, in the cell it had.
    assert shelf_of(plant, "press-arm", 1) == 0.5
    with pytest.raises(UnknownArm):
        plant.arms.create(arm())


def test_an_arm_that_is_carried_cannot_name_the_cell(plant: Plant) -> None:
    carried = {"carrier": pose(0, 0, 0), "hand": {"in": "carrier.flange", **pose(0, 0, 1)}}
    known = version_of(plant.cells.get("press-cell").record)
    plant.cells.replace("press-cell", cell(arms={**cell()["arms"], **carried}), {known})
    with pytest.raises(InvalidCell) as caught:
        plant.arms.create(arm("hand"))
    assert caught.value.where == ("cell",)


def test_a_cell_that_is_not_there_is_not_replaced(plant: Plant) -> None:
    for expected in (Head.ANY, {"1-00000000"}):
        with pytest.raises(RevisionDiffers, match="no cell"):
            plant.cells.replace("new-cell", cell(name="new-cell"), expected)
    assert plant.cells.replace("new-cell", cell(name="new-cell"), Head.ABSENT).record.revision == 1


def test_a_write_is_tried_again_while_others_change_the_cell(
    plant: Plant, monkeypatch: pytest.MonkeyPatch
) -> None:
    write, refusals = plant.cells.storage.write, iter([CellMoved(), CellMoved()])

    def late(*given: Any, **more: Any) -> Any:
        for refusal in refusals:
            raise refusal
        return write(*given, **more)

    monkeypatch.setattr(plant.cells.storage, "write", late)
    assert plant.cells.replace("press-cell", cell(600), Head.ANY).record.revision == 2

    def never(*given: Any, **more: Any) -> Any:
        raise CellMoved

    monkeypatch.setattr(plant.cells.storage, "write", never)
    with pytest.raises(StorageUnavailable, match="keep changing"):
        plant.cells.replace("press-cell", cell(600), Head.ANY)


# --- two services on one database ----------------------------------------------------------


@pytest.fixture(params=["sqlite", "postgresql"])
def database(request: pytest.FixtureRequest, tmp_path: Path) -> Iterator[str]:
    """A database that two processes may open."""
    if request.param == "sqlite":
        yield str(tmp_path / "arms.db")
        return
    url = os.environ.get(POSTGRES, "")
    if not url:
        pytest.skip(f"{POSTGRES} names no PostgreSQL database to test on")
    engine = sa.create_engine(sa.make_url(url).set(drivername="postgresql+psycopg"))
    with engine.begin() as connection:
        wipe(connection)
    yield url
    engine.dispose()


def test_a_change_of_the_cell_is_seen_by_the_very_next_question_elsewhere(database: str) -> None:
    settings = Settings(database=database)
    with (
        closing(open_storage(settings)) as one,
        closing(open_storage(settings, serving=False)) as two,
    ):
        here, there = plant_on(one), plant_on(two)
        here.cells.create(cell())
        here.arms.create(arm())
        for number in range(2, 12):
            asking, writing = (here, there) if number % 2 else (there, here)
            version = version_of(asking.arms.get("press-arm").record)
            writing.cells.replace("press-cell", cell(number * 100), Head.ANY)
            assert shelf_of(asking, "press-arm") == pytest.approx(number / 10)
            assert version_of(asking.arms.get("press-arm").record) != version


def test_cells_and_arms_written_at_once_from_two_services_all_arrive(database: str) -> None:
    settings = Settings(database=database)
    with (
        closing(open_storage(settings)) as one,
        closing(open_storage(settings, serving=False)) as two,
    ):
        plants, each = [plant_on(one), plant_on(two)], 5
        plants[0].cells.create(cell())
        for name in ("press-arm", "other-arm"):
            plants[0].arms.create(arm(name))
        start = Barrier(4)

        def work(writer: int) -> None:
            start.wait()
            plant = plants[writer % 2]
            for step in range(each):
                if writer < 2:
                    plant.cells.replace("press-cell", cell(step), Head.ANY)
                else:
                    name = ("press-arm", "other-arm")[writer - 2]
                    plant.arms.replace(name, arm(name, title=f"{step}"), Head.ANY)

        with ThreadPoolExecutor(4) as pool:
            list(pool.map(work, range(4)))
        newest = plants[1].cells.get("press-cell").record.revision
        assert newest == 1 + 2 * each
        for name in ("press-arm", "other-arm"):
            head = plants[1].arms.get(name).record
            assert head.cell == ("press-cell", newest)
            assert head.revision == 1 + 3 * each
            assert head.document["title"] == f"{each - 1}"
