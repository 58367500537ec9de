"""/v1/separated-supplies, and separated outlets among assessments and batches."""

import json
from pathlib import Path
from typing import Any

import httpx
import pytest
from fastapi import FastAPI
from jsonschema import Draft202012Validator
from sqlalchemy import Engine

from faultloop import assess
from faultloop.exchange.examples import EXAMPLE_RULES, EXAMPLE_SEPARATED
from faultloop.exchange.separated_supplies import SeparatedSupplyRequest, as_assessment
from tests.api.client import served
from tests.api.test_batches import migrated
from tests.api.test_openapi import DOCUMENT

PATH = "/v1/separated-supplies"
ID = "6e0c2f6b-6f0a-4a4e-9a53-2f1d1f0c9d11"


def outlet() -> dict[str, Any]:
    """The example as the request of an outlet."""
    asked = as_assessment(SeparatedSupplyRequest.model_validate(EXAMPLE_SEPARATED))
    told: dict[str, Any] = asked.model_dump(mode="json", by_alias=True, exclude_unset=True)
    return told


def test_a_supply_is_judged_as_its_outlet_is(tmp_path: Path) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        given = await client.post(PATH, json=EXAMPLE_SEPARATED)
        assert given.status_code == 200
        assert given.headers["Cache-Control"] == "no-store"
        assert given.json() == assess(outlet())
        schema = {"$ref": "#/components/schemas/Assessment", "components": DOCUMENT["components"]}
        Draft202012Validator(schema).validate(given.json())

    served(migrated(tmp_path), work)


def test_it_speaks_german(tmp_path: Path) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        given = await client.post(PATH, json=EXAMPLE_SEPARATED, headers={"Accept-Language": "de"})
        assert given.headers["Content-Language"] == "de"
        assert "Schutztrennung" in given.text
        numbers = [finding.get("value") for finding in given.json()["findings"]]
        assert numbers == [finding.get("value") for finding in assess(outlet())["findings"]]

    served(migrated(tmp_path), work)


@pytest.mark.parametrize(
    ("place", "value", "pointer"),
    [
        (("transformer", "rated_power_va"), "630 VA", "/transformer/rated_power_va"),
        (("transformer", "short_circuit_voltage_percent"), 0, "/transformer/short_circuit_voltage_percent"),
        (("items", 0, "filter_capacitance_nf"), -1, "/items/0/filter_capacitance_nf"),
        (("earth_contacts",), "grounded", "/earth_contacts"),
        (("readings", "contact_current_l1_ma"), "1.6", "/readings/contact_current_l1_ma"),
        (("rules",), "no-such-rules", "/rules"),
        (("earthing",), "TN-S", "/earthing"),
        (("label",), "", "/label"),
    ],
)
def test_a_bad_field_is_named_by_its_place(tmp_path: Path, place: tuple[Any, ...], value: Any, pointer: str) -> None:
    body = json.loads(json.dumps(EXAMPLE_SEPARATED))
    part = body
    for step in place[:-1]:
        part = part[step]
    part[place[-1]] = value

    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        given = await client.post(PATH, json=body)
        assert given.status_code == 422
        assert given.headers["Content-Type"] == "application/problem+json"
        assert [error["pointer"] for error in given.json()["errors"]] == [pointer]

    served(migrated(tmp_path), work)


def test_a_field_that_stands_twice_is_refused(tmp_path: Path) -> None:
    text = json.dumps(EXAMPLE_SEPARATED)
    twice = text.replace('"outlets": 1', '"outlets": 1, "outlets": 4')

    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        given = await client.post(PATH, content=twice, headers={"Content-Type": "application/json"})
        assert given.status_code == 422
        assert "twice" in given.json()["detail"]

    served(migrated(tmp_path), work)


def test_a_separated_outlet_is_stored_and_computed_again(engine: Engine) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        stored = await client.put(f"/v1/assessments/{ID}", json=outlet())
        assert stored.status_code == 201
        again = await client.put(f"/v1/assessments/{ID}", json=outlet())
        assert (again.status_code, again.content) == (200, stored.content)
        replayed = await client.get(f"/v1/assessments/{ID}/replay")
        assert replayed.json()["identical"] is True
        drawn = await client.get(f"/v1/assessments/{ID}/curve")
        assert drawn.status_code == 200

    served(engine.url.render_as_string(hide_password=False), work)


def test_by_rules_of_ones_own_said_or_stored(engine: Engine) -> None:
    own = {**EXAMPLE_RULES, "separation": {"contact_most": {**EXAMPLE_RULES["insulation"], "value": 0.1, "unit": "mA"}}}
    own["separation"]["contact_unfelt"] = {**own["separation"]["contact_most"], "value": 0.05}

    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        said = await client.post(PATH, json={**EXAMPLE_SEPARATED, "rules": own})
        assert (said.status_code, said.json()["verdict"]) == (200, "fail")
        await client.put("/v1/rule-sets/site-rules:2026", json=own)
        named = await client.post(PATH, json={**EXAMPLE_SEPARATED, "rules": "site-rules:2026"})
        assert (named.status_code, named.json()["verdict"]) == (200, "fail")

    served(engine.url.render_as_string(hide_password=False), work)


def test_outlets_of_every_kind_stand_in_one_list(tmp_path: Path) -> None:
    earthed = DOCUMENT["paths"]["/v1/assessments/preview"]["post"]["requestBody"]["content"]["application/json"]
    rows = [earthed["examples"]["bench"]["value"], outlet(), {"point": {"label": "x"}, "supply": {"earthing": "IT"}}]

    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        batch = (await client.post("/v1/batches", json={"rows": rows})).json()
        assert batch["counts"] == {"rows": 3, "results": 3, "held": 0, "refused": 0}
        assert [row["verdict"] for row in batch["results"]] == [assess(row)["verdict"] for row in rows]

    served(migrated(tmp_path), work)
