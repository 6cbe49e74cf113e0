"""The demonstration cell: it moves while somebody looks, and gives way to whatever is real."""

import asyncio
from collections.abc import AsyncIterator

import pytest
from fastapi import FastAPI

from service import demo
from service.live.live_arms import LiveArms
from service.live.samples import Notice, Sample
from service.readiness import Kernels
from service.settings import Settings
from service.simulation.moving_cell import IDLE_S, LOOKED_AT_S, SOURCE, MovingArm, MovingCell

pytestmark = pytest.mark.anyio

NAMES = [document["name"] for document in demo.documents()]
LOADER = "housing-loader"


@pytest.fixture
def settings() -> Settings:
    """The demonstration cell."""
    return Settings(database=":memory:", demo=True)


@pytest.fixture
async def live(app: FastAPI) -> AsyncIterator[LiveArms]:
    """The live arms of a service whose cell moves."""
    state = app.state
    cell = MovingCell([*NAMES, "no-arm"], state.arms, state.live, lambda: False)
    async with cell.moving(Kernels(())):
        yield state.live


async def until_moved(live: LiveArms, names: list[str]) -> None:
    for _ in range(100):
        if all(live.newest(name) is not None for name in names):
            return
        await asyncio.sleep(0.02)
    pytest.fail("nothing moves")


async def test_every_arm_of_the_cell_has_a_simulated_value_at_once(live: LiveArms) -> None:
    await until_moved(live, NAMES)
    assert len(NAMES) == 7
    assert live.names() == sorted(NAMES)
    for name in NAMES:
        standing = live.newest(name)
        assert standing is not None
        assert standing.sample is not None
        assert (standing.quality, standing.sample.simulated) == ("good", True)
        assert standing.sample.source == SOURCE


async def test_it_moves_where_somebody_looks_and_nowhere_else(live: LiveArms) -> None:
    await until_moved(live, NAMES)
    told: list[Notice] = []
    live.observers.append(told.append)
    live.look_at(LOADER)
    await asyncio.sleep(IDLE_S + 1.0)
    assert {notice.kind for notice in told} == {"good"}
    by_name: dict[str, list[Sample]] = {}
    for notice in told:
        assert notice.standing.sample is not None
        by_name.setdefault(notice.standing.arm, []).append(notice.standing.sample)
    looked_at = by_name.pop(LOADER)
    assert len({sample.joints for sample in looked_at}) > 5
    assert 5 < len(looked_at) <= 1 + (IDLE_S + 1.0) / LOOKED_AT_S
    for samples in by_name.values():
        assert len({sample.joints for sample in samples}) == 1
        assert len(samples) <= 1 + (IDLE_S + 1.0) / IDLE_S


async def test_it_is_never_faster_than_the_arms_are(live: LiveArms) -> None:
    await until_moved(live, NAMES)
    for name in NAMES:
        live.look_at(name)
    await asyncio.sleep(2.0)
    for name in NAMES:
        arm = live.get(name)
        assert arm is not None
        assert set(arm.counts) == {"good"}


async def test_a_real_value_ends_it_for_good(app: FastAPI, live: LiveArms) -> None:
    await until_moved(live, NAMES)
    live.look_at(LOADER)
    stored = app.state.arms.get(LOADER)
    joints = (0.0, -1.5, 1.5, 0.0, 0.7, 0.0)
    now_s, now_ms = live.clock.steady_s(), live.clock.wall_ms()
    live.feed(stored, [Sample(joints, now_s, now_ms, source="gateway", period_s=0.1)])
    await asyncio.sleep(1.5)
    standing = live.newest(LOADER)
    assert standing is not None
    assert standing.sample is not None
    # Also once the real input has stopped: nothing simulated takes its place.
    assert (standing.sample.joints, standing.sample.simulated) == (joints, False)
    assert (standing.quality, standing.reason) == ("bad", "stale")


async def test_a_simulation_from_outside_is_left_alone_while_it_lasts(
    app: FastAPI, live: LiveArms
) -> None:
    await until_moved(live, NAMES)
    stored = app.state.arms.get(LOADER)
    standing = live.newest(LOADER)
    assert standing is not None
    assert standing.sample is not None
    joints = standing.sample.joints
    for _ in range(8):
        now_s, now_ms = live.clock.steady_s(), live.clock.wall_ms()
        told = {"source": "commissioning", "simulated": True, "period_s": 0.1}
        live.feed(stored, [Sample(joints, now_s, now_ms, **told)])  # type: ignore[arg-type]
        await asyncio.sleep(0.1)
        standing = live.newest(LOADER)
        assert standing is not None
        assert standing.sample is not None
        assert standing.sample.source == "commissioning"
    for _ in range(60):
        await asyncio.sleep(0.05)
        standing = live.newest(LOADER)
        assert standing is not None
        assert standing.sample is not None
        if standing.sample.source == SOURCE:
            return
    pytest.fail("it does not go on")


async def test_a_simulation_that_begins_elsewhere_is_not_torn_at(
    app: FastAPI, live: LiveArms
) -> None:
    """Its first values are a leap from where the demonstration left the arm, and doubted."""
    await until_moved(live, NAMES)
    live.look_at(LOADER)
    stored = app.state.arms.get(LOADER)
    travel = stored.read.arm.table.rows[0].travel
    standing = live.newest(LOADER)
    assert standing is not None
    assert standing.sample is not None
    first, *others = standing.sample.joints
    # Half of the first joint's travel away.
    away = first + (travel[1] - travel[0]) / 2.0 * (-1.0 if first > sum(travel) / 2.0 else 1.0)
    qualities = []
    for _ in range(60):
        now_s, now_ms = live.clock.steady_s(), live.clock.wall_ms()
        given = {"source": "commissioning", "simulated": True, "period_s": 0.1}
        sample = Sample((away, *others), now_s, now_ms, **given)  # type: ignore[arg-type]
        live.feed(stored, [sample])
        qualities.append(live.newest(LOADER).quality)  # type: ignore[union-attr]
        await asyncio.sleep(0.05)
    assert qualities[0] == "uncertain"
    assert qualities[-1] == "good"
    # Once relied on, it stays so: nobody else moves the arm.
    assert "uncertain" not in qualities[qualities.index("good") :]


async def test_a_new_revision_is_wandered_within_its_own_travel(app: FastAPI) -> None:
    arms, live = app.state.arms, app.state.live
    moving, first = MovingArm(LOADER), arms.get(LOADER)
    before = moving.sample(first, live, moves=True)
    document = first.record.document
    # The first joint may now only be where it stands, and a degree beside it.
    at = before.joints[0] * 180.0 / 3.141592653589793
    rows = [{**document["rows"][0], "travel": [at - 1.0, at + 1.0]}, *document["rows"][1:]]
    rows[0].pop("working_travel", None)
    second = arms.replace(LOADER, {**document, "rows": rows}, {_version(first)})
    after = moving.sample(second, live, moves=True)
    assert max(abs(a - b) for a, b in zip(before.joints, after.joints, strict=True)) < 0.05
    low, high = ((at + side) * 3.141592653589793 / 180.0 for side in (-1.0, 1.0))
    for _ in range(20):
        await asyncio.sleep(0.01)
        assert low <= moving.sample(second, live, moves=True).joints[0] <= high


def _version(stored: object) -> str:
    record = stored.record  # type: ignore[attr-defined]
    return f"{record.revision}-{record.digest}"
