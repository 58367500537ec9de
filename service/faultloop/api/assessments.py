"""/v1/assessments: judge a point, with or without storing it; read, list and replay what is stored."""

import base64
import binascii
import json
from dataclasses import dataclass
from datetime import UTC
from typing import Annotated, Any
from uuid import UUID

from fastapi import APIRouter, Header, Query, Request, Response

from faultloop import __version__
from faultloop.api.bodies import POINT_BODY, DirectRoute, read_point, refuse_duplicates
from faultloop.api.negotiation import ASKED_LANGUAGE, SVG, drawing, language, media_type, unless_held
from faultloop.api.problems import Refused
from faultloop.assessment.texts import LANGUAGES
from faultloop.digests import digest, json_bytes, sha256
from faultloop.exchange.answers import Assessment
from faultloop.exchange.mapping import overcurrent_device, residual_device
from faultloop.exchange.render import request_bytes
from faultloop.exchange.requests import AssessmentRequest
from faultloop.exchange.resources import AssessmentList, DrawingQuery, ListQuery, ReplayBody
from faultloop.records.queries import find, page
from faultloop.records.rule_sets import content_of
from faultloop.records.tables import Record, Stored
from faultloop.replay import asked_again, language_of, replay
from faultloop.reports.curves import Judged, assessment_drawing

router = APIRouter(prefix="/v1/assessments", tags=["assessments"])
# Judging is the hot path: these functions read their requests themselves.
judging = APIRouter(prefix="/v1/assessments", tags=["assessments"], route_class=DirectRoute)
PUT_PARAMETERS: list[dict[str, Any]] = [
    {"name": "id", "in": "path", "required": True, "schema": {"type": "string", "format": "uuid"}},
    {
        "name": "if-none-match",
        "in": "header",
        "description": "* asks for a new one only",
        "schema": {"type": "string"},
    },
]
JSON = "application/json"
MOST_PER_PAGE = 200


@judging.post(
    "/preview",
    response_model=Assessment,
    openapi_extra=POINT_BODY | ASKED_LANGUAGE,
    summary="Judge one measured point; store nothing",
)
async def preview_assessment(request: Request) -> Response:
    """Give the verdict on one point with its arithmetic; nothing is stored."""
    judged = await _judged(request)
    headers = {"Cache-Control": "no-store", "Content-Language": judged.language, "Vary": "Accept-Language"}
    return Response(json_bytes(judged.answer), media_type=JSON, headers=headers)


@dataclass(frozen=True, slots=True)
class _Judged:
    """A point with its canonical bytes, their digest, the language asked for, and the answer in it."""

    body: AssessmentRequest
    canonical: bytes
    input_digest: str
    language: str
    answer: dict[str, Any]


async def _judged(request: Request) -> _Judged:
    body, raw = await read_point(request)
    canonical = request_bytes(body)
    refuse_duplicates(raw, canonical)
    input_digest = sha256(canonical)
    spoken = language(request)
    answer = await request.app.state.gather.assess(body, input_digest, spoken)
    return _Judged(body, canonical, input_digest, spoken, answer)


@judging.put(
    "/{id:uuid}",
    response_model=Assessment,
    openapi_extra={**POINT_BODY, "parameters": [*PUT_PARAMETERS, *ASKED_LANGUAGE["parameters"]]},
    summary="Judge one measured point and store the answer",
    responses={201: {"model": Assessment, "description": "Judged and stored"}},
)
async def put_assessment(request: Request) -> Response:
    """Judge and store under the caller's id; the same body again answers what is stored, another is refused.

    The answer is stored in the language asked for and stays in it, whatever language is asked for later.
    """
    judged = await _judged(request)
    await request.app.state.own_rules.remember(judged.body.rule_set)
    stored, created = await request.app.state.writer.put(_record(request.path_params["id"], judged))
    if stored.record.input_digest != judged.input_digest:
        raise Refused("precondition-failed" if "if-none-match" in request.headers else "conflict")
    answer = _stored_answer(stored, judged.language if created else language_of(stored.record.answer))
    answer.status_code = 201 if created else 200
    answer.headers["Vary"] = "Accept-Language"
    return answer


def _record(id: UUID, judged: _Judged) -> Record:  # noqa: A002
    provenance = judged.answer["provenance"]
    return Record(
        id=str(id),
        input_digest=judged.input_digest,
        verdict=judged.answer["verdict"],
        urgency=judged.answer["urgency"],
        rules=provenance["rules"],
        label=judged.body.point.label,
        engine=__version__,
        rules_digest=provenance["rules_digest"],
        devices_digest=provenance["devices_digest"],
        request=judged.canonical,
        answer=json_bytes(judged.answer),
    )


def _stored_answer(stored: Stored, spoken: str) -> Response:
    # What stands under an id never changes, so the digest of its input is a strong tag of its one representation.
    headers = {"ETag": f'"{stored.record.input_digest}"', "Cache-Control": "no-store"}
    headers |= {"Location": f"/v1/assessments/{stored.record.id}", "Content-Language": spoken}
    return Response(stored.record.answer, media_type=JSON, headers=headers)


