"""Many orientations over HTTP against scipy's arithmetic: `python -m tests.benchmarks.conversions`.

The yardstick does in one process, without a network, what cannot be left out: it parses the same
body and converts with scipy's Rotation. Times are medians, the sides taking turns; beside them
stands a raw echo of the same bytes, the server's memory above idle, what a controller's question
takes meanwhile, and the longest time the event loop stood still.
"""

import io
import json
import sys
import time
from collections.abc import Callable
from concurrent.futures import ProcessPoolExecutor
from multiprocessing import get_context
from typing import NamedTuple

import numpy as np
import orjson
from scipy.spatial.transform import Rotation

from service.wire.npy import MEDIA_TYPE, npy_head
from tests.benchmarks.bulk import get, get_times, peak_of, quantiles, repeated, running, send

ORIENTATIONS = 100_000
TURNS = 7
SEED = 20_261_203
PAIRS = (
    ("zyx-current", "quaternion-wxyz"),
    ("quaternion-wxyz", "zyx-current"),
    ("zyx-current", "xyz-fixed"),
    ("matrix", "zyz-current"),
    ("rotation-vector", "matrix"),
)
BOUND = 3.0
Side = tuple[str, bytes, str]


class Case(NamedTuple):
    """One request, and what the yardstick does for it."""

    side: Side
    parse: Callable[[], np.ndarray]
    convert: Callable[[np.ndarray], np.ndarray]


def scipy_from(form: str, values: np.ndarray) -> Rotation:
    """Return scipy's rotations; degrees."""
    if form == "matrix":
        return Rotation.from_matrix(values.reshape(-1, 3, 3))
    if form == "quaternion-wxyz":
        return Rotation.from_quat(values, scalar_first=True)
    if form == "rotation-vector":
        return Rotation.from_rotvec(values, degrees=True)
    return Rotation.from_euler(_sequence(form), values, degrees=True)


def scipy_to(form: str, rotation: Rotation) -> np.ndarray:
    """Return scipy's values; degrees."""
    if form == "matrix":
        return np.asarray(rotation.as_matrix()).reshape(-1, 9)
    if form == "quaternion-wxyz":
        return np.asarray(rotation.as_quat(scalar_first=True))
    if form == "rotation-vector":
        return np.asarray(rotation.as_rotvec(degrees=True))
    return np.asarray(rotation.as_euler(_sequence(form), degrees=True))


def _sequence(form: str) -> str:
    sequence, axes = form.split("-")
    return sequence.upper() if axes == "current" else sequence


def cases() -> dict[str, Case]:
    """Return every request, in each format for the first two pairs, in NPY for the others."""
    rotation = Rotation.random(ORIENTATIONS, rng=SEED)
    found: dict[str, Case] = {}
    for place, (form, to) in enumerate(PAIRS):
        values = np.ascontiguousarray(scipy_to(form, rotation))

        def convert(parsed: np.ndarray, form: str = form, to: str = to) -> np.ndarray:
            return scipy_to(to, scipy_from(form, parsed))

        query = f"/v1/rotations/conversions?from={form}&to={to}&units=mm-deg"
        npy = npy_head(values.shape) + values.tobytes()
        name = f"{form} > {to}"

        def load(npy: bytes = npy) -> np.ndarray:
            return np.asarray(np.load(io.BytesIO(npy)))

        found[f"NPY  {name}"] = Case((query, npy, MEDIA_TYPE), load, convert)
        if place > 1:
            continue
        rows = values.tolist()
        head = ",".join(f"r{column + 1}" for column in range(values.shape[1]))
        csv = (f"{head}\n" + "\n".join(",".join(map(repr, row)) for row in rows)).encode()

        def table(csv: bytes = csv) -> np.ndarray:
            return np.loadtxt(io.BytesIO(csv), delimiter=",", skiprows=1)

        found[f"CSV  {name}"] = Case((query, csv, "text/csv"), table, convert)
        asked = {"from": form, "to": to, "units": "mm-deg", "values": rows}
        body = json.dumps(asked).encode()
        address = "/v1/rotations/conversions"

        def parsed(body: bytes = body) -> np.ndarray:
            return np.array(orjson.loads(body)["values"])

        for more in ("", "?format=npy"):
            side = (address + more, body, "application/json")
            found[f"JSON {name}{' as NPY' if more else ''}"] = Case(side, parsed, convert)
    return found


def seconds(work: Callable[[], object]) -> float:
    """Return what one call takes."""
    started = time.perf_counter()
    work()
    return time.perf_counter() - started


def measure() -> None:
    """Print every figure."""
    sides = cases()
    taken: dict[str, list[tuple[float, ...]]] = {name: [] for name in sides}
    peaks = {name: peak_of(case.side) for name, case in sides.items()}
    with running() as (port, _), ProcessPoolExecutor(1, get_context("spawn")) as other:
        for case in sides.values():  # so that nothing is started or compiled later
            status, content = send(port, *case.side)[1:]
            assert status == 200, content[:300]
            case.convert(case.parse())
        for _ in range(TURNS):
            for name, case in sides.items():
                values = case.parse()
                taken[name].append(
                    (
                        send(port, *case.side)[0],
                        send(port, "/echo", case.side[1], MEDIA_TYPE)[0],
                        seconds(case.parse),
                        seconds(lambda case=case, values=values: case.convert(values)),  # type: ignore[misc]
                    )
                )
        print(f"{ORIENTATIONS} orientations; ms; bound {BOUND:g} of both, and of scipy + parse")
        print(
            f"{'':44}{'answer':>8}{'echo':>7}{'parse':>7}{'scipy':>7}{'x both':>8}{'x scipy':>9}"
            f"{'+ MiB':>7}{'GET p50':>9}{'p99':>7}{'stall':>7}"
        )
        send(port, "/watch", b"", "")
        other.submit(time.sleep, 0).result()
        for name, case in sides.items():
            answer, echo, parse, scipy = np.median(taken[name], axis=0)
            get(port, "/stall")
            meanwhile = get_times(port, other.submit(repeated, port, case.side))
            stood = 1e3 * float(get(port, "/stall"))
            print(
                f"{name:44}{1e3 * answer:8.1f}{1e3 * echo:7.1f}{1e3 * parse:7.1f}"
                f"{1e3 * scipy:7.1f}{answer / (parse + scipy):8.2f}"
                f"{(answer - parse) / scipy:9.2f}{peaks[name]:7.0f}{quantiles(meanwhile)}"
                f"{stood:7.1f}"
            )


if __name__ == "__main__":
    sys.exit(measure())
