"""/v1/bench-networks: what is true of a bench, what a planned link would make of it, and what may be changed."""

import asyncio

from fastapi import APIRouter, Request, Response

from faultloop.api.bodies import BENCH_BODY, DirectRoute, read_bench
from faultloop.api.negotiation import ASKED_LANGUAGE, SVG, language, media_type
from faultloop.api.problems import Refused
from faultloop.digests import json_bytes
from faultloop.exchange.bench_answers import BenchNetwork
from faultloop.exchange.bench_networks import BenchRequest
from faultloop.exchange.bench_render import solved_answer
from faultloop.reports.benches import bench_drawing

router = APIRouter(prefix="/v1/bench-networks", tags=["bench networks"], route_class=DirectRoute)
JSON = "application/json"
FORMATS = {"json": JSON, "svg": SVG}
# A bench of more parts is solved in a thread, so that it keeps nobody else waiting.
MOST_AT_ONCE = 16
FORMAT = {
    "name": "format",
    "in": "query",
    "required": False,
    "description": "Goes before the Accept header",
    "schema": {"type": "string", "enum": list(FORMATS)},
}


@router.post(
    "",
    response_model=BenchNetwork,
    openapi_extra=BENCH_BODY | {"parameters": [FORMAT, *ASKED_LANGUAGE["parameters"]]},
    summary="Solve a bench as it stands, with a planned link, and with every single change; store nothing",
    responses={200: {"content": {SVG: {"schema": {"type": "string"}}}}},
)
async def solve_bench_network(request: Request) -> Response:
    """Give every node's standing to earth, contact currents, what a planned link would do, and what would help.

    As JSON, or drawn as SVG.  Nothing is stored.
    """
    kind = _kind(request)
    body = await read_bench(request)
    spoken = language(request)
    if len(body.items) + len(body.links) > MOST_AT_ONCE:
        content = await asyncio.to_thread(_content, body, kind, spoken)
    else:
        content = _content(body, kind, spoken)
    headers = {"Cache-Control": "no-store", "Content-Language": spoken, "Vary": "Accept, Accept-Language"}
    if kind == SVG:
        headers |= {"Content-Security-Policy": "default-src 'none'", "X-Content-Type-Options": "nosniff"}
    return Response(content, media_type=kind, headers=headers)


def _kind(request: Request) -> str:
    unknown = sorted(set(request.query_params) - {"format"})
    if unknown:
        raise Refused("invalid-query", "The only parameter here is format: json or svg.")
    asked = request.query_params.get("format")
    if asked is None:
        return media_type(request, (JSON, SVG))
    if asked not in FORMATS or len(request.query_params.multi_items()) > 1:
        raise Refused("invalid-query", "format is json or svg.")
    return FORMATS[asked]


def _content(body: BenchRequest, kind: str, spoken: str) -> bytes:
    solved, answer = solved_answer(body, spoken)
    return bench_drawing(solved.bench, answer, spoken) if kind == SVG else json_bytes(answer)
