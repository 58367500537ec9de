"""/v1/batches: judge and store many points at once; read the batch, one row in full, or the workshop view."""

from collections.abc import Callable
from dataclasses import dataclass
from datetime import UTC
from typing import Annotated, Any, TypeVar
from uuid import UUID, uuid4

import orjson
from fastapi import APIRouter, Header, Path, Query, Request, Response
from sqlalchemy import Engine

from faultloop import __version__
from faultloop.api.bodies import limited_body
from faultloop.api.negotiation import ASKED_LANGUAGE, language, media_type, unless_held
from faultloop.api.own_rules import StoredSets
from faultloop.api.problems import Refused
from faultloop.api.worker import Worker
from faultloop.assessment.texts import LANGUAGES
from faultloop.digests import json_bytes
from faultloop.exchange.batch_answers import answer, answer_csv, restored
from faultloop.exchange.batches import Batch, BatchQuery, BatchRow, WorkshopQuery
from faultloop.exchange.columns import FileRefused
from faultloop.exchange.judging import Judged, judged
from faultloop.exchange.uploads import NotJson, Read, Upload, read_upload
from faultloop.exchange.workshop import PopulationTooSmall
from faultloop.exchange.workshop_view import Workshop
from faultloop.exchange.workshop_words import workshop_words
from faultloop.protection.catalogue import catalogue
from faultloop.records.batches import find_batch, keep_batch
from faultloop.records.tables import BatchRecord, KeptBatch
from faultloop.replay import batch_row, batch_workshop
from faultloop.reports.workshop import workshop_page

CSV, HTML, JSON = "text/csv", "text/html", "application/json"
Result = TypeVar("Result")
router = APIRouter(prefix="/v1/batches", tags=["batches"])
_SENT: dict[str, Any] = {
    "requestBody": {
        "required": True,
        "content": {
            CSV: {"schema": {"type": "string", "description": "One row a point, columns by their contract names"}},
            JSON: {"schema": {"$ref": "#/components/schemas/BatchRequest"}},
        },
    }
}
_CSV_ANSWER: dict[str, Any] = {CSV: {"schema": {"type": "string", "description": "The rows with their answers"}}}
_OK: dict[int | str, dict[str, Any]] = {200: {"model": Batch, "description": "Judged", "content": _CSV_ANSWER}}


@router.post("", response_model=Batch, openapi_extra=_SENT, responses=_OK, summary="Judge and store many points")
async def post_batch(
    request: Request,
    query: Annotated[BatchQuery, Query()],
) -> Response:
    """Judge a file or a list of points at once; the batch is stored under an id that is made here (Location)."""
    kept = await _keep(request, uuid4(), await _upload(request, query), _liked(request, CSV))
    return _answered(kept.batch, 200, kept.kind, kept.content)


@router.put(
    "/{id:uuid}",
    response_model=Batch,
    openapi_extra=_SENT,
    responses=_OK | {201: {**_OK[200], "description": "Judged and stored"}},
    summary="Judge and store many points under the caller's id",
)
async def put_batch(
    id: UUID,  # noqa: A002
    request: Request,
    query: Annotated[BatchQuery, Query()],
    if_none_match: Annotated[str | None, Header(max_length=200, description="* asks for a new one only")] = None,
) -> Response:
    """The same bytes and parameters again answer what is stored, others are refused."""
    upload = await _upload(request, query)
    kept = await _keep(request, id, upload, _liked(request, CSV))
    if kept.batch.record.input_digest != upload.input_digest:
        raise Refused("precondition-failed" if if_none_match is not None else "conflict")
    return _answered(kept.batch, 201 if kept.created else 200, kept.kind, kept.content)


def _liked(request: Request, other: str) -> str:
    """JSON, or the other representation where the caller likes it better."""
    return media_type(request, (JSON, other))


async def _upload(request: Request, query: BatchQuery) -> Upload:
    kind, _, parameters = (part.strip().lower() for part in request.headers.get("content-type", "").partition(";"))
    if kind not in (CSV, JSON) or ("charset=" in parameters and "utf-8" not in parameters):
        raise Refused("unsupported-media-type", "Send text/csv or application/json in UTF-8.")
    if kind == JSON and query.model_fields_set:
        raise Refused("unreadable-file", "default, decimal and ignore are for text/csv; in JSON, send defaults.")
    content = await limited_body(request, request.app.state.max_batch_bytes)
    return Upload("csv" if kind == CSV else "json", content, query, StoredSets(request.app.state.engine))


@dataclass(frozen=True, slots=True)
class _Kept:
    """A batch that is stored, and the representation to be answered."""

    batch: KeptBatch
    created: bool
    kind: str
    content: bytes


async def _keep(request: Request, id: UUID, upload: Upload, kind: str) -> _Kept:  # noqa: A002
    """The batch under this id: the stored one, else judged now, stored and only then answered."""
    engine = request.app.state.engine

    def work() -> _Kept:
        found = find_batch(engine, str(id))
        if found is not None:
            return _Kept(found, False, kind, _content(found, kind, engine))
        read = read_upload(upload)
        batch = judged(read.rows)
        kept, created = keep_batch(engine, _record(str(id), upload, read, batch))
        content = answer_csv(batch).encode() if created and kind == CSV else _content(kept, kind, engine)
        return _Kept(kept, created, kind, content)

    return await _run(request, work)


