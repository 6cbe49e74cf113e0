"""How far an arm reaches, within travel and within working travel, as answered.

Left out: who works on it (bulk), and how it is drawn (drawings).
"""

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from functools import cached_property, partial
from typing import TypeVar

from kinematics.arm import BASE
from kinematics.envelope.envelope import envelope_of
from kinematics.envelope.in_parts import EnvelopeInParts
from kinematics.envelope.inquiry import at_once
from kinematics.envelope.measures import Measure
from kinematics.envelope.sampled_views import UnfitResolution
from kinematics.envelope.shapes import COORDINATES, WRIST, Envelope, Extreme, Turn, View
from kinematics.envelope.tolerances import MOST_CELLS
from kinematics.envelope.wrist import wrist_in_flange
from kinematics.reach.travel_region import travel_region
from kinematics.travel_limits import limits_of
from service.cautions import NOT_A_SAFETY_FUNCTION
from service.convert import Units, joint_row_out
from service.errors import ServiceError, TooLarge, UnusableValue
from service.operations.arms import Arms
from service.operations.questions import Question, question_of
from service.wire.arms import ReadArm
from service.wire.envelopes import EnvelopeRequest, Within
from service.wire.models import PosesRequest

TRAVEL: Within = "travel"
WORKING: Within = "working-travel"
AT_ONCE = 256
"""Cells along what is reached of an answer at once: some seconds. Surveys may take more."""

_Found = TypeVar("_Found")

_TOLD = 1.006
"""More than three digits can be off."""

_ANY_FORM = "quaternion-wxyz"
"""No orientation is told."""


@dataclass(frozen=True, eq=False)
class EnvelopeQuestion:
    """An arm with a tool, which of its points, and how fine.

    Attributes
    ----------
    resolution : m; most_cells : along what is reached, how fine it may be at most.
    """

    question: Question
    asked: EnvelopeRequest
    resolution: float | None
    most_cells: int = MOST_CELLS

    @cached_property
    def within(self) -> tuple[Within, ...]:
        """What is to be told: within travel, within working travel, or both."""
        if self.asked.within is not None:
            return (self.asked.within,)
        return (TRAVEL, WORKING) if self.has_working_travel else (TRAVEL,)

    @property
    def has_working_travel(self) -> bool:
        """Whether anything of the arm has a working travel."""
        return bool(limits_of(self.question.arm).working.any())

    def words(self, within: Within) -> bytes:
        """Return what one envelope follows from, and nothing else: the same give the same."""
        question = self.question
        digests = question.meant.read.digests
        said = (digests.table_digest, digests.setup_digest, self.asked.point, within)
        fineness = (self.resolution, self.most_cells)
        return repr((*said, *fineness, question.tool.tool_in_flange.tobytes())).encode()

    def found(self, within: Within, between: Callable[[], None] = lambda: None) -> Envelope:
        """Work out one envelope.

        Parameters
        ----------
        between : called now and then; what it raises gives the work up.

        Raises
        ------
        KinematicsError, UnusableValue : the arm, its point or the resolution cannot be used.
        TooLarge : the resolution is for a survey, or for nobody.
        """
        return self._by(partial(envelope_of, finds=partial(at_once, between=between)), within)

    def in_parts(self, within: Within) -> EnvelopeInParts:
        """Return one envelope to be found in parts; what ``found`` refuses is refused here."""
        return self._by(EnvelopeInParts, within)

    def _by(self, way: Callable[..., _Found], within: Within) -> _Found:
        try:
            return self._at(way, within, self.resolution)
        except UnfitResolution:
            raise self._unfit() from None

    def _at(self, way: Callable[..., _Found], within: Within, resolution: float | None) -> _Found:
        return way(
            self.question.arm,
            self.question.tool.tool_in_flange,
            working=within == WORKING,
            point=self.asked.point,
            resolution=resolution,
            most_cells=self.most_cells,
        )

    def _unfit(self) -> ServiceError:
        """Return the refusal in the user's unit, with what fits all that is asked."""
        assert self.resolution is not None
        assert self.asked.resolution is not None
        units, given = self.question.units, self.asked.resolution
        length, where = units.length, ("resolution",)
        parts = (self._at(EnvelopeInParts, within, None) for within in self.within)
        finest, coarsest = zip(*(one.fitting for one in parts), strict=True)
        least, most = max(finest), min(coarsest)
        # Told with three digits, and to be fit all the same.
        fine = f"{units.value_out(least * _TOLD, 'm'):.3g} {length}"
        coarse = f"{units.value_out(most / _TOLD, 'm'):.3g} {length}"
        out = f"ask for {fine} to {coarse}, or leave it out" if least < most else "leave it out"
        if self.resolution >= least:
            say = f"a resolution of {given:g} {length} does not fit this reach"
            return UnusableValue(say, where=where, value=given, way_out=out)
        whose = "a survey" if self.most_cells == MOST_CELLS else "an answer at once"
        # As fine as a survey may be, which has more time.
        if self.resolution >= least * self.most_cells / MOST_CELLS:
            out = f"ask for {fine} or more, or post a survey of kind envelope to /v1/surveys"
        say = f"places {given:g} {length} apart are too many for {whose}"
        return TooLarge(say, where=where, value=given, way_out=out, status=422)

    def answer(self, found: Mapping[Within, Envelope]) -> dict[str, object]:
        """Return what is answered, from what was found within each."""
        units, any_one = self.question.units, next(iter(found.values()))
        axis = any_one.axis
        lines = None
        if axis is not None:
            lines = {
                "point": units.length_out(axis.point).tolist(),
                "direction": axis.direction.tolist(),
            }
        told = {name: self._reach(envelope) for name, envelope in found.items()}
        reaches: dict[str, object] = {TRAVEL: told[TRAVEL]} if TRAVEL in told else {}
        if WORKING in self.within or not self.has_working_travel:
            reaches["working_travel"] = told.get(WORKING)
        return {
            **self.question.head,
            "point": any_one.point,
            "point_in_flange": units.length_out(any_one.point_in_flange).tolist(),
            "axis": lines,
            **reaches,
            "caution": NOT_A_SAFETY_FUNCTION,
        }

    def _reach(self, envelope: Envelope) -> dict[str, object]:
        units = self.question.units
        return {
            "exact": envelope.exact,
            "section": view_out(units, envelope.section),
            "plan": view_out(units, envelope.plan),
            "volume": measure_out(units, envelope.volume, 3),
            "same_at_every_bearing": envelope.same_at_every_bearing,
            "turn": None if envelope.turn is None else turn_out(units, envelope.turn),
            "extremes": [self._extreme(extreme) for extreme in envelope.extremes],
            "notes": list(envelope.notes),
        }

    def _extreme(self, extreme: Extreme) -> dict[str, object]:
        arm, units = self.question.arm, self.question.units
        return {
            "measure": extreme.measure,
            "greatest": extreme.greatest,
            "value": units.value_out(extreme.value, "m"),
            "joints": joint_row_out(arm, units, extreme.joint_values.tolist()),
            "position": units.length_out(extreme.position).tolist(),
        }


