"""Envelopes as surveys: what pieces cost against one go, how long they are, how soon one ends.

    python -m tests.benchmarks.envelope_surveys [arm] [resolution in mm]

Asked: pieces of at most 1 to 2 s, a tenth more than in one go at most, a cancel within a second.
Both ways are timed in this process, in seconds of the processor: one go is what an answer at once
does, the pieces are taken in, made, kept and put together as by one worker. Then the survey itself
runs in one process and in two, which give way to all else; a cancel is timed until the survey
behind it begins.
"""

import json
import sys
import tempfile
import time
from contextlib import closing
from itertools import pairwise
from pathlib import Path
from typing import Any, cast

from service.operations.arms import Arms
from service.operations.cells import Cells
from service.operations.envelopes import envelope_question
from service.settings import Settings
from service.storage.opening import open_storage
from service.storage.ports import Survey
from service.surveys.desk import Surveys
from service.surveys.envelopes import Envelopes
from service.surveys.pinned import Setup
from service.wire.answers import json_bytes
from service.wire.arms import ReadArm, read_arm
from service.wire.envelopes import EnvelopeRequest
from service.wire.surveys import SurveyRequest
from tests.benchmarks.watched_processes import Watched
from tests.conftest import ROOT

NO_ARMS = cast(Arms[ReadArm], None)


def question(name: str, resolution: float) -> dict[str, Any]:
    """Return what is asked of an arm of the demonstration with its first tool."""
    arm = json.loads((ROOT / f"service/demo/arms/{name}.json").read_text("utf-8"))
    arm = {key: value for key, value in arm.items() if key not in ("cell", "frames")}
    tool = next(iter(arm["tools"]))
    return {"arm": arm, "tool": tool, "within": "travel", "resolution": resolution}


def one_go(request: dict[str, Any]) -> float:
    """Return the seconds of an answer."""
    begin = time.process_time()
    asked = envelope_question(NO_ARMS, EnvelopeRequest.model_validate(request))
    json_bytes(asked.answer({"travel": asked.found("travel")}))
    return time.process_time() - begin


def in_pieces(request: dict[str, Any]) -> tuple[float, list[float]]:
    """Return the seconds of a survey made here: in all, and of each piece, the whole one last."""
    kind, begin = Envelopes(), time.process_time()
    accepted = kind.accept(NO_ARMS, request)
    prepared = kind.prepare(Setup(accepted.request, None, None))
    *pieces, last = accepted.pieces
    ends, made = [time.process_time()], []
    for piece in pieces:
        made.append(kind.make(prepared, piece).made)
        ends.append(time.process_time())
    kind.gather(prepared, last, made)
    ends.append(time.process_time())
    return ends[-1] - begin, [end - start for start, end in pairwise(ends)]


def seconds_of(surveys: Surveys, survey: str) -> float:
    """Return how long a survey took from its beginning to its end."""
    while not (found := surveys.get(survey)).finished_at:
        time.sleep(0.02)
    assert found.state == "succeeded", found.reason
    assert found.started_at
    return (found.finished_at - found.started_at).total_seconds()


def cancelled(surveys: Surveys, wanted: SurveyRequest) -> float:
    """Return how long after a cancel the survey behind the cancelled one begins."""
    survey, _ = surveys.create(wanted, None, b"")
    behind, _ = surveys.create(wanted, None, b"")
    while surveys.get(survey.id).done < 5:
        time.sleep(0.02)
    begin = time.perf_counter()
    surveys.cancel(survey.id)
    while surveys.get(behind.id).state == "queued":
        time.sleep(0.005)
    taken = time.perf_counter() - begin
    surveys.cancel(behind.id)
    return taken


def as_survey(request: dict[str, Any], processes: int, folder: Path) -> None:
    """Print how a survey of it goes in so many processes."""
    pool = Watched(processes)
    with closing(open_storage(Settings(database=str(folder / f"{processes}.db")))) as opened:
        arms = Arms(opened.arms, read_arm, Cells(opened.cells, opened.arms, read_arm))
        surveys = Surveys(opened.surveys, arms, pool, "0")
        wanted = SurveyRequest(kind="envelope", request=request)
        try:
            seconds_of(surveys, _small(surveys, request).id)
            pool.seconds.clear()
            survey, _ = surveys.create(wanted, None, b"")
            taken = seconds_of(surveys, survey.id)
            longest = max(pool.seconds)
            ends = [cancelled(surveys, wanted) for _ in range(3)]
        finally:
            surveys.stop()
    print(
        f"{processes} process(es): {taken:.1f} s, {survey.total / taken:.1f} pieces/s, longest "
        f"{longest:.2f} s, a cancel {max(ends):.2f} s at most (asked: 1)"
    )


def _small(surveys: Surveys, request: dict[str, Any]) -> Survey:
    """Return a survey that starts the processes."""
    coarse = {key: value for key, value in request.items() if key != "resolution"}
    return surveys.create(SurveyRequest(kind="envelope", request=coarse), None, b"")[0]


def main() -> None:
    """Print everything."""
    name = sys.argv[1] if len(sys.argv) > 1 else "housing-loader"
    request = question(name, float(sys.argv[2]) if len(sys.argv) > 2 else 4.0)
    coarse = {**request, "resolution": None}
    one_go(coarse)
    whole = one_go(request)
    taken, pieces = in_pieces(request)
    print(f"{name}, {request['tool']}, {request['resolution']:g} mm: {len(pieces)} pieces")
    print(
        f"one go {whole:.1f} s, in pieces {taken:.1f} s: {100 * (taken / whole - 1):+.1f} % "
        f"(asked: 10), longest {max(pieces):.2f} s (asked: 1 to 2), put together {pieces[-1]:.2f} s"
    )
    with tempfile.TemporaryDirectory() as folder:
        for processes in (1, 2):
            as_survey(request, processes, Path(folder))


if __name__ == "__main__":
    main()
