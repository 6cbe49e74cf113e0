"""What the numbers on a screen mean, told in words and in the user's units.

Left out: the search (the core's) and how a question is read (wire/guesses.py).
"""

from kinematics.errors import KinematicsError
from kinematics.findings import FINE, Finding
from kinematics.next_readout import NextReadout
from kinematics.orientation_guesses import Guess, Guesses, guesses
from kinematics.reading_words import handedness, lean_of, words_of
from kinematics.rotations import angle_of, rotation_from_quaternion
from kinematics.screen_readings import Reading
from kinematics.table import FloatArray
from service.convert import Units, finding_out, orientation_out
from service.details import pointer
from service.wire.guesses import ReadGuesses

Told = dict[str, object]

_MEANT = {
    "tool": "the screen shows another tool or the flange",
    "base": "the screen counts in another base",
}


def guesses_answer(asked: ReadGuesses) -> Told:
    """Return what fits, ranked, what to read next, and what is odd.

    Raises
    ------
    KinematicsError : numbers that are an orientation in no form; ``where`` from the body's root.
    """
    try:
        found = guesses(
            asked.shown,
            asked.meanings,
            tolerance=asked.tolerance,
            unit=asked.shown_unit,
            most=asked.most,
        )
    except KinematicsError as error:
        raise error.below("readouts") from None
    units = asked.units
    findings = [_placed(units, place, finding) for place, finding in asked.repaired]
    if not found.fitting:
        findings.append(finding_out(units, _nothing_fits(found, asked.tolerance)))
    verdict = "none" if not found.fitting else "settled" if found.fitting == 1 else "several"
    return {
        "ok": True,
        "code": max((finding.code for _, finding in asked.repaired), default=FINE),
        "units": units.name,
        "tolerance": units.shortest_out(asked.tolerance, "rad"),
        "verdict": verdict,
        "say": _sum_up(found, asked),
        "fitting": found.fitting,
        "plainest": None if found.plainest is None else found.plainest + 1,
        "groups": [_group(units, guess) for guess in found.ranked],
        "nearest_miss": _group(units, found.nearest_miss) if found.nearest_miss else None,
        "next": _next(found.next, found, asked) if found.next else None,
        "odd_one_out": _odd_one_out(found, units),
        "offset": _offset(found, asked),
        "findings": findings,
    }


def _group(units: Units, guess: Guess) -> Told:
    first, *others = guess.readings
    return {
        "rms": float(units.angle_out(guess.rms)),
        "largest": float(units.angle_out(guess.residuals[guess.worst])),
        "readout": guess.worst + 1,
        "fits": guess.fits,
        "reading": _reading(first),
        "same": [_reading(reading) for reading in others],
    }


def _reading(reading: Reading) -> Told:
    return {
        "form": reading.form,
        "order": list(reading.order),
        "signs": list(reading.signs),
        "unit": reading.unit,
        "inverse": reading.inverse,
        "handedness": handedness(reading),
        "say": words_of(reading),
    }


def _sum_up(found: Guesses, asked: ReadGuesses) -> str:
    best = found.ranked[0]
    words = words_of(best.readings[0])
    off = best.residuals[best.worst]
    tolerance = _within(asked.units, asked.tolerance)
    if not found.fitting:
        hints = [_odd_one_out(found, asked.units), _offset(found, asked)]
        said = [str(hint["say"]) for hint in hints if hint]
        if said:
            return f"nothing fits {tolerance}; but {'; or '.join(said)}"
        nearest = f"the nearest is off by up to {_shown(asked.units, off)}"
        return f"nothing fits {tolerance}; {nearest}: {words}"
    if found.fitting == 1:
        return f"one reading fits, {_within(asked.units, off)}: {words}"
    best_within = _within(asked.units, off)
    say = f"{found.fitting} readings fit {tolerance}, the best {best_within}: {words}"
    if found.plainest:
        plainest = words_of(found.ranked[found.plainest].readings[0])
        say += f"; the plainest is number {found.plainest + 1}: {plainest}"
    return f"{say}; the next readout tells them apart" if found.next else say


