"""Puts the service together: routes, store, refusals, envelope; nothing is built at import.

Left out: listening on a port (``server.py``); any ASGI server can run what is made here.
"""

import itertools
from collections.abc import AsyncIterator
from contextlib import asynccontextmanager
from time import monotonic

from fastapi import APIRouter, FastAPI

from service import demo
from service.bulk.answering import Bulk
from service.envelope import Envelope
from service.errors import ServiceError
from service.event_streams import EventStreams
from service.events.watching import watched_events
from service.live.channels import Channels
from service.live.tending import live_arms
from service.metrics import Metrics
from service.operations.arms import Arms
from service.operations.cells import Cells
from service.readiness import Readiness
from service.records.desk import Records
from service.refusals import add_refusals
from service.routes import (
    arms,
    cells,
    controller,
    events,
    frames,
    guesses,
    health,
    joints,
    joints_socket,
    live,
    live_history,
    live_streams,
    poses,
    reach,
    reach_regions,
    records,
    relation,
    rotations,
    surveys,
    tables,
)
from service.settings import Settings
from service.storage.opening import open_storage
from service.surveys.desk import Surveys
from service.surveys.pool import pool_of
from service.web import pages, screens
from service.web.page_answers import version_here
from service.wire.arms import read_arm

ROUTERS: tuple[APIRouter, ...] = (
    controller.router,
    reach.router,
    reach_regions.router,
    poses.router,
    tables.router,
    rotations.router,
    guesses.router,
    frames.router,
    relation.router,
    surveys.router,
    joints.router,
    live.router,
    live_streams.router,
    live_history.router,
    records.router,
    events.router,
    arms.router,
    cells.router,
    health.router,
    pages.router,
    screens.router,
)


def create_app(settings: Settings) -> FastAPI:
    """Return the service; its lifespan opens the store and closes it.

    ``app.state`` holds ``settings``, ``sequence`` (counts answers), ``started``, ``metrics``,
    ``readiness`` (of the kernels),
    ``crowded`` (replaced by a server that knows its connections), ``streams`` of events and,
    within the lifespan, ``live`` arms and the ``channels`` that tell of them,
    ``arms``, ``cells``, ``surveys``, ``records``, ``events``, ``bulk``,
    ``storage``, ``opened``, ``notices``.
    """
    app = FastAPI(
        title="Armspan",
        openapi_url=None,
        docs_url=None,
        redoc_url=None,
        redirect_slashes=False,
        lifespan=_lifespan,
    )
    app.state.settings = settings
    app.state.sequence = itertools.count(1)
    app.state.started = monotonic()
    app.state.metrics = Metrics()
    app.state.readiness = Readiness()
    app.state.crowded = lambda: False
    app.state.streams = EventStreams()
    for router in ROUTERS:
        # Moved, not included: one list to match against, to document, to tell methods from.
        app.router.routes.extend(router.routes)
    app.router.routes.extend(joints_socket.routes)
    add_refusals(app)
    app.add_middleware(
        Envelope, metrics=app.state.metrics, crowded=lambda: bool(app.state.crowded())
    )
    return app


@asynccontextmanager
async def _lifespan(app: FastAPI) -> AsyncIterator[None]:
    settings: Settings = app.state.settings
    opened = open_storage(settings)
    bulk, taken_in = Bulk(), None
    try:
        app.state.bulk = bulk
        app.state.opened = opened
        app.state.storage = opened.arms
        app.state.cells = Cells(opened.cells, opened.arms, read_arm)
        app.state.arms = Arms(opened.arms, read_arm, app.state.cells)
        app.state.notices = [*opened.notices]
        if settings.demo:
            try:
                demo.seed(app.state.cells, app.state.arms)
            except ServiceError as error:
                app.state.notices.append(f"no demonstration cell: {error.say}")
        is_busy = app.state.metrics.is_asked
        pool = pool_of(settings.cluster, settings.survey_workers, is_busy)
        kept_for = settings.surveys_days
        taken_in = Surveys(opened.surveys, app.state.arms, pool, version_here(), days=kept_for)
        app.state.surveys = taken_in
        app.state.records = Records(opened.records, app.state.arms, version_here())
        taken_in.go_on()
        async with live_arms(app.state.arms) as live_ones:
            app.state.live = live_ones
            app.state.channels = Channels(live_ones, live_streams.removed)
            with watched_events(live_ones, opened.events, settings) as app.state.events:
                yield
    finally:
        app.state.streams.stop()
        if taken_in is not None:
            taken_in.stop()
        bulk.stop()
        opened.close()
