"""The app factory: everything is made from settings, nothing at import."""

import gc
from collections.abc import AsyncIterator
from contextlib import asynccontextmanager

from fastapi import FastAPI
from starlette.types import ASGIApp, Message, Receive, Scope, Send

from faultloop import __version__
from faultloop.api import (
    assessments,
    batches,
    bench_networks,
    devices,
    openapi,
    problems,
    rule_sets,
    separated_supplies,
    service,
)
from faultloop.api.gather import Gather
from faultloop.api.own_rules import OwnRuleSets
from faultloop.api.worker import Worker
from faultloop.exchange.resources import Problem
from faultloop.protection.catalogue import catalogue
from faultloop.records.database import open_engine
from faultloop.records.writer import Writer
from faultloop.settings import Settings


class HeadAsGet:
    """Answer HEAD wherever GET is answered, with the same headers and no body."""

    def __init__(self, app: ASGIApp) -> None:
        self._app = app

    async def __call__(self, scope: Scope, receive: Receive, send: Send) -> None:
        """Pass a HEAD request on as GET and drop the body that comes back."""
        if scope["type"] != "http" or scope["method"] != "HEAD":
            await self._app(scope, receive, send)
            return

        async def without_body(message: Message) -> None:
            await send({**message, "body": b""} if message["type"] == "http.response.body" else message)

        await self._app({**scope, "method": "GET"}, receive, without_body)


def create_app(settings: Settings) -> FastAPI:
    """Make the service; the database is opened, and the writer started, when it starts up."""

    @asynccontextmanager
    async def lifespan(app: FastAPI) -> AsyncIterator[None]:
        catalogue()
        app.state.engine = open_engine(settings.database_url)
        app.state.gather = Gather()
        app.state.own_rules = OwnRuleSets(app.state.engine)
        app.state.max_body_bytes = settings.max_body_bytes
        app.state.max_batch_bytes = settings.max_batch_bytes
        app.state.worker = Worker(settings.batches_waiting)
        app.state.writer = Writer(app.state.engine, settings.writer_capacity, settings.writer_group)
        app.state.writer.start()
        # What lives as long as the service need not be walked by every collection.
        gc.collect()
        gc.freeze()
        gc.set_threshold(20_000, 50, 100)
        try:
            yield
        finally:
            await app.state.writer.close()
            app.state.engine.dispose()

    app = FastAPI(
        title="faultloop",
        version=__version__,
        lifespan=lifespan,
        redirect_slashes=False,
        generate_unique_id_function=lambda route: route.name,
        separate_input_output_schemas=False,
        responses=openapi.problem_responses(Problem),
        openapi_url="/openapi.json",
        docs_url=None,
        redoc_url=None,
    )
    app.include_router(assessments.judging)
    app.include_router(bench_networks.router)
    app.include_router(separated_supplies.router)
    for module in (assessments, batches, devices, rule_sets, service):
        app.include_router(module.router)
    problems.install(app)
    app.add_middleware(HeadAsGet)
    app.openapi = lambda: openapi.document(app)  # type: ignore[method-assign]
    return app
