"""Health, and the pages that problem types lead to."""

from html import escape
from typing import Annotated

from fastapi import APIRouter, Path, Request, Response
from fastapi.responses import HTMLResponse

from faultloop.api.problems import KINDS, Refused
from faultloop.digests import json_bytes
from faultloop.exchange.resources import Health
from faultloop.records.queries import ready

router = APIRouter(tags=["service"])


@router.get("/health/live", response_model=Health, summary="Does the process answer?")
async def get_liveness() -> Response:
    """Say that the process answers."""
    return Response(json_bytes({"status": "live"}), media_type="application/json")


@router.get(
    "/health/ready",
    response_model=Health,
    summary="Can assessments be stored?",
    responses={503: {"model": Health, "description": "Not ready"}},
)
def get_readiness(request: Request) -> Response:
    """Say whether the database answers and holds the tables that this version expects."""
    good = ready(request.app.state.engine)
    body = {"status": "ready" if good else "not-ready"}
    return Response(json_bytes(body), 200 if good else 503, media_type="application/json")


@router.get("/problems/{kind}", response_class=HTMLResponse, summary="What a type of problem means")
async def get_problem_page(kind: Annotated[str, Path(min_length=1, max_length=60)]) -> Response:
    """Explain a type of problem."""
    if kind not in KINDS:
        raise Refused("not-found", "No such type of problem.")
    status, title, detail = KINDS[kind]
    page = f"<!doctype html><html lang=en><meta charset=utf-8><title>{escape(title)}</title>"
    return HTMLResponse(f"{page}<h1>{escape(title)}</h1><p>HTTP status {status}.</p><p>{escape(detail)}</p></html>")
