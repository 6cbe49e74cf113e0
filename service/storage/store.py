"""What all stores in SQL do alike: ask and write, and say in words why they cannot.

Left out: what is asked and written.
"""

from collections.abc import Iterator
from contextlib import contextmanager

import sqlalchemy as sa

from service.errors import StorageUnavailable
from service.storage.sql import unavailable, writing


class SqlStore:
    """A store over an engine whose database has the present layout.

    Parameters
    ----------
    what : is kept, in the plural.
    refuses_writes : why nothing can be written, or "" when it can.
    """

    def __init__(self, engine: sa.Engine, what: str, *, refuses_writes: str = "") -> None:
        self._engine, self._what, self._refuses_writes = engine, what, refuses_writes

    @contextmanager
    def _asking(self) -> Iterator[sa.Connection]:
        try:
            with self._engine.connect() as connection:
                yield connection
        except (sa.exc.DBAPIError, sa.exc.TimeoutError) as error:
            raise unavailable(error, f"{self._what} cannot be read") from error

    @contextmanager
    def _writing(self) -> Iterator[sa.Connection]:
        if self._refuses_writes:
            raise StorageUnavailable(
                f"nothing can be stored: {self._refuses_writes}",
                way_out="start the service with a database it can write to",
            )
        try:
            with writing(self._engine) as connection:
                yield connection
        except sa.exc.IntegrityError:
            raise
        except (sa.exc.DBAPIError, sa.exc.TimeoutError) as error:
            raise unavailable(error, f"{self._what} cannot be stored") from error
