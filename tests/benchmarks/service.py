"""The service as uvicorn's factory makes it, from the environment."""

from fastapi import FastAPI

from faultloop.api.app import create_app
from faultloop.settings import Settings


def make() -> FastAPI:
    """Make the service."""
    return create_app(Settings())
