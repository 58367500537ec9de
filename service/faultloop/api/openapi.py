"""The OpenAPI document: what the framework writes, mended where its word and the service's differ."""

from typing import Any

from fastapi import FastAPI
from fastapi.openapi.utils import get_openapi

from faultloop.api.problems import KINDS, MEDIA_TYPE
from faultloop.exchange.batches import BatchRequest
from faultloop.exchange.examples import EXAMPLE_REQUEST
from faultloop.exchange.render import assess_requests
from faultloop.exchange.requests import AssessmentRequest

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
        schema["servers"] = [{"url": "/", "description": "This service"}]
        for path in schema["paths"].values():
            for operation in path.values():
                _mend(operation)
        _put_examples(schema)
        app.openapi_schema = schema
    return app.openapi_schema


def _put_request_schemas(schema: dict[str, Any]) -> None:
    """The body is read from its bytes, so the framework does not know its schema."""
    components = schema["components"]["schemas"]
    for model in (AssessmentRequest, BatchRequest):
        body = model.model_json_schema(ref_template="#/components/schemas/{model}")
        components |= body.pop("$defs", {}) | {model.__name__: body}
    schema["components"]["schemas"] = dict(sorted(components.items()))


def _mend(operation: dict[str, Any]) -> None:
    """Errors are problem details, whatever the framework wrote of them."""
    problem = {MEDIA_TYPE: {"schema": {"$ref": "#/components/schemas/Problem"}}}
    for status, response in operation["responses"].items():
        refs = [content.get("schema", {}).get("$ref", "") for content in response.get("content", {}).values()]
        own = any(ref and not ref.endswith("/Problem") for ref in refs)
        if status[0] in "45" and not own:
            response["content"] = problem


def _put_examples(schema: dict[str, Any]) -> None:
    """One example, answered by the engine when the document is written, so that it cannot lie."""
    answer = assess_requests([AssessmentRequest.model_validate(EXAMPLE_REQUEST)])[0]
    for path, method, status in (("/preview", "post", "200"), ("/{id}", "put", "201")):
        operation = schema["paths"][f"/v1/assessments{path}"][method]
        body = operation["requestBody"]["content"]["application/json"]
        body["examples"] = {"bench": {"summary": "A bench outlet", "value": EXAMPLE_REQUEST}}
        content = operation["responses"][status]["content"]["application/json"]
        content["examples"] = {"bench": {"summary": "A bench outlet", "value": answer}}


def problem_responses(model: Any) -> dict[int | str, dict[str, Any]]:
    """Errors that every operation may answer."""
    statuses = sorted({status for status, _, _ in KINDS.values()})
    named = {status: title for status, title, _ in reversed(KINDS.values())}
    return {status: {"model": model, "description": named[status]} for status in statuses}
