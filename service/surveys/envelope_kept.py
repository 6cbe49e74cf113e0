"""An envelope as a piece of a survey keeps it: as JSON, whose doubles come back to the last bit.

Left out: making it (envelopes.py), and how it is told (operations/envelopes.py).
"""

from dataclasses import asdict
from typing import Any

import numpy as np

from kinematics.envelope.measures import Measure
from kinematics.envelope.shapes import Curve, Envelope, Extreme, Turn, View
from kinematics.reach.sample_summary import FirstAxis
from service.storage.ports import Document


def envelope_document(envelope: Envelope) -> Document:
    """Return an envelope as it is kept, arrays in it as they are."""
    kept = asdict(envelope)
    for view in (kept["section"], kept["plan"]):
        view["area"] = list(view["area"])
    kept["volume"] = list(kept["volume"])
    return kept


def envelope_from(kept: Document) -> Envelope:
    """Return the envelope that was kept, and came back as JSON.

    Examples
    --------
    >>> import orjson
    >>> curve = Curve(np.array([[0.0, 0.0], [0.1, 0.0], [0.1, 0.3]]), outer=True)
    >>> view = View("plan", (curve,), Measure(0.015, 1e-9), None, 1e-4, np.eye(3)[:2])
    >>> envelope = Envelope("tool", np.zeros(3), False, None, None, view, view, Measure(0.0, 0.0),
    ...                     True, (), ("flat",))
    >>> told = orjson.dumps(envelope_document(envelope), option=orjson.OPT_SERIALIZE_NUMPY)
    >>> back = envelope_from(orjson.loads(told))
    >>> back.plan.curves[0].points[2], back.plan.area.value, back.notes
    (array([0.1, 0.3]), 0.015, ('flat',))
    """
    axis, turn = kept["axis"], kept["turn"]
    return Envelope(
        point=kept["point"],
        point_in_flange=np.array(kept["point_in_flange"]),
        working=kept["working"],
        axis=None if axis is None else FirstAxis(*map(np.array, axis.values())),
        turn=None if turn is None else Turn(**turn),
        section=_view(kept["section"]),
        plan=_view(kept["plan"]),
        volume=Measure(*kept["volume"]),
        same_at_every_bearing=kept["same_at_every_bearing"],
        extremes=tuple(map(extreme_from, kept["extremes"])),
        notes=tuple(kept["notes"]),
    )


def _view(kept: Document) -> View:
    curves = [Curve(np.array(one["points"]), one["outer"]) for one in kept["curves"]]
    same: dict[str, Any] = {key: kept[key] for key in ("kind", "resolution", "chord")}
    return View(
        curves=tuple(curves),
        area=Measure(*kept["area"]),
        directions=np.array(kept["directions"]),
        **same,
    )


def extreme_from(kept: Document) -> Extreme:
    """Return an extreme that was kept, and came back as JSON."""
    arrays = {key: np.array(kept[key]) for key in ("joint_values", "position")}
    return Extreme(**{**kept, **arrays})
