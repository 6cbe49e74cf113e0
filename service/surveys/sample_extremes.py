"""How far the samples of a piece get, as a piece keeps it, and how far those of all pieces get.

Idea: for each measure the least and the greatest, in metres, with the number of the sample and its
joint values. Of two pieces the better counts, of equal ones the lower number, so that nothing
depends on how samples were cut into pieces. Left out: telling it (sample_results.py).
"""

from collections.abc import Sequence

import numpy as np

from kinematics.reach.sample_summary import MEASURES, SampleSummary
from kinematics.table import FloatArray
from service.convert import Units, joint_values_out
from service.operations.samples import ManySamples

_VALUE, _NUMBER, _JOINTS = 0, 1, 2
_WAYS = np.array([1.0, -1.0])
"""The least of what is turned round is the greatest."""


def extremes_length(joints: int) -> int:
    """Return how many bytes they take."""
    return 8 * len(_WAYS) * len(MEASURES) * (_JOINTS + joints)


def extremes_bytes(many: ManySamples, found: SampleSummary) -> bytes:
    """Return the extremes of a piece: least and greatest, by measure: value, number, joints."""
    question = many.question
    table = np.full((len(_WAYS), len(MEASURES), _JOINTS + question.arm.joint_count), np.nan)
    table[:, :, _VALUE] = found.least, found.greatest
    table[:, :, _NUMBER] = found.least_at, found.greatest_at
    numbers, place = np.unique(table[:, :, _NUMBER], return_inverse=True)
    drawn = [many.samples.piece(int(number), int(number) + 1)[0] for number in numbers]
    shown = joint_values_out(question.arm, question.units, np.array(drawn))
    table[:, :, _JOINTS:] = shown[place.reshape(table.shape[:2])]
    return table.astype("<f8").tobytes()


def best_of(kept: Sequence[bytes], joints: int) -> FloatArray:
    """Return the extremes of all pieces, (2, measures, 2 + joints).

    Examples
    --------
    >>> tables = np.zeros((3, 2, 5, 2))
    >>> tables[..., 0], tables[..., 1] = [[[4.0]], [[7.0]], [[7.0]]], [[[20]], [[9]], [[8]]]
    >>> best = best_of([table.tobytes() for table in tables], 0)
    >>> best[0, 0], best[1, 0]
    (array([ 4., 20.]), array([7., 8.]))
    """
    tables = np.array([np.frombuffer(one, "<f8") for one in kept])
    tables = tables.reshape(len(kept), len(_WAYS), len(MEASURES), _JOINTS + joints)
    best = np.empty(tables.shape[1:])
    for way, sign in enumerate(_WAYS):
        for measure in range(len(MEASURES)):
            found = tables[:, way, measure]
            first = np.lexsort((found[:, _NUMBER], sign * found[:, _VALUE]))[0]
            best[way, measure] = found[first]
    return best


def extremes_told(best: FloatArray, units: Units) -> dict[str, object]:
    """Return extremes as answered, by measure; None where axis 1 slides, for what is about it."""
    told: dict[str, object] = {}
    for measure, (least, greatest) in zip(MEASURES, best.swapaxes(0, 1), strict=True):
        missing = bool(np.isnan(least[_VALUE]))
        ways = {"least": least, "greatest": greatest}
        told[measure] = None if missing else {way: _told(one, units) for way, one in ways.items()}
    return told


def _told(one: FloatArray, units: Units) -> dict[str, object]:
    return {
        "value": units.value_out(float(one[_VALUE]), "m"),
        "sample": int(one[_NUMBER]),
        "joints": one[_JOINTS:].tolist(),
    }
