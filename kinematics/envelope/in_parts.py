"""An envelope found in parts that do not depend on each other, in any order and any company.

Idea: what is asked on the way to an envelope does not depend on what is found. So it is gone once
without asking anything, noting what would be; then each piece can be found alone, wherever, and at
last the way is gone again with all that was found. The envelope is the one found at once, to the
last bit, for that is put together of the same pieces.

Source: none. Not covered: who finds the pieces, and how they are kept.
"""

from collections.abc import Mapping, Sequence
from functools import partial
from typing import Any

import numpy as np

from kinematics.arm import Arm
from kinematics.envelope.envelope import envelope_of
from kinematics.envelope.inquiry import Asked
from kinematics.envelope.sampled_views import AskedView
from kinematics.envelope.shapes import TOOL, Envelope
from kinematics.envelope.tolerances import FEWEST_CELLS, MOST_CELLS
from kinematics.number_checks import FloatArray


class EnvelopeInParts:
    """One envelope in parts; the parameters and errors are those of ``envelope_of``.

    Attributes
    ----------
    pieces : how many there are, by the name of what is asked; none of what is known without
        asking.

    Examples
    --------
    Three links in space: nothing tells their reach but asking.

    >>> from kinematics.table import Convention, JointKind, Row, Table, Travel
    >>> rows = [Row(JointKind.REVOLUTE, *row, 0.0, 0.0, travel=Travel(-1.0, 2.0)) for row in
    ...         ((0.1, np.pi / 2), (0.5, 0.3), (0.3, 0.0))]
    >>> arm = Arm("askew", Table(Convention.STANDARD, tuple(rows)))
    >>> parts = EnvelopeInParts(arm, np.eye(4), resolution=0.05)
    >>> parts.pieces
    {'section': 1, 'volume': 1, 'extremes': 1, 'plan': 1}
    >>> found = {name: [parts.piece(name, 0)] for name in parts.pieces}
    >>> whole = envelope_of(arm, np.eye(4), resolution=0.05)
    >>> parts.told(found).volume == whole.volume
    True
    >>> [round(metres, 4) for metres in parts.fitting]
    [0.0008, 0.3789]
    """

    def __init__(
        self,
        arm: Arm,
        tool_in_flange: FloatArray,
        *,
        working: bool = False,
        point: str = TOOL,
        resolution: float | None = None,
        most_cells: int = MOST_CELLS,
    ) -> None:
        self._envelope = partial(
            envelope_of,
            arm,
            tool_in_flange,
            working=working,
            point=point,
            resolution=resolution,
            most_cells=most_cells,
        )
        self._most_cells = most_cells
        self._asked: dict[str, Asked] = {}
        self._envelope(finds=self._note)
        self.pieces = {name: asked.pieces for name, asked in self._asked.items() if asked.pieces}

    def _note(self, name: str, asked: Asked) -> Any:
        self._asked[name] = asked
        return asked.unasked()

    def piece(self, name: str, number: int) -> Any:
        """Return one piece of what is asked by a name."""
        return self._asked[name].piece(number)

    @property
    def fitting(self) -> tuple[float, float]:
        """The finest and the coarsest resolution that all views take, m: 0 and infinite of none."""
        sizes = [asked.size for asked in self._asked.values() if isinstance(asked, AskedView)]
        least = max(sizes, default=0.0) / self._most_cells
        return least, min(sizes, default=np.inf) / FEWEST_CELLS

    def told(self, found: Mapping[str, Sequence[Any]]) -> Envelope:
        """Return the envelope, of all pieces by name, in their order."""
        return self._envelope(finds=lambda name, asked: asked.told(found.get(name, ())))
