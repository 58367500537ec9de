"""The committed OpenAPI document: the one that the service writes, valid, complete, with examples that are true."""

import json
import re
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import httpx
import pytest
from fastapi import FastAPI
from jsonschema import Draft202012Validator
from openapi_spec_validator import OpenAPIV31SpecValidator

from faultloop import assess
from faultloop.api.app import create_app
from faultloop.settings import Settings
from tests.api.client import served
from tests.api.test_batches import migrated

COMMITTED = Path(__file__).parents[2] / "openapi" / "openapi.json"
DOCUMENT: dict[str, Any] = json.loads(COMMITTED.read_text(encoding="utf-8"))
SCHEMAS: dict[str, Any] = DOCUMENT["components"]["schemas"]


def operations() -> Iterator[tuple[str, str, dict[str, Any]]]:
    for path, item in DOCUMENT["paths"].items():
        for method, operation in item.items():
            yield path, method, operation


def reachable(name: str, seen: set[str]) -> set[str]:
    """Names of the schemas that a schema refers to, itself included."""
    if name not in seen:
        seen.add(name)
        for found in re.findall(r'"#/components/schemas/([^"]+)"', json.dumps(SCHEMAS[name])):
            reachable(found, seen)
    return seen


def test_committed_document_is_the_one_the_service_writes() -> None:
    written = json.loads(json.dumps(create_app(Settings()).openapi()))
    assert written == DOCUMENT, "run `make openapi` and look at the difference"


def test_document_is_valid() -> None:
    assert DOCUMENT["openapi"].startswith("3.1")
    assert list(OpenAPIV31SpecValidator(DOCUMENT).iter_errors()) == []


def test_operations_are_named_tagged_and_described() -> None:
    ids = [operation["operationId"] for _, _, operation in operations()]
    assert len(set(ids)) == len(ids)
    for path, _, operation in operations():
        assert re.fullmatch(r"[a-z]+(_[a-z]+)+", operation["operationId"]), operation["operationId"]
        assert operation["tags"], path
        assert operation["summary"], path
        assert operation["description"], path
        assert re.fullmatch(r"(/[a-z0-9-]+|/\{[a-z]+\})+", path), path


def test_every_error_is_problem_details() -> None:
    for path, method, operation in operations():
        errors = {status: r for status, r in operation["responses"].items() if status[0] in "45"}
        assert {"400", "404", "405", "422", "500", "503"} <= set(errors), (path, method)
        for status, response in errors.items():
            if (path, status) == ("/health/ready", "503"):
                continue
            assert list(response["content"]) == ["application/problem+json"], (path, status)


def test_nothing_of_the_framework_shows_through() -> None:
    text = json.dumps(DOCUMENT)
    for word in ("HTTPValidationError", "ValidationError", "itemSchema", "-Input", "-Output"):
        assert word not in text, word


def test_requests_are_closed_and_every_number_has_its_unit() -> None:
    for name in reachable("AssessmentRequest", set()):
        schema = SCHEMAS[name]
        if schema.get("type") != "object":
            continue
        assert schema["additionalProperties"] is False, name
        assert schema["description"], name
        for field, told in schema["properties"].items():
            numbers = [part for part in (told, *told.get("anyOf", [])) if part.get("type") == "number"]
            for number in numbers:
                assert "x-unit" in number or "enum" in number or "[" in number.get("description", ""), (name, field)


def test_answers_say_what_is_always_there() -> None:
    assert set(SCHEMAS["Assessment"]["required"]) == set(SCHEMAS["Assessment"]["properties"])
    assert {"check", "verdict", "reason", "explanation", "counts", "clause"} <= set(SCHEMAS["Finding"]["required"])


@pytest.mark.parametrize(("path", "method", "status"), [("/preview", "post", "200"), ("/{id}", "put", "201")])
def test_examples_are_answered_as_shown(path: str, method: str, status: str) -> None:
    operation = DOCUMENT["paths"][f"/v1/assessments{path}"][method]
    request = operation["requestBody"]["content"]["application/json"]["examples"]["bench"]["value"]
    answer = operation["responses"][status]["content"]["application/json"]["examples"]["bench"]["value"]
    assert assess(request) == answer
    for name, value in (("AssessmentRequest", request), ("Assessment", answer)):
        schema = {"$ref": f"#/components/schemas/{name}", "components": DOCUMENT["components"]}
        Draft202012Validator(schema).validate(value)


@pytest.mark.parametrize(("path", "method", "status"), [("", "post", 200), ("/{id}", "put", 201)])
def test_examples_of_batches_are_answered_as_shown(tmp_path: Path, path: str, method: str, status: int) -> None:
    operation = DOCUMENT["paths"][f"/v1/batches{path}"][method]
    sent, answered = operation["requestBody"]["content"], operation["responses"][str(status)]["content"]
    example_id = answered["application/json"]["examples"]["csv"]["value"]["id"]

    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        for at, (form, kind) in enumerate((("csv", "text/csv"), ("json", "application/json"))):
            value = sent[kind]["examples"][form]["value"]
            content = value if isinstance(value, str) else json.dumps(value)
            url = "/v1/batches" if method == "post" else f"/v1/batches/{example_id[:-1]}{at}"
            given = await client.request(method, url, content=content, headers={"Content-Type": kind})
            assert given.status_code == status
            shown = answered["application/json"]["examples"][form]["value"]
            digest = given.json()["provenance"]["input_digest"] if kind == "application/json" else None
            told = {**given.json(), "id": example_id}
            if digest is not None:  # the digest is of the bytes, and these are written by another hand
                shown = {**shown, "provenance": {**shown["provenance"], "input_digest": digest}}
            assert told == shown
            schema = {"$ref": "#/components/schemas/Batch", "components": DOCUMENT["components"]}
            Draft202012Validator(schema).validate(told)
            if form == "csv":
                csv = await client.get(given.headers["Location"], headers={"Accept": "text/csv"})
                assert csv.text == answered["text/csv"]["examples"]["csv"]["value"]

    served(migrated(tmp_path), work)


def test_rows_and_views_are_of_the_documented_form(tmp_path: Path) -> None:
    value = DOCUMENT["paths"]["/v1/batches"]["post"]["requestBody"]["content"]["text/csv"]["examples"]["csv"]["value"]

    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        made = await client.post("/v1/batches", content=value, headers={"Content-Type": "text/csv"})
        where = made.headers["Location"]
        for name, url in (
            *(("BatchRow", f"{where}/rows/{number}") for number in (2, 3, 4)),
            ("Workshop", f"{where}/workshop?population=9"),
        ):
            schema = {"$ref": f"#/components/schemas/{name}", "components": DOCUMENT["components"]}
            Draft202012Validator(schema).validate((await client.get(url)).json())

    served(migrated(tmp_path), work)


@pytest.mark.parametrize(("path", "method"), [("/validate", "post"), ("/{rules}", "put")])
def test_example_of_own_rules_can_be_judged_by(path: str, method: str) -> None:
    operation = DOCUMENT["paths"][f"/v1/rule-sets{path}"][method]
    rules = operation["requestBody"]["content"]["application/json"]["examples"]["site"]["value"]
    schema = {"$ref": "#/components/schemas/OwnRuleSet", "components": DOCUMENT["components"]}
    Draft202012Validator(schema).validate(rules)
    bench = DOCUMENT["paths"]["/v1/assessments/preview"]["post"]["requestBody"]["content"]["application/json"]
    answer = assess({**bench["examples"]["bench"]["value"], "rules": rules})
    assert answer["provenance"]["rules"] == f"{rules['id']}:{rules['edition']}"
