"""Reading a measured point, or a set of rules, from a request body, strictly and in one pass.

The body is validated from its bytes: JSON's own types stay strict, and a busy service spares a second walk.
"""

import json
from collections.abc import Callable, Coroutine
from typing import Any, TypeVar

from fastapi import Request, Response
from fastapi.exceptions import RequestValidationError
from fastapi.routing import APIRoute
from pydantic import TypeAdapter, ValidationError

from faultloop.api.problems import Refused
from faultloop.digests import canonical_bytes
from faultloop.exchange.bench_faults import consistent
from faultloop.exchange.bench_judging import bench_bytes
from faultloop.exchange.bench_networks import BenchRequest
from faultloop.exchange.own_rules import LONGEST_SET, OwnRules, own_rules
from faultloop.exchange.requests import UNKNOWN_RULES, AssessmentRequest, Ruled
from faultloop.rules.loader import LoadedRules, shipped


class DirectRoute(APIRoute):
    """A route whose function reads the request itself: nothing is parsed, solved or serialised around it."""

    def get_route_handler(self) -> Callable[[Request], Coroutine[Any, Any, Response]]:
        """Give the function itself."""
        handler: Callable[[Request], Coroutine[Any, Any, Response]] = self.endpoint
        return handler


def json_body(schema: str) -> dict[str, Any]:
    """What the document says of a body that a function reads itself."""
    content = {"application/json": {"schema": {"$ref": f"#/components/schemas/{schema}"}}}
    return {"requestBody": {"required": True, "content": content}}


POINT_BODY = json_body("AssessmentRequest")
RuledT = TypeVar("RuledT", bound=Ruled)
OWN_RULES_BODY = json_body("OwnRuleSet")
BENCH_BODY = json_body("BenchRequest")
_OWN_RULES: TypeAdapter[Any] = TypeAdapter(OwnRules)


async def read_point(request: Request) -> tuple[AssessmentRequest, bytes]:
    """Give the validated point and the bytes that it came in."""
    return await read_ruled(request, AssessmentRequest)


async def read_ruled(request: Request, model: type[RuledT]) -> tuple[RuledT, bytes]:
    """Give a validated request that names its rules, and the bytes that it came in."""
    raw, own = await _json(request, request.app.state.max_body_bytes), request.app.state.own_rules
    try:
        return model.model_validate_json(raw, context=own.by_name), raw
    except ValidationError as error:
        name = _unknown_rules(error)
        if name is None or await own.find(name) is None:
            raise _refused(error, raw) from None
    try:
        return model.model_validate_json(raw, context=own.by_name), raw
    except ValidationError as error:
        raise _refused(error, raw) from None


def _unknown_rules(error: ValidationError) -> str | None:
    """Name of the rule set that is not published: callers' stored sets are looked up by id:edition."""
    names = [fault["input"] for fault in error.errors(include_url=False) if fault["type"] == UNKNOWN_RULES]
    return next(iter(names), None)


async def read_rule_set(request: Request) -> tuple[LoadedRules, LoadedRules | None]:
    """Give a caller's own set, resolved and held to the contract, and the set that it extends."""
    raw = await _json(request, LONGEST_SET)
    try:
        said = _OWN_RULES.validate_json(raw)
        refuse_duplicates(raw, canonical_bytes(said.model_dump(mode="json", exclude_unset=True)))
        return own_rules(said), shipped().get(said.extends or "")
    except ValidationError as error:
        raise _refused(error, raw) from None


async def read_bench(request: Request) -> BenchRequest:
    """Give a validated bench whose parts fit together."""
    body, raw = await read_ruled(request, BenchRequest)
    refuse_duplicates(raw, bench_bytes(body))
    try:
        return consistent(body)
    except ValidationError as error:
        raise _refused(error, raw) from None


async def _json(request: Request, most: int) -> bytes:
    """The bytes of a JSON body."""
    kind = request.headers.get("content-type", "").split(";", 1)[0].strip().lower()
    if kind != "application/json":
        raise Refused("unsupported-media-type")
    return await limited_body(request, most)


def _refused(error: ValidationError, raw: bytes) -> RequestValidationError:
    faults = [{**fault, "loc": ("body", *fault["loc"])} for fault in error.errors(include_url=False)]
    return RequestValidationError(faults, body=_parsed(raw))


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
