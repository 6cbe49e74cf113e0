"""Numbers as integers, for controllers that have no others: multiplied by a scale, then rounded.

Left out: integers that come in (``controller.py``) and their places in a line (``fixed_text.py``).
"""

from typing import Any

import numpy as np

from service.errors import NumberDoesNotFit

_LARGEST = 2**63 - 1


def scaled(told: Any, scale: int) -> Any:
    """Return an answer with each number that has decimals multiplied by ``scale`` and rounded.

    What is an integer already, such as a code or the number of a joint, stays as it is.

    Raises
    ------
    NumberDoesNotFit : an integer beyond 64 bits.

    Examples
    --------
    >>> scaled({"code": 3, "x": -914.57007, "lost": [0.0, 1.0], "state": "near"}, 1000)
    {'code': 3, 'x': -914570, 'lost': [0, 1000], 'state': 'near'}
    """
    if isinstance(told, dict):
        return {key: scaled(value, scale) for key, value in told.items()}
    if isinstance(told, np.ndarray):
        return scaled(told.tolist(), scale)
    if isinstance(told, list | tuple):
        return [scaled(value, scale) for value in told]
    if not isinstance(told, float):
        return told
    whole = round(float(told) * scale)
    if abs(whole) > _LARGEST:
        raise NumberDoesNotFit(
            f"{told:.6g} times {scale} is beyond 64 bits",
            where=("scale",),
            location="query",
            value=scale,
            way_out="use a smaller scale",
        )
    return whole