@router.get(
    "/{id:uuid}",
    response_model=Assessment,
    summary="Read a stored assessment",
    responses={304: {"description": "Not changed since the tag in If-None-Match"}},
)
def get_assessment(
    id: UUID,  # noqa: A002
    request: Request,
    if_none_match: Annotated[str | None, Header(max_length=200)] = None,
) -> Response:
    """Give the stored answer, byte for byte."""
    stored = _found(request, id)
    return unless_held(_stored_answer(stored, language_of(stored.record.answer)), if_none_match)


@router.get(
    "/{id:uuid}/curve",
    response_class=Response,
    summary="Draw a stored assessment",
    responses={200: {"content": {SVG: {"schema": {"type": "string"}}}, "description": "Drawing"}},
)
def get_assessment_curve(
    id: UUID,  # noqa: A002
    query: Annotated[DrawingQuery, Query()],
    request: Request,
) -> Response:
    """Draw the devices' bands, the prospective earth fault current and the required time, in the stored language.

    What is not known, a missing device too, is said in words on the drawing and not drawn.
    """
    if query.format is None:
        media_type(request, (SVG,))
    stored = _found(request, id).record
    content = content_of(request.app.state.engine, stored.rules_digest)
    point, answer = asked_again(stored.request, stored.rules, content), json.loads(stored.answer)
    if point is None:
        raise Refused("not-found", "The rule set by which this was judged is not held here, so nothing can be drawn.")
    device = None if point.overcurrent_device is None else overcurrent_device(point.overcurrent_device)
    told = language_of(stored.answer)
    # Bytes stay what they are; a drawing is made today, so it needs words that are held today.
    spoken = told if told in LANGUAGES else LANGUAGES[0]
    judged = Judged(stored.id, point.point.label, device, residual_device(point), point.rule_set, answer, spoken)
    headers = {"Vary": "Accept", "Cache-Control": "no-store", "Content-Language": spoken}
    return drawing(request, assessment_drawing(judged), headers)


@router.get("", response_model=AssessmentList, summary="List stored assessments, newest first")
def list_assessments(query: Annotated[ListQuery, Query()], request: Request) -> Response:
    """Give one page; `next` leads on, and what is stored meanwhile neither repeats nor hides a line."""
    size = min(query.page_size, MOST_PER_PAGE)
    filters = {"verdict": query.verdict, "urgency": query.urgency}
    before = _position(query.cursor, filters)
    rows = page(request.app.state.engine, before=before, size=size + 1, **filters)
    fields = ("id", "label", "verdict", "urgency", "rules", "input_digest")
    items = []
    for row in rows[:size]:
        item = {name: getattr(row, name) for name in fields if getattr(row, name) is not None}
        items.append({**item, "stored_at": row.stored_at.astimezone(UTC).isoformat().replace("+00:00", "Z")})
    body: dict[str, Any] = {"items": items}
    if len(rows) > size:
        cursor = _cursor(rows[size - 1].sequence, filters)
        wanted = {"page_size": size, "cursor": cursor, **{k: v for k, v in filters.items() if v}}
        following = request.url.replace_query_params(**wanted)
        body["next"] = f"{following.path}?{following.query}"
    return Response(json_bytes(body), media_type=JSON, headers={"Cache-Control": "no-store"})


def _cursor(sequence: int, filters: dict[str, Any]) -> str:
    told = json.dumps([sequence, digest(filters)[:16]]).encode()
    return base64.urlsafe_b64encode(told).decode().rstrip("=")


def _position(cursor: str | None, filters: dict[str, Any]) -> int | None:
    """Sequence that a cursor stands for; one of another list is refused."""
    if cursor is None:
        return None
    try:
        sequence, told = json.loads(base64.urlsafe_b64decode(cursor + "=" * (-len(cursor) % 4)))
    except (binascii.Error, ValueError, TypeError):
        raise Refused("refused", "This cursor was not given by this service.") from None
    if told != digest(filters)[:16] or type(sequence) is not int or not 0 < sequence < 2**62:
        raise Refused("refused", "This cursor belongs to another list.")
    return sequence


@router.get("/{id:uuid}/replay", response_model=ReplayBody, summary="Compute a stored assessment again")
def replay_assessment(id: UUID, request: Request) -> Response:  # noqa: A002
    """Compute the stored input again under the stored edition, and say whether the bytes are the same."""
    stored = _found(request, id).record
    content = content_of(request.app.state.engine, stored.rules_digest)
    again = replay(stored.request, stored.answer, stored.rules, stored.input_digest, content)
    body: dict[str, Any] = {
        "id": stored.id,
        "identical": again.identical,
        "stored": json.loads(stored.answer)["provenance"],
        "differences": again.differences,
    }
    if again.recomputed is not None:
        body["recomputed"] = again.recomputed["provenance"]
    return Response(json_bytes(body), media_type=JSON, headers={"Cache-Control": "no-store"})


def _found(request: Request, id: UUID) -> Stored:  # noqa: A002
    stored = find(request.app.state.engine, str(id))
    if stored is None:
        raise Refused("not-found", "No assessment is stored under this id.")
    return stored
