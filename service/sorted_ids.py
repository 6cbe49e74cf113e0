"""Ids that sort by the time of their making: 12 hex digits of milliseconds, 8 by chance.

Left out: what bears them.
"""

import re
import secrets
from datetime import datetime

ID = re.compile(r"[0-9a-f]{20}", re.ASCII)


def new_id(at: datetime) -> str:
    """Return an id that nothing else has.

    Examples
    --------
    >>> from datetime import UTC
    >>> new_id(datetime(2026, 1, 2, tzinfo=UTC)) < new_id(datetime(2026, 1, 3, tzinfo=UTC))
    True
    """
    return f"{round(at.timestamp() * 1000):012x}{secrets.token_hex(4)}"