async def _run(request: Request, work: Callable[[], Result]) -> Result:
    worker: Worker = request.app.state.worker
    try:
        return await worker.run(work)
    except FileRefused as error:
        raise Refused("unreadable-file", str(error)) from None
    except PopulationTooSmall as error:
        raise Refused("invalid-query", f"population: {error}.") from None
    except NotJson:
        raise Refused("unreadable-body") from None


def _record(id: str, upload: Upload, read: Read, batch: Judged) -> BatchRecord:  # noqa: A002
    body = answer(batch, id, read.reading, upload.input_digest)
    return BatchRecord(
        id=id,
        input_digest=upload.input_digest,
        format=upload.format,
        **body["counts"],
        engine=__version__,
        devices_digest=catalogue().digest,
        parameters=json_bytes(upload.parameters),
        content=upload.content,
        answer=json_bytes(body),
    )


def _content(kept: KeptBatch, kind: str, engine: Engine) -> bytes:
    """The stored answer, byte for byte; as CSV, the rows as they came with their answers beside them."""
    if kind == JSON:
        return kept.record.answer
    return answer_csv(restored(read_upload(upload_of(kept, engine)).rows, orjson.loads(kept.record.answer))).encode()


def _answered(kept: KeptBatch, status: int, kind: str, content: bytes) -> Response:
    headers = {
        "ETag": _tag(kept, kind),
        "Cache-Control": "no-store",
        "Vary": "Accept",
        "Location": f"/v1/batches/{kept.record.id}",
    }
    return Response(content, status, media_type=kind, headers=headers)


def _tag(kept: KeptBatch, kind: str) -> str:
    """What stands under an id never changes, so its input's digest is a strong tag of each representation."""
    return f'"{kept.record.input_digest}"' if kind == JSON else f'"{kept.record.input_digest}-csv"'


def upload_of(kept: KeptBatch, engine: Engine) -> Upload:
    """What was sent, as it was stored; the rule sets that it names are stored for good."""
    query = BatchQuery.model_validate_json(kept.record.parameters)
    return Upload("csv" if kept.record.format == "csv" else "json", kept.record.content, query, StoredSets(engine))


@router.get("/{id:uuid}", response_model=Batch, responses=_OK, summary="Read a stored batch")
async def get_batch(
    id: UUID,  # noqa: A002
    request: Request,
    if_none_match: Annotated[str | None, Header(max_length=200)] = None,
) -> Response:
    """Give the stored answer, byte for byte; as CSV, the rows as they came with their answers beside them."""
    kept, kind = await _found(request, id), _liked(request, CSV)
    content = await _run(request, lambda: _content(kept, kind, request.app.state.engine))
    return unless_held(_answered(kept, 200, kind, content), if_none_match)


@router.get(
    "/{id:uuid}/rows/{number}",
    response_model=BatchRow,
    openapi_extra=ASKED_LANGUAGE,
    summary="Read one row of a batch in full",
)
async def get_batch_row(
    id: UUID,  # noqa: A002
    number: Annotated[int, Path(ge=1, le=10_000_000, description="Row as the batch's answer numbers it")],
    request: Request,
) -> Response:
    """Compute the stored row again under the stored edition, with its texts; say what has changed since.

    Questions and errors about cells are stored with the batch, in English.
    """
    kept, spoken = await _found(request, id), language(request)
    engine = request.app.state.engine
    body = await _run(request, lambda: batch_row(upload_of(kept, engine), kept.record.answer, number, spoken))
    if body is None:
        raise Refused("not-found", "The batch has no row of this number.")
    told = spoken if "assessment" in body else LANGUAGES[0]
    headers = {"Cache-Control": "no-store", "Content-Language": told, "Vary": "Accept-Language"}
    return Response(json_bytes(body), media_type=JSON, headers=headers)


@router.get(
    "/{id:uuid}/workshop",
    response_model=Workshop,
    responses={200: {"model": Workshop, "content": {HTML: {"schema": {"type": "string", "description": "A page"}}}}},
    openapi_extra=ASKED_LANGUAGE,
    summary="Read a batch as a list of work",
)
async def get_batch_workshop(
    id: UUID,  # noqa: A002
    query: Annotated[WorkshopQuery, Query()],
    request: Request,
) -> Response:
    """What to take out of use, what to put right in order of risk, what to ask, what the sample does not show.

    Questions and errors about cells are in English in every language.
    """
    kept, kind, spoken = await _found(request, id), _liked(request, HTML), language(request)
    content = await _run(request, lambda: _workshop(kept, query.population, kind, spoken, request.app.state.engine))
    headers = {"Cache-Control": "no-store", "Content-Language": spoken, "Vary": "Accept, Accept-Language"}
    if kind == HTML:
        headers["Content-Security-Policy"] = "default-src 'none'; style-src 'unsafe-inline'"
    return Response(content, media_type=kind, headers=headers)


def _workshop(kept: KeptBatch, population: int | None, kind: str, language: str, engine: Engine) -> bytes:
    view = batch_workshop(upload_of(kept, engine), kept.record.answer, population, language)
    stored_at = kept.stored_at.astimezone(UTC).isoformat(timespec="seconds").replace("+00:00", "Z")
    view |= {"id": kept.record.id, "stored_at": stored_at}
    if kind == JSON:
        return json_bytes(view)
    shown = Workshop.model_validate(view).model_dump()
    return workshop_page(shown, workshop_words(language).model_dump()).encode()


async def _found(request: Request, id: UUID) -> KeptBatch:  # noqa: A002
    engine = request.app.state.engine
    kept: KeptBatch | None = await _run(request, lambda: find_batch(engine, str(id)))
    if kept is None:
        raise Refused("not-found", "No batch is stored under this id.")
    return kept
