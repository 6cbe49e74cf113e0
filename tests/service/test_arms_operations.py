"""Stored arms as an operation: what is refused and how, and what is kept from reading twice."""

from collections.abc import Iterator
from concurrent.futures import ThreadPoolExecutor
from contextlib import closing
from datetime import UTC, datetime
from pathlib import Path
from threading import Barrier
from typing import Any

import pytest

from kinematics.errors import KinematicsError
from service.errors import (
    NameTaken,
    RevisionDiffers,
    StorageUnavailable,
    UnknownArm,
    UnknownRevision,
    UnusableValue,
)
from service.operations.arms import Arms
from service.operations.stored_refusals import version_of
from service.settings import Settings
from service.storage.opening import open_storage
from service.storage.ports import Head
from service.wire.arms import ReadArm, read_arm
from service.wire.cells import CellOf

NOON = datetime(2026, 3, 4, 12, 0, 0, 5_000, tzinfo=UTC)


def document(name: str = "press-arm", **changes: Any) -> dict[str, Any]:
    row = {"joint": "revolute", "a": 100, "alpha": 90, "d": 0.1, "theta": 0}
    return {"name": name, "convention": "standard", "units": "mm-deg", "rows": [row], **changes}


class Reading:
    """``read_arm`` that counts."""

    def __init__(self) -> None:
        self.count = 0

    def __call__(self, given: object, cell_of: CellOf) -> ReadArm:
        self.count += 1
        return read_arm(given, cell_of)


@pytest.fixture
def reading() -> Reading:
    return Reading()


@pytest.fixture
def arms(reading: Reading) -> Iterator[Arms[ReadArm]]:
    with closing(open_storage(Settings(database=":memory:"))) as opened:
        yield Arms(opened.arms, reading, now=lambda: NOON)


def test_a_created_arm_is_there_with_all_that_was_said(arms: Arms[ReadArm]) -> None:
    created = arms.create(document(), author="Ada", reason="new line")
    got = arms.get("press-arm")
    assert got.record == created.record
    assert got.record.revision == 1
    assert got.record.document == document()
    assert (got.record.author, got.record.reason) == ("Ada", "new line")
    assert got.record.created_at == NOON
    digests = read_arm(document()).digests
    assert {**got.record.digests, "digest": got.record.digest} == digests._asdict()
    assert version_of(got.record) == f"1-{digests.digest}"
    assert got.read.arm.name == "press-arm"
    assert arms.count() == 1


def test_a_taken_name_is_refused_and_the_way_out_said(arms: Arms[ReadArm]) -> None:
    arms.create(document())
    with pytest.raises(NameTaken) as caught:
        arms.create(document(title="another"))
    assert caught.value.where == ("name",)
    assert caught.value.value == "press-arm"
    assert "PUT /v1/arms/press-arm" in caught.value.way_out
    assert arms.get("press-arm").record.document == document()


def test_an_arm_that_cannot_be_read_is_not_stored(arms: Arms[ReadArm]) -> None:
    mirrored = [[-1, 0, 0, 0], [0, 1, 0, 0], [0, 0, 1, 0], [0, 0, 0, 1]]
    with pytest.raises(KinematicsError):
        arms.create(document(base={"matrix": mirrored}))
    assert arms.count() == 0


@pytest.mark.parametrize("name", ["other", "Press-Arm", "press-arm ", "", "x" * 49, "a\x00b"])
def test_what_is_in_no_store_is_an_unknown_arm(arms: Arms[ReadArm], name: str) -> None:
    arms.create(document())
    for ask in (
        lambda: arms.get(name),
        lambda: arms.get(name, 1),
        lambda: arms.revisions_page(name, 0, 10),
        lambda: arms.remove(name),
    ):
        with pytest.raises(UnknownArm) as caught:
            ask()
        assert caught.value.location == "path"


@pytest.mark.parametrize("revision", [0, -1, 2, 2**31, 10**30])
def test_a_revision_that_never_was_is_unknown(arms: Arms[ReadArm], revision: int) -> None:
    arms.create(document())
    with pytest.raises(UnknownRevision):
        arms.get("press-arm", revision)


def test_a_replacement_gets_the_next_number_and_the_old_one_stays(arms: Arms[ReadArm]) -> None:
    first = arms.create(document())
    second = arms.replace("press-arm", document(title="2"), {version_of(first.record)})
    third = arms.replace("press-arm", document(title="3"), Head.ANY)
    assert [second.record.revision, third.record.revision] == [2, 3]
    assert arms.get("press-arm").record == third.record
    titles = [arms.get("press-arm", n).record.document.get("title") for n in (1, 2, 3)]
    assert titles == [None, "2", "3"]


def test_one_of_several_expected_versions_is_enough(arms: Arms[ReadArm]) -> None:
    first = version_of(arms.create(document()).record)
    assert arms.replace("press-arm", document(), {"9-00000000", first}).record.revision == 2


@pytest.mark.parametrize("expected", [{"1-00000000"}, {"2-{digest}"}, {"1"}, set()])
def test_another_version_is_refused_with_the_present_one(
    arms: Arms[ReadArm], expected: set[str]
) -> None:
    head = arms.create(document()).record
    with pytest.raises(RevisionDiffers) as caught:
        arms.replace(
            "press-arm", document(title="2"), {tag.format(digest=head.digest) for tag in expected}
        )
    assert version_of(head) in caught.value.say
    assert caught.value.where == ("if-match",)
    assert arms.get("press-arm").record == head


