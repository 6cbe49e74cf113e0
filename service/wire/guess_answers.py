"""What is answered of a screen's readouts, as models for the document; answers may grow.

Left out: what is asked with (guesses.py).
"""

from typing import Literal

from service.wire.answer_models import AnsweredOrientation, Open
from service.wire.models import UnitsName
from service.wire.rotations import PlacedFinding


class AnsweredReading(Open):
    """One way to read the screen: value i of `form` is `signs[i] * shown[order[i] - 1]`.

    With `inverse` the values say the base as seen from the tool.
    """

    form: str
    order: list[int]
    signs: list[int]
    unit: Literal["deg", "rad", "half-turns"] | None
    inverse: bool
    handedness: Literal["right", "left", "mirrored-x", "mirrored-y", "mirrored-z", "mixed"]
    say: str


class GuessedGroup(Open):
    """Readings that are one and the same, and how well they explain the readouts.

    `rms` and `largest` are the angles left between reading and meaning, `readout` the place, from
    1, of the largest.
    """

    rms: float
    largest: float
    readout: int
    fits: bool
    reading: AnsweredReading
    same: list[AnsweredReading]


class Prediction(Open):
    """What the tool does when the screen shows the next numbers, if a group of readings is right.

    Nothing where a screen of that kind cannot show them.
    """

    group: int
    orientation: AnsweredOrientation | None
    say: str


class NextReadoutAnswer(Open):
    """Numbers to bring onto the screen, and how far apart the groups' predictions then are.

    Of `pairs` of groups, `told_apart` differ so that anybody sees it; at most `left` groups remain,
    or `left_otherwise` where the screen turns out not to show such numbers.
    """

    shown: list[float]
    unit: Literal["deg", "rad", "half-turns"] | None
    told_apart: int
    pairs: int
    smallest_difference: float | None
    left: int
    left_otherwise: int
    predictions: list[Prediction]
    say: str


class OddOneOut(Open):
    """The readout, by its place from 1, without which the group named would fit."""

    readout: int
    pointer: str
    off: float
    group: GuessedGroup
    say: str


class ConstantOffset(Open):
    """One turn with which a group would fit all readouts.

    `tool`: the orientation known, seen from the one that the screen shows; `base`: the base that
    the screen counts in, seen from the one the orientations are known in.
    """

    side: Literal["tool", "base"]
    orientation: AnsweredOrientation
    group: GuessedGroup
    say: str


class GuessesAnswer(Open):
    """What the numbers on a screen mean: groups of equal readings, the best first."""

    ok: bool
    code: int
    units: UnitsName
    tolerance: float
    verdict: Literal["settled", "several", "none"]
    say: str
    fitting: int
    plainest: int | None
    groups: list[GuessedGroup]
    nearest_miss: GuessedGroup | None
    next: NextReadoutAnswer | None
    odd_one_out: OddOneOut | None
    offset: ConstantOffset | None
    findings: list[PlacedFinding]
