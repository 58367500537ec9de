"""The service in this process: an HTTP client on its ASGI face, within its lifespan."""

import asyncio
from collections.abc import Awaitable, Callable
from typing import Any, TypeVar

import httpx
from fastapi import FastAPI

from faultloop.api.app import create_app
from faultloop.settings import Settings

Result = TypeVar("Result")


def served(url: str, work: Callable[[httpx.AsyncClient, FastAPI], Awaitable[Result]], **settings: Any) -> Result:
    """Run some work against the service on a database."""

    async def run() -> Result:
        app = create_app(Settings(database_url=url, **settings))
        async with app.router.lifespan_context(app):
            transport = httpx.ASGITransport(app=app, raise_app_exceptions=False)
            async with httpx.AsyncClient(transport=transport, base_url="http://loopback", timeout=30) as client:
                return await work(client, app)

    return asyncio.run(run())


def problem(response: httpx.Response, status: int) -> dict[str, Any]:
    """A response's body as problem details, checked for its form."""
    assert response.status_code == status, response.text[:300]
    assert response.headers["content-type"] == "application/problem+json"
    body: dict[str, Any] = response.json()
    assert set(body) <= {"type", "title", "status", "detail", "instance", "errors"}
    assert body["status"] == status
    assert body["type"].startswith("/problems/")
    assert all(set(error) == {"pointer", "code", "detail"} for error in body.get("errors", []))
    return body