@pytest.mark.parametrize("expected", [{"1-00000000"}, Head.ANY])
def test_replacing_what_is_not_there_is_refused(
    arms: Arms[ReadArm], expected: set[str] | Head
) -> None:
    with pytest.raises(RevisionDiffers, match="no arm"):
        arms.replace("press-arm", document(), expected)
    assert arms.count() == 0


def test_create_only_stores_once(arms: Arms[ReadArm]) -> None:
    assert arms.replace("press-arm", document(), Head.ABSENT).record.revision == 1
    with pytest.raises(RevisionDiffers) as caught:
        arms.replace("press-arm", document(), Head.ABSENT)
    assert caught.value.where == ("if-none-match",)


def test_a_document_of_another_name_is_refused_at_its_name(arms: Arms[ReadArm]) -> None:
    arms.create(document())
    with pytest.raises(UnusableValue) as caught:
        arms.replace("press-arm", document("other"), Head.ANY)
    assert caught.value.where == ("name",)
    assert arms.get("press-arm").record.revision == 1
    with pytest.raises(UnknownArm):
        arms.get("other")


def test_a_removed_arm_is_gone_and_its_revisions_stay(arms: Arms[ReadArm]) -> None:
    first = arms.create(document())
    arms.get("press-arm")
    arms.remove("press-arm", author="Bo", reason="scrapped")
    with pytest.raises(UnknownArm):
        arms.get("press-arm")
    with pytest.raises(UnknownArm):
        arms.remove("press-arm")
    assert arms.get("press-arm", 1).record == first.record
    (record,) = arms.revisions_page("press-arm", 0, 10).records
    assert record.hidden is not None
    assert (record.hidden.author, record.hidden.reason) == ("Bo", "scrapped")
    assert arms.create(document()).record.revision == 2


def test_removing_honours_the_version(arms: Arms[ReadArm]) -> None:
    head = arms.create(document()).record
    with pytest.raises(RevisionDiffers):
        arms.remove("press-arm", {"7-00000000"})
    assert arms.count() == 1
    arms.remove("press-arm", {version_of(head)})
    assert arms.count() == 0


def test_pages_say_whether_more_follow(arms: Arms[ReadArm]) -> None:
    for name in ("c", "a", "b"):
        arms.create(document(name))
    page = arms.page("", 2)
    assert ([record.name for record in page.records], page.more) == (["a", "b"], True)
    page = arms.page("b", 2)
    assert ([record.name for record in page.records], page.more) == (["c"], False)
    assert arms.page("", 3).more is False
    arms.replace("a", document("a"), Head.ANY)
    page = arms.revisions_page("a", 0, 1)
    assert ([record.revision for record in page.records], page.more) == ([1], True)
    page = arms.revisions_page("a", 2, 1)
    assert (page.records, page.more) == ([], False)


def test_a_revision_is_read_once(arms: Arms[ReadArm], reading: Reading) -> None:
    arms.create(document())
    reading.count = 0
    first = arms.get("press-arm")
    assert arms.get("press-arm") is first
    assert arms.get("press-arm", 1) is first
    assert reading.count == 1
    arms.replace("press-arm", document(title="2"), Head.ANY)
    assert arms.get("press-arm").record.revision == 2


def test_the_newest_revision_is_seen_when_another_process_wrote_it(tmp_path: Path) -> None:
    settings = Settings(database=str(tmp_path / "arms.db"))
    with closing(open_storage(settings)) as opened:
        arms = Arms(opened.arms, read_arm)
        arms.create(document())
        assert arms.get("press-arm").record.revision == 1
        with closing(open_storage(settings, serving=False)) as beside:
            Arms(beside.arms, read_arm).replace("press-arm", document(), Head.ANY)
        assert arms.get("press-arm").record.revision == 2


def test_seeds_go_where_users_cannot_write() -> None:
    with closing(open_storage(Settings(database="/proc/armspan/arms.db"))) as opened:
        arms = Arms(opened.arms, read_arm)
        with pytest.raises(StorageUnavailable):
            arms.create(document())
        arms.create(document(), seed=True)
        assert arms.count() == 1
        with pytest.raises(StorageUnavailable):
            arms.remove("press-arm")


def test_of_two_replacements_at_once_one_wins_and_nothing_is_lost(tmp_path: Path) -> None:
    with closing(open_storage(Settings(database=str(tmp_path / "arms.db")))) as opened:
        arms = Arms(opened.arms, read_arm)
        version = version_of(arms.create(document()).record)
        start = Barrier(2)

        def replace(writer: str) -> str | None:
            start.wait()
            try:
                stored = arms.replace("press-arm", document(title=writer), {version})
            except RevisionDiffers:
                return None
            return version_of(stored.record)

        with ThreadPoolExecutor(2) as pool:
            for step in range(20):
                results = list(pool.map(replace, ("left", "right")))
                assert results.count(None) == 1
                winner = ("left", "right")[results.index(None) - 1]
                head = arms.get("press-arm").record
                assert head.revision == step + 2
                assert head.document["title"] == winner
                version = version_of(head)
