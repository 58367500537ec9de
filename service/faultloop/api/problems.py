"""Every error as problem details (RFC 9457), in a field engineer's words and without echoing the input.

Refused
├── InvalidBody        422  a field is missing, misspelt, of the wrong kind or out of bounds
├── UnreadableBody     400  the body is not JSON
├── UnreadableFile     422  the body is no table of points
├── NotFound           404
├── MethodNotAllowed   405
├── NotAcceptable      406
├── Conflict           409  the id stands for another input
├── PreconditionFailed 412  the same, where the client asked for a new one only
├── BodyTooLarge       413
├── UnsupportedMedia   415
├── Busy               503  too much waits to be judged or stored
├── StorageFailed      503  the database did not confirm
└── Internal           500
"""

import logging
import uuid
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from fastapi import FastAPI, Request
from fastapi.exceptions import RequestValidationError
from fastapi.responses import Response
from starlette.exceptions import HTTPException
from starlette.routing import Match

from faultloop.digests import json_bytes
from faultloop.exchange.faults import pointer, told
from faultloop.records.errors import RecordRefused, RecordsError, WriterBusy, WriterClosed

MEDIA_TYPE = "application/problem+json"
_log = logging.getLogger(__name__)

KINDS: dict[str, tuple[int, str, str]] = {
    "invalid-body": (
        422,
        "A field cannot be used",
        "See errors: each names the field by JSON Pointer and says what is expected. Nothing was judged or stored.",
    ),
    "invalid-query": (
        422,
        "A query or path parameter cannot be used",
        "See errors: each names the parameter and says what is expected.",
    ),
    "unreadable-body": (
        400,
        "The body is not readable JSON",
        "Send one JSON object in UTF-8. NaN, Infinity and trailing commas are not JSON.",
    ),
    "unreadable-file": (
        422,
        "The body cannot be read as a table of points",
        "See detail. Nothing was judged or stored; a single bad row never does this.",
    ),
    "not-found": (404, "Nothing is here", "Check the address and the id; ids are UUIDs."),
    "method-not-allowed": (
        405,
        "This method is not offered here",
        "The Allow header lists the methods of this address.",
    ),
    "not-acceptable": (406, "This form of answer is not given here", "Accept one of the media types named in detail."),
    "conflict": (
        409,
        "This id stands for another input",
        "What is stored is not changed: use a new id for another input, or read the stored one.",
    ),
    "precondition-failed": (
        412,
        "The id is taken",
        "If-None-Match asked for a new id only, and this one stands for another input.",
    ),
    "body-too-large": (
        413,
        "The body is too large",
        "One measured point is a few kilobytes; send many points as a batch, and a large batch in parts.",
    ),
    "unsupported-media-type": (
        415,
        "This kind of body is not read",
        "Send application/json; a batch may also be text/csv.",
    ),
    "busy": (
        503,
        "Too much waits to be judged or stored",
        "Try again after the seconds in Retry-After; the same id and body are safe to repeat.",
    ),
    "storage-failed": (
        503,
        "The database did not confirm",
        "Take it as not stored and try again; the same id and body are safe to repeat.",
    ),
    "internal": (
        500,
        "The service failed",
        "The fault is logged with this instance. Nothing was decided: take the point as not judged.",
    ),
    "refused": (400, "The request is refused", "See detail."),
}
_BY_STATUS = {
    400: "unreadable-body",
    404: "not-found",
    405: "method-not-allowed",
    406: "not-acceptable",
    413: "body-too-large",
    415: "unsupported-media-type",
}


@dataclass
class Refused(Exception):
    """A refusal by kind, with a detail of its own where the kind's does not say enough."""

    kind: str
    detail: str | None = None


def problem(
    kind: str,
    *,
    detail: str | None = None,
    errors: Sequence[dict[str, str]] = (),
    headers: dict[str, str] | None = None,
) -> Response:
    """The response of one problem."""
    status, title, usual = KINDS[kind]
    body: dict[str, Any] = {
        "type": f"/problems/{kind}",
        "title": title,
        "status": status,
        "detail": detail or usual,
        "instance": f"urn:uuid:{uuid.uuid4()}",
    }
    if errors:
        body["errors"] = list(errors)
    return Response(json_bytes(body), status, media_type=MEDIA_TYPE, headers=headers)


def _invalid(error: RequestValidationError) -> Response:
    faults = error.errors()
    if any(fault["type"] == "json_invalid" for fault in faults):
        return problem("unreadable-body")
    in_body = all(fault["loc"][:1] == ("body",) for fault in faults)
    body = error.body if in_body else {}
    listed = [
        {
            "pointer": pointer(fault["loc"][1:], body, absent=not in_body or fault["type"] == "missing"),
            "code": fault["type"],
            "detail": told(fault),
        }
        for fault in faults[:50]
    ]
    return problem("invalid-body" if in_body else "invalid-query", errors=listed)


def _allowed(request: Request) -> str:
    """Every method of the address (the framework names only those of the first route that fits)."""
    methods: set[str] = set()
    for method in ("GET", "HEAD", "PUT", "POST", "DELETE", "PATCH"):
        scope = {**request.scope, "method": method}
        fits = any(route.matches(scope)[0] == Match.FULL for route in request.app.router.routes)
        methods |= {method} if fits else set()
    return ", ".join(sorted(methods | ({"HEAD"} if "GET" in methods else set())))


def install(app: FastAPI) -> None:
    """Answer every error of the app, the framework's own included, with problem details."""

    @app.exception_handler(Refused)
    async def refused(_: Request, error: Refused) -> Response:
        headers = {"Retry-After": "1"} if error.kind == "busy" else None
        return problem(error.kind, detail=error.detail, headers=headers)

    @app.exception_handler(RequestValidationError)
    async def invalid(_: Request, error: RequestValidationError) -> Response:
        return _invalid(error)

    @app.exception_handler(HTTPException)
    async def http(request: Request, error: HTTPException) -> Response:
        kind = _BY_STATUS.get(error.status_code, "refused" if error.status_code < 500 else "internal")
        return problem(kind, headers={"Allow": _allowed(request)}) if error.status_code == 405 else problem(kind)

    @app.exception_handler(RecordsError)
    async def records(_: Request, error: RecordsError) -> Response:
        if isinstance(error, WriterBusy | WriterClosed):
            return problem("busy", headers={"Retry-After": "1"})
        _log.error("storage failed: %s", error)
        return (
            problem("internal")
            if isinstance(error, RecordRefused)
            else problem("storage-failed", headers={"Retry-After": "5"})
        )

    @app.exception_handler(Exception)
    async def internal(_: Request, error: Exception) -> Response:
        _log.error("unexpected failure", exc_info=error)
        return problem("internal")
