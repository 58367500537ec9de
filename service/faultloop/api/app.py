"""The app factory: everything is made from settings, nothing at import."""

import gc
from collections.abc import AsyncIterator
from contextlib import asynccontextmanager

from fastapi import FastAPI
from starlette.types import ASGIApp, Message, Receive, Scope, Send

from faultloop import __version__
from faultloop.api import assessments, devices, openapi, problems, rule_sets, service
from faultloop.api.gather import Gather
from faultloop.exchange.resources import Problem
from faultloop.protection.catalogue import catalogue
from faultloop.records.database import open_engine
from faultloop.records.writer import Writer
from faultloop.settings import Settings


class Edge:
    """The outermost wrapper: HEAD wherever GET is, and problem details for a body over the limit.

    The framework refuses such a body outside of every exception handler, in plain text.
    """

    def __init__(self, app: ASGIApp) -> None:
        self._app = app

    async def __call__(self, scope: Scope, receive: Receive, send: Send) -> None:
        """Pass the request on, and mend what comes back."""
        if scope["type"] != "http":
            await self._app(scope, receive, send)
            return
        head, replaced = scope["method"] == "HEAD", False

        async def mended(message: Message) -> None:
            nonlocal replaced
            if message["type"] == "http.response.start" and _is_plain_413(message):
                replaced = True
                await problems.problem("body-too-large")(scope, receive, send)
            elif not replaced:
                bodiless = head and message["type"] == "http.response.body"
                await send({**message, "body": b""} if bodiless else message)

        await self._app({**scope, "method": "GET"} if head else scope, receive, mended)


def _is_plain_413(message: Message) -> bool:
    kinds = [value for name, value in message["headers"] if name.lower() == b"content-type"]
    return message["status"] == 413 and kinds != [problems.MEDIA_TYPE.encode()]


class Service(FastAPI):
    """The app with its edge."""

    def build_middleware_stack(self) -> ASGIApp:
        """Wrap the framework's own stack."""
        return Edge(super().build_middleware_stack())


def create_app(settings: Settings) -> FastAPI:
    """Make the service; the database is opened, and the writer started, when it starts up."""

    @asynccontextmanager
    async def lifespan(app: FastAPI) -> AsyncIterator[None]:
        catalogue()
        app.state.engine = open_engine(settings.database_url)
        app.state.gather = Gather()
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

    app = Service(
        title="faultloop",
        version=__version__,
        lifespan=lifespan,
        redirect_slashes=False,
        max_body_size=settings.max_body_bytes,
        generate_unique_id_function=lambda route: route.name,
        separate_input_output_schemas=False,
        responses=openapi.problem_responses(Problem),
        openapi_url="/openapi.json",
        docs_url=None,
        redoc_url=None,
    )
    for module in (assessments, devices, rule_sets, service):
        app.include_router(module.router)
    problems.install(app)
    app.openapi = lambda: openapi.document(app)  # type: ignore[method-assign]
    return app
