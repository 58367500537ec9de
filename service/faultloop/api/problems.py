"""Every error as problem details (RFC 9457), in a field engineer's words and without echoing the input.

Refused
├── InvalidBody        422  a field is missing, misspelt, of the wrong kind or out of bounds
├── UnreadableBody     400  the body is not JSON
├── NotFound           404
├── MethodNotAllowed   405
├── NotAcceptable      406
├── Conflict           409  the id stands for another input
├── PreconditionFailed 412  the same, where the client asked for a new one only
├── BodyTooLarge       413
├── UnsupportedMedia   415
├── Busy               503  too much waits to be stored
├── StorageFailed      503  the database did not confirm
└── Internal           500
"""

import logging
import uuid
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from difflib import get_close_matches
from typing import Any

from fastapi import FastAPI, Request
from fastapi.exceptions import RequestValidationError
from fastapi.responses import Response
from starlette.exceptions import HTTPException
from starlette.routing import Match

from faultloop.digests import json_bytes
from faultloop.exchange import fields, requests
from faultloop.records.errors import RecordRefused, RecordsError, WriterBusy, WriterClosed
from faultloop.rules import sheets, strict

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
        "Assessments are not changed: use a new id for another reading, or read the stored one.",
    ),
    "precondition-failed": (
        412,
        "The id is taken",
        "If-None-Match asked for a new assessment only, and this id stands for another input.",
    ),
    "body-too-large": (
        413,
        "The body is too large",
        "One measured point is a few kilobytes; send many points one by one.",
    ),
    "unsupported-media-type": (415, "This kind of body is not read", "Send application/json."),
    "busy": (
        503,
        "Too much waits to be stored",
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


_WORDS = {
    "missing": "this field is required",
    "float_type": "a plain number is expected: decimal point, no unit, no quotes; "
    "for an over-range display send an object with value and bound",
    "finite_number": "a finite number is expected; for an over-range display send an object with value and bound",
    "bool_type": "true or false is expected",
    "string_type": "text in quotes is expected",
    "model_type": "an object is expected",
    "model_attributes_type": "an object is expected",
    "dict_type": "an object is expected",
    "list_type": "a list is expected",
    "union_tag_not_found": "state which kind it is",
    "string_pattern_mismatch": "this text is not of the expected form",
}


def _known_fields() -> list[str]:
    models = [m for module in (requests, fields, sheets) for m in vars(module).values()]
    closed = [m for m in models if isinstance(m, type) and issubclass(m, fields.Closed | strict.Sheet)]
    return sorted({name for model in closed for name in model.model_fields})


def _detail(error: dict[str, Any]) -> str:
    kind, context = error["type"], error.get("ctx", {})
    if kind == "extra_forbidden":
        near = get_close_matches(str(error["loc"][-1]), _known_fields(), n=1, cutoff=0.75)
        if error["loc"][:1] == ("query",):
            return "no such parameter here; the document at /openapi.json names those that there are"
        return "no such field here" + (
            f"; did you mean {near[0]}?" if near else "; check the spelling and the unit in its name"
        )
    if kind == "union_tag_invalid":
        return f"expected one of {context.get('expected_tags', '')}"
    if kind == "value_error":
        return str(context.get("error", "this value cannot be used"))
    if kind in _WORDS:
        return _WORDS[kind]
    told: str = error["msg"]
    return told.removeprefix("Input ").replace("should", "must", 1)


def _pointer(location: Iterable[Any], body: Any, *, absent: bool) -> str:
    """JSON Pointer of a fault; names that only tell which kind of a union was tried are left out.

    The last name may be one that the body lacks only where the fault is that it is `absent`.
    """
    parts, here = list(location), body
    kept: list[str] = []
    for at, part in enumerate(parts):
        if (isinstance(here, dict) and part in here) or (
            isinstance(here, list) and isinstance(part, int) and part < len(here)
        ):
            here = here[part]
        elif not absent or at < len(parts) - 1 or not isinstance(here, dict):
            continue
        kept.append(str(part).replace("~", "~0").replace("/", "~1"))
    return "".join(f"/{part}" for part in kept)


def _invalid(error: RequestValidationError) -> Response:
    faults = error.errors()
    if any(fault["type"] == "json_invalid" for fault in faults):
        return problem("unreadable-body")
    in_body = all(fault["loc"][:1] == ("body",) for fault in faults)
    body = error.body if in_body else {}
    told = [
        {
            "pointer": _pointer(fault["loc"][1:], body, absent=not in_body or fault["type"] == "missing"),
            "code": fault["type"],
            "detail": _detail(fault),
        }
        for fault in faults[:50]
    ]
    return problem("invalid-body" if in_body else "invalid-query", errors=told)


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
        return problem(error.kind, detail=error.detail)

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
