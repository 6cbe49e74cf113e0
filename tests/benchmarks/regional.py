"""Three joints and a point or plane: answers missed of many cases.

Run: python -m tests.benchmarks.regional [--cases N] [--seed N]. Each case is made by carrying a
start with known motions; it is missed if no answer, polished, leads back to within 1e-5 of these.
Each case has joints of its own, so pairs are worked out anew for each. Left out: wrists.
"""

import argparse
from collections.abc import Iterator, Sequence

import numpy as np

from tests.kinematics.inverse.regional_cases import (
    Answers,
    Cases,
    answered,
    apart,
    cases_of,
    polished,
)

CASES = 100_000
PIECE = 20_000
NEAR = 1e-5
TURNS = (False, False, False)
FAMILIES: tuple[tuple[tuple[bool, ...], str, bool, float], ...] = (
    *((TURNS, special, plane, 0.0) for plane in (False, True) for special in ("", "parallel")),
    *((TURNS, special, plane, 0.0) for plane in (False, True) for special in ("meet", "square")),
    *((TURNS, "parallel", plane, off) for plane in (False, True) for off in (7e-6, 1e-8)),
    *((TURNS, "meet", plane, off) for plane in (False, True) for off in (1e-6, 1e-8)),
    ((True, False, False), "", False, 0.0),
    ((False, True, False), "", False, 0.0),
    ((False, False, True), "", False, 0.0),
    ((False, True, True), "", False, 0.0),
    ((True, False, True), "", False, 0.0),
    ((True, True, False), "", False, 0.0),
    ((True, True, True), "", False, 0.0),
    ((True, False, False), "", True, 0.0),
    ((False, True, False), "", True, 0.0),
    ((False, False, True), "", True, 0.0),
)


def of_some(cases: Cases, which: np.ndarray) -> Cases:
    """Return some of the cases."""
    return Cases(
        cases.slides,
        cases.axes[which],
        cases.points[which],
        cases.is_plane,
        cases.starts[which],
        cases.motions[which],
        cases.goals[which],
    )


def missed(cases: Cases, answers: Answers) -> int:
    """Return how many cases have no answer near the motions they were made with."""
    far = np.flatnonzero(apart(cases, answers) > NEAR)
    some = of_some(cases, far)
    return int((apart(some, polished(some, answered(some))) > NEAR).sum())


def lines(count: int, random: np.random.Generator) -> Iterator[str]:
    """Yield what was found for each family of cases."""
    for slides, special, is_plane, off in FAMILIES:
        lost, answers_found, flagged, done = 0, 0, 0, 0
        while done < count:
            cases = cases_of(random, min(PIECE, count - done), slides, special, is_plane, off)
            answers = answered(cases)
            lost += missed(cases, answers)
            answers_found += len(answers.rows)
            flagged += int((answers.flags != 0).sum())
            done += len(cases.starts)
        kinds = "".join("P" if slide else "R" for slide in slides)
        named = f"{special or 'any'}{f' but for {off:g}' if off else ''}"
        yield (
            f"{kinds} {'plane' if is_plane else 'point'}, pair {named}: {lost} of {done} missed, "
            f"{answers_found / done:.2f} answers, {flagged} flagged"
        )


def main(arguments: Sequence[str] | None = None) -> None:
    """Print the figures."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--cases", type=int, default=CASES)
    parser.add_argument("--seed", type=int, default=None)
    given = parser.parse_args(arguments)
    seed = np.random.SeedSequence(given.seed).entropy
    print(f"seed {seed}")
    for line in lines(given.cases, np.random.default_rng(seed)):
        print(line, flush=True)


if __name__ == "__main__":
    main()
