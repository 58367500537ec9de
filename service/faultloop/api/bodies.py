"""Reading a measured point from a request body, strictly and in one pass.

The body is validated from its bytes: JSON's own types stay strict, and a busy service spares a second walk.
"""

import json
from collections.abc import Callable, Coroutine
from typing import Any

from fastapi import Request, Response
from fastapi.exceptions import RequestValidationError
from fastapi.routing import APIRoute
from pydantic import ValidationError

from faultloop.api.problems import Refused
from faultloop.exchange.requests import AssessmentRequest


class DirectRoute(APIRoute):
    """A route whose function reads the request itself: nothing is parsed, solved or serialised around it."""

    def get_route_handler(self) -> Callable[[Request], Coroutine[Any, Any, Response]]:
        """Give the function itself."""
        handler: Callable[[Request], Coroutine[Any, Any, Response]] = self.endpoint
        return handler


POINT_BODY: dict[str, Any] = {
    "requestBody": {
        "required": True,
        "content": {"application/json": {"schema": {"$ref": "#/components/schemas/AssessmentRequest"}}},
    }
}


async def read_point(request: Request) -> tuple[AssessmentRequest, bytes]:
    """Give the validated point and the bytes that it came in."""
    kind = request.headers.get("content-type", "").split(";", 1)[0].strip().lower()
    if kind != "application/json":
        raise Refused("unsupported-media-type")
    raw = await limited_body(request, request.app.state.max_body_bytes)
    try:
        return AssessmentRequest.model_validate_json(raw), raw
    except ValidationError as error:
        faults = [{**fault, "loc": ("body", *fault["loc"])} for fault in error.errors(include_url=False)]
        raise RequestValidationError(faults, body=_parsed(raw)) from None


async def limited_body(request: Request, most: int) -> bytes:
    """The body, refused as soon as it is known to be too large."""
    if (told := request.headers.get("content-length", "0")).isdecimal() and int(told) > most:
        raise Refused("body-too-large")
    read = bytearray()
    async for chunk in request.stream():
        read += chunk
        if len(read) > most:
            raise Refused("body-too-large")
    return bytes(read)


def _parsed(raw: bytes) -> Any:
    try:
        return json.loads(raw)
    except (ValueError, RecursionError):
        raise Refused("unreadable-body") from None


def refuse_duplicates(raw: bytes, canonical: bytes) -> None:
    """Refuse a body that names a field twice: one of the two readings would be dropped without a word.

    Both texts hold the same strings, so they hold as many colons unless a field was dropped (or a colon was
    escaped); only then the body is walked.
    """
    if raw.count(b":") != canonical.count(b":"):
        json.loads(raw, object_pairs_hook=_once)


def _once(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    found = dict(pairs)
    if len(found) < len(pairs):
        raise Refused("invalid-body", "A field stands twice in one object: which of the two is meant?")
    return found
