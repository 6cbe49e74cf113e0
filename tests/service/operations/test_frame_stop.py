"""An estimate that nobody waits for any more gives up, so that a stop is not held up."""

import pytest

from service.bulk.threads import Threads
from service.errors import NotAvailable
from service.operations.frames import frames_answer
from service.wire.frames import FramesBody
from tests.made_relations import anywhere, body_of


def test_a_stop_ends_an_estimate() -> None:
    threads = Threads()
    body = FramesBody(body_of((30, 60), anywhere, estimate=True))
    asked: list[int] = []

    def between() -> None:
        asked.append(1)
        if len(asked) == 2:
            threads.stop()
        threads.refuse_if_stopping()

    with pytest.raises(NotAvailable):
        frames_answer(None, None, body, between)  # type: ignore[arg-type]  # neither is named
    assert len(asked) == 2
