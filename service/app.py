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
from service.metrics import Metrics
from service.operations.arms import Arms
from service.operations.cells import Cells
from service.readiness import Readiness
from service.refusals import add_refusals
from service.routes import (
    arms,
    cells,
    controller,
    frames,
    guesses,
    health,
    poses,
    reach,
    relation,
    rotations,
    tables,
)
from service.settings import Settings
from service.storage.opening import open_storage
from service.web import pages
from service.wire.arms import read_arm

ROUTERS: tuple[APIRouter, ...] = (
    controller.router,
    reach.router,
    poses.router,
    tables.router,
    rotations.router,
    guesses.router,
    frames.router,
    relation.router,
    arms.router,
    cells.router,
    health.router,
    pages.router,
)


def create_app(settings: Settings) -> FastAPI:
    """Return the service; its lifespan opens the store and closes it.

    ``app.state`` holds ``settings``, ``sequence`` (counts answers), ``started``, ``metrics``,
    ``readiness`` (of the kernels),
    ``crowded`` (replaced by a server that knows its connections) and, within the lifespan,
    ``arms``, ``cells``, ``bulk``, ``storage``, ``opened`` and ``notices``.
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
    for router in ROUTERS:
        # Moved, not included: one list to match against, to document, to tell methods from.
        app.router.routes.extend(router.routes)
    add_refusals(app)
    app.add_middleware(
        Envelope, metrics=app.state.metrics, crowded=lambda: bool(app.state.crowded())
    )
    return app


@asynccontextmanager
async def _lifespan(app: FastAPI) -> AsyncIterator[None]:
    settings: Settings = app.state.settings
    opened = open_storage(settings)
    bulk = Bulk()
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
        yield
    finally:
        bulk.stop()
        opened.close()