def _nothing_fits(found: Guesses, tolerance: float) -> Finding:
    best = found.ranked[0]
    return Finding(
        FINE,
        "nothing-fits",
        "the readouts contradict each other, or the screen counts in a way or shows a frame that "
        "is not known: the nearest reading is off by {measure}, more than {threshold}",
        best.residuals[best.worst],
        tolerance,
        "rad",
    )


def _placed(units: Units, place: int, finding: Finding) -> Told:
    where = pointer(("readouts", place, "orientation", "values"))
    return {**finding_out(units, finding), "pointer": where}


def _next(following: NextReadout, found: Guesses, asked: ReadGuesses) -> Told:
    difference = following.difference
    return {
        "shown": list(following.shown),
        "unit": following.unit,
        "told_apart": following.told_apart,
        "pairs": following.pairs,
        "smallest_difference": (
            None if difference is None else float(asked.units.angle_out(difference))
        ),
        "left": following.left,
        "left_otherwise": following.left_otherwise,
        "predictions": [
            _prediction(following, found, place, asked) for place in range(len(found.ranked))
        ],
        "say": _next_in_words(following, asked.units),
    }


def _next_in_words(following: NextReadout, units: Units) -> str:
    numbers = ", ".join(f"{number:g}" for number in following.shown)
    unit = f" ({following.unit})" if following.unit else ""
    say = f"turn the tool until the screen shows {numbers}{unit}, and see where its axes point"
    if following.difference is not None:
        say += f": what is told apart differs by {_shown(units, following.difference)} or more"
    left = f"at most {following.left} readings are" if following.left > 1 else "one reading is"
    say += f"; {left} left then"
    if following.left_otherwise:
        say += (
            f"; if the screen cannot show such numbers, {following.left_otherwise} are left, and "
            "any other posture tells more"
        )
    return say


def _prediction(following: NextReadout, found: Guesses, place: int, asked: ReadGuesses) -> Told:
    quaternion = following.prediction(found.ranked[place].map)
    if quaternion is None:
        say = "such a screen cannot show these numbers"
        return {"group": place + 1, "orientation": None, "say": say}
    tool_in_base = rotation_from_quaternion(quaternion)
    values = orientation_out(asked.units, asked.form, tool_in_base).tolist()
    return {
        "group": place + 1,
        "orientation": {"form": asked.form, "values": values},
        "say": _axes_in_words(tool_in_base, asked.units),
    }


def _axes_in_words(tool_in_base: FloatArray, units: Units) -> str:
    said = []
    for axis in (0, 2):
        lean = lean_of(tool_in_base[:, axis])
        off = f"{_shown(units, lean.angle)} off" if lean.towards else "along"
        towards = f" towards {lean.towards}" if lean.towards else ""
        said.append(f"{off} base {lean.axis}{towards}")
    return f"tool x points {said[0]}, tool z {said[1]}"


def _odd_one_out(found: Guesses, units: Units) -> Told | None:
    if found.odd_one_out is None:
        return None
    place, guess = found.odd_one_out
    off = _shown(units, guess.residuals[place])
    rest = max(angle for other, angle in enumerate(guess.residuals) if other != place)
    return {
        "readout": place + 1,
        "pointer": pointer(("readouts", place)),
        "off": float(units.angle_out(guess.residuals[place])),
        "group": _group(units, guess),
        "say": f"without readout {place + 1} this fits {_within(units, rest)}, and that one "
        f"is off by {off}: {words_of(guess.readings[0])}",
    }


def _offset(found: Guesses, asked: ReadGuesses) -> Told | None:
    if found.offset is None:
        return None
    offset, guess = found.offset
    turn = rotation_from_quaternion(offset.turn)
    within = _within(asked.units, guess.residuals[guess.worst])
    by = _shown(asked.units, float(angle_of(turn)))
    return {
        "side": offset.side,
        "orientation": {
            "form": asked.form,
            "values": orientation_out(asked.units, asked.form, turn).tolist(),
        },
        "group": _group(asked.units, guess),
        "say": f"if {_MEANT[offset.side]}, turned by {by}, this fits {within}: "
        f"{words_of(guess.readings[0])}",
    }


def _shown(units: Units, angle: float) -> str:
    return f"{float(units.angle_out(angle)):.3g} {units.angle}"


def _within(units: Units, angle: float) -> str:
    return f"within {_shown(units, angle)}" if angle else "exactly"
