"""A store in memory, with an arm in it."""

from collections.abc import Iterator
from contextlib import closing

import pytest

from service.operations.arms import Arms
from service.settings import Settings
from service.storage.opening import OpenStorage, open_storage
from service.wire.arms import ReadArm, read_arm
from tests.service.surveys.surveys_made import ARM


@pytest.fixture
def opened() -> Iterator[OpenStorage]:
    with closing(open_storage(Settings(database=":memory:"))) as storage:
        yield storage


@pytest.fixture
def arms(opened: OpenStorage) -> Arms[ReadArm]:
    stored = Arms(opened.arms, read_arm)
    stored.create(ARM)
    return stored