def envelope_question(
    arms: Arms[ReadArm], asked: EnvelopeRequest, most_cells: int = MOST_CELLS
) -> EnvelopeQuestion:
    """Return the question a body asks.

    Parameters
    ----------
    most_cells : along what is reached; AT_ONCE where somebody waits for the answer.

    Raises
    ------
    ServiceError, KinematicsError : arm, tool, point or resolution cannot be used.
    """
    about = PosesRequest.model_construct(
        arm=asked.arm, joints=[], tool=asked.tool, frame=BASE, units=asked.units
    )
    question = question_of(arms, about, _ANY_FORM)
    # What is refused for the arm is refused here, and not by a survey that was taken in.
    if asked.point == WRIST:
        wrist_in_flange(question.arm)
    travel_region(question.arm, working=asked.within == WORKING)
    resolution = asked.resolution
    if resolution is None:
        return EnvelopeQuestion(question, asked, None, most_cells)
    if resolution <= 0.0:
        raise UnusableValue(
            f"a resolution of {resolution:g} cannot be used",
            where=("resolution",),
            value=resolution,
            way_out="give a length above 0, or leave it out",
        )
    metres = question.units.value_in(resolution, "m")
    return EnvelopeQuestion(question, asked, metres, most_cells)


def view_out(units: Units, view: View) -> dict[str, object]:
    """Return one view as answered."""
    return {
        "kind": view.kind,
        "coordinates": list(COORDINATES[view.kind]),
        "directions": view.directions.tolist(),
        "exact": view.exact,
        "resolution": None if view.resolution is None else units.value_out(view.resolution, "m"),
        "chord": units.value_out(view.chord, "m"),
        "area": measure_out(units, view.area, 2),
        "curves": [
            {"outer": curve.outer, "points": units.length_out(curve.points).tolist()}
            for curve in view.curves
        ],
    }


def measure_out(units: Units, measure: Measure, power: int) -> dict[str, object]:
    """Return an area (``power`` 2) or a volume (3) as answered."""
    return {
        "value": units.power_out(measure.value, power),
        "error_bound": units.power_out(measure.error_bound, power),
        "unit": f"{units.length}^{power}",
    }


def turn_out(units: Units, turn: Turn) -> dict[str, object]:
    """Return the turn of axis 1 as answered."""
    dead = None
    if turn.dead_from is not None and turn.dead_to is not None:
        dead = [units.value_out(turn.dead_from, "rad"), units.value_out(turn.dead_to, "rad")]
    return {
        "lower": units.value_out(turn.lower, "rad"),
        "upper": units.value_out(turn.upper, "rad"),
        "bearings": units.value_out(turn.angle, "rad"),
        "dead_sector": dead,
    }
