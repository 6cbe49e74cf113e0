"""How long surveys are kept that are over: for as many days as the operator says, or for ever.

Left out: when it is looked after (runner.py), and surveys that somebody removes.
"""

import logging
from collections.abc import Callable
from datetime import datetime, timedelta
from time import monotonic

from service.storage.ports import SurveyStorage

_LOG = logging.getLogger(__name__)

_EVERY_S = 3600.0
_AT_ONCE = 100
"""Removed in one turn: others want to write meanwhile."""


class Retention:
    """Removes what has been kept long enough; 0 days: nothing."""

    def __init__(self, store: SurveyStorage, days: int, now: Callable[[], datetime]) -> None:
        self._store, self._now, self.days = store, now, days
        self._next = float("-inf")

    def tidy(self) -> None:
        """Remove what is too old, if it is time to look.

        Raises
        ------
        StorageUnavailable : the store fails; then it is tried again.
        """
        if not self.days or monotonic() < self._next:
            return
        old = self._store.over_before(self._now() - timedelta(days=self.days), _AT_ONCE)
        for survey in old:
            self._store.remove(survey)
        if old:
            _LOG.info("%d surveys older than %d days were removed", len(old), self.days)
        if len(old) < _AT_ONCE:
            self._next = monotonic() + _EVERY_S
