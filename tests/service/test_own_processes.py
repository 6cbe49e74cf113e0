"""Processes that are noted by who starts them, beside others that start in the same moment."""

import multiprocessing
import time
from concurrent.futures import ProcessPoolExecutor

from service.own_processes import NotingContext


def test_it_ends_its_own_and_no_others() -> None:
    other = multiprocessing.get_context("spawn").Process(target=time.sleep, args=(60,))
    other.start()
    own = NotingContext()
    pool = ProcessPoolExecutor(1, own)
    waiting = pool.submit(time.sleep, 60)
    while not waiting.running():
        time.sleep(0.01)
    (process,) = own.started
    own.end(pool)
    # Asked again: the executor's thread may be taking note of the same end at this moment, and
    # until it has, who asks beside it is told that the process lives.
    deadline = time.monotonic() + 10
    while process.is_alive():
        assert time.monotonic() < deadline
        time.sleep(0.01)
    assert own.started == []
    assert other.is_alive()
    other.kill()
    other.join()
    own.kill()
