"""Survey processes of which it is noted how long each chunk took them. Measures nothing itself."""

from concurrent.futures import Executor, Future
from typing import Any, cast

from service.surveys.pool import OwnProcesses


class Watched(OwnProcesses):
    """Processes of which it is noted how long each chunk took them."""

    def __init__(self, count: int) -> None:
        super().__init__(count)
        self.seconds: list[float] = []

    def executor(self) -> Executor:
        """Return what takes pieces."""
        return cast(Executor, _Noting(super().executor(), self.seconds))


class _Noting:
    """An executor whose answers are noted."""

    def __init__(self, executor: Executor, seconds: list[float]) -> None:
        self._executor, self._seconds = executor, seconds

    def submit(self, *asked: Any) -> Future[Any]:
        """Hand on what is asked."""
        future = self._executor.submit(*asked)
        future.add_done_callback(self._note)
        return future

    def _note(self, done: Future[Any]) -> None:
        if not done.cancelled() and done.exception() is None:
            self._seconds.append(done.result()[1])
