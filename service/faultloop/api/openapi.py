"""The OpenAPI document: what the framework writes, mended where its word and the service's differ."""

import json
from typing import Any

from fastapi import FastAPI
from fastapi.openapi.utils import get_openapi
from pydantic import BaseModel

from faultloop.api.problems import KINDS, MEDIA_TYPE
from faultloop.digests import json_bytes
from faultloop.exchange.batch_answers import answer, answer_csv
from faultloop.exchange.batches import BatchQuery, BatchRequest
from faultloop.exchange.bench_faults import validated
from faultloop.exchange.bench_networks import BenchRequest
from faultloop.exchange.bench_render import bench_answer
from faultloop.exchange.examples import (
    EXAMPLE_BATCH,
    EXAMPLE_BENCH,
    EXAMPLE_FILE,
    EXAMPLE_REQUEST,
    EXAMPLE_RULES,
    EXAMPLE_SEPARATED,
)
from faultloop.exchange.judging import judged
from faultloop.exchange.render import assess_requests
from faultloop.exchange.requests import AssessmentRequest
from faultloop.exchange.separated_supplies import SeparatedSupplyRequest, as_assessment
from faultloop.exchange.uploads import Upload, read_upload

# Requests whose bodies are read from their bytes, and hold no field that is not known.
CLOSED: tuple[type[BaseModel], ...] = (AssessmentRequest, SeparatedSupplyRequest, BenchRequest)
EXAMPLE_ID = "00000000-0000-4000-8000-000000000000"
DESCRIPTION = (
    "Measured points in; prospective fault current, disconnection time and a verdict with its arithmetic out. "
    "An aid to competent persons: it gives no permission, and local wiring rules and licensed persons decide."
)


def document(app: FastAPI) -> dict[str, Any]:
    """Write the document once; it is then kept on the app."""
    if app.openapi_schema is None:
        schema = get_openapi(
            title=app.title,
            version=app.version,
            description=DESCRIPTION,
            routes=app.routes,
            openapi_version="3.1.0",
        )
        _put_request_schemas(schema)
        _open_answers(schema)
        schema["servers"] = [{"url": "/", "description": "This service"}]
        for path in schema["paths"].values():
            for operation in path.values():
                _mend(operation)
        _put_examples(schema)
        _put_batch_examples(schema)
        _put_bench_example(schema)
        app.openapi_schema = schema
    return app.openapi_schema


def _put_request_schemas(schema: dict[str, Any]) -> None:
    """The body is read from its bytes, so the framework does not know its schema."""
    components = schema["components"]["schemas"]
    models: tuple[type[BaseModel], ...] = (*CLOSED, BatchRequest)
    for model in models:
        body = model.model_json_schema(ref_template="#/components/schemas/{model}")
        components |= body.pop("$defs", {}) | {model.__name__: body}
    schema["components"]["schemas"] = dict(sorted(components.items()))


def _open_answers(schema: dict[str, Any]) -> None:
    """Requests are closed; an answer may gain a field, and a client must bear it."""
    asked = {name for model in CLOSED for name in (model.__name__, *model.model_json_schema().get("$defs", {}))}
    for name, model in schema["components"]["schemas"].items():
        if name not in asked:
            model.pop("additionalProperties", None)


def _mend(operation: dict[str, Any]) -> None:
    """Errors are problem details, whatever the framework wrote of them."""
    problem = {MEDIA_TYPE: {"schema": {"$ref": "#/components/schemas/Problem"}}}
    for status, response in operation["responses"].items():
        refs = [content.get("schema", {}).get("$ref", "") for content in response.get("content", {}).values()]
        own = any(ref and not ref.endswith("/Problem") for ref in refs)
        if status[0] in "45" and not own:
            response["content"] = problem
    if "requestBody" not in operation:
        for status in ("409", "412", "413", "415"):
            operation["responses"].pop(status, None)


def _put_examples(schema: dict[str, Any]) -> None:
    """One example each, answered by the engine when the document is written, so that it cannot lie."""
    separated = SeparatedSupplyRequest.model_validate(EXAMPLE_SEPARATED)
    operation = schema["paths"]["/v1/separated-supplies"]["post"]
    asked = operation["requestBody"]["content"]["application/json"]
    asked["examples"] = {"bench": {"summary": "A transformer and one item", "value": EXAMPLE_SEPARATED}}
    told = assess_requests([as_assessment(separated)])[0]
    content = operation["responses"]["200"]["content"]["application/json"]
    content["examples"] = {"bench": {"summary": "A transformer and one item", "value": told}}
    answer = assess_requests([AssessmentRequest.model_validate(EXAMPLE_REQUEST)])[0]
    for path, method, status in (("/preview", "post", "200"), ("/{id}", "put", "201")):
        operation = schema["paths"][f"/v1/assessments{path}"][method]
        body = operation["requestBody"]["content"]["application/json"]
        body["examples"] = {"bench": {"summary": "A bench outlet", "value": EXAMPLE_REQUEST}}
        content = operation["responses"][status]["content"]["application/json"]
        content["examples"] = {"bench": {"summary": "A bench outlet", "value": answer}}
    for path, method in (("/validate", "post"), ("/{rules}", "put")):
        body = schema["paths"][f"/v1/rule-sets{path}"][method]["requestBody"]["content"]["application/json"]
        body["examples"] = {"site": {"summary": "An owner's policy", "value": EXAMPLE_RULES}}


def _put_batch_examples(schema: dict[str, Any]) -> None:
    """A file and a list, each with its answer and the file also with its answer as CSV."""
    for path, method, status in (("", "post", "200"), ("/{id}", "put", "201")):
        operation = schema["paths"][f"/v1/batches{path}"][method]
        body, answered = operation["requestBody"]["content"], operation["responses"][status]["content"]
        for form, kind, sent in (("csv", "text/csv", EXAMPLE_FILE), ("json", "application/json", EXAMPLE_BATCH)):
            content = sent.encode() if isinstance(sent, str) else json_bytes(sent)
            upload = Upload("csv" if form == "csv" else "json", content, BatchQuery())
            read = read_upload(upload)
            batch = judged(read.rows)
            told = json.loads(json_bytes(answer(batch, EXAMPLE_ID, read.reading, upload.input_digest)))
            summary = "A file" if form == "csv" else "A list"
            body[kind]["examples"] = {form: {"summary": summary, "value": sent}}
            examples = answered["application/json"].setdefault("examples", {})
            examples[form] = {"summary": f"{summary}, answered", "value": told}
            if form == "csv":
                answered["text/csv"]["examples"] = {form: {"summary": "The file", "value": answer_csv(batch)}}


def _put_bench_example(schema: dict[str, Any]) -> None:
    """One bench, solved when the document is written."""
    operation = schema["paths"]["/v1/bench-networks"]["post"]
    body = operation["requestBody"]["content"]["application/json"]
    body["examples"] = {"clip": {"summary": "A clip about to be made", "value": EXAMPLE_BENCH}}
    content = operation["responses"]["200"]["content"]["application/json"]
    answer = json.loads(json_bytes(bench_answer(validated(EXAMPLE_BENCH))))
    content["examples"] = {"clip": {"summary": "A clip about to be made", "value": answer}}


def problem_responses(model: Any) -> dict[int | str, dict[str, Any]]:
    """Errors that every operation may answer."""
    statuses = sorted({status for status, _, _ in KINDS.values()})
    named = {status: title for status, title, _ in reversed(KINDS.values())}
    return {status: {"model": model, "description": named[status]} for status in statuses}
