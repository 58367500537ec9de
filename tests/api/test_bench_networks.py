"""/v1/bench-networks over HTTP: the answer as the library gives it, the drawing, refusals, hostile bodies."""

import copy
import json
from collections.abc import Awaitable, Callable
from pathlib import Path
from typing import Any
from xml.etree.ElementTree import fromstring

import httpx
import pytest
from fastapi import FastAPI
from jsonschema import Draft202012Validator

from faultloop import bench_network
from tests.api.client import problem, served
from tests.api.test_batches import migrated
from tests.api.test_openapi import SCHEMAS, reachable
from tests.assessment.bench_bodies import CLIP, Body, clip_case, fixture, small
from tests.assessment.test_bench_dangers import television

URL = "/v1/bench-networks"
DOCUMENT = json.loads((Path(__file__).parents[2] / "openapi" / "openapi.json").read_text(encoding="utf-8"))
Work = Callable[[httpx.AsyncClient], Awaitable[None]]


def run(tmp_path: Path, work: Work) -> None:
    async def with_app(client: httpx.AsyncClient, _: FastAPI) -> None:
        await work(client)

    served(migrated(tmp_path), with_app)


def test_answers_are_those_of_the_library_and_of_the_documented_form(tmp_path: Path) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        for name in ("clip_on_a_floating_bench", "radio_with_live_chassis"):
            body = fixture(name)["request"]
            answer = await client.post(URL, json=body, headers={"Accept-Language": "de"})
            assert answer.status_code == 200
            assert answer.json() == bench_network(body, "de")
            assert answer.headers["cache-control"] == "no-store"
            assert answer.headers["content-language"] == "de"
            assert {"Accept", "Accept-Language"} <= set(answer.headers["vary"].split(", "))
            schema = {"$ref": "#/components/schemas/BenchNetwork", "components": DOCUMENT["components"]}
            Draft202012Validator(schema).validate(answer.json())
            asked = {"$ref": "#/components/schemas/BenchRequest", "components": DOCUMENT["components"]}
            Draft202012Validator(asked).validate(body)

    run(tmp_path, work)


def test_example_is_answered_as_shown() -> None:
    operation = DOCUMENT["paths"][URL]["post"]
    asked = operation["requestBody"]["content"]["application/json"]["examples"]["clip"]["value"]
    shown = operation["responses"]["200"]["content"]["application/json"]["examples"]["clip"]["value"]
    assert bench_network(asked) == shown


def test_nothing_is_stored(tmp_path: Path) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        await client.post(URL, json=clip_case())
        assert (await client.get("/v1/assessments")).json()["items"] == []

    run(tmp_path, work)


@pytest.mark.parametrize("how", [{"params": {"format": "svg"}}, {"headers": {"Accept": "image/svg+xml"}}])
def test_drawing_by_parameter_or_by_header(tmp_path: Path, how: dict[str, Any]) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        drawn = await client.post(URL, json=clip_case(), **how)
        assert drawn.status_code == 200
        assert drawn.headers["content-type"] == "image/svg+xml"
        assert drawn.headers["content-security-policy"] == "default-src 'none'"
        assert drawn.headers["x-content-type-options"] == "nosniff"
        assert drawn.headers["cache-control"] == "no-store"
        assert fromstring(drawn.content).get("role") == "img"

    run(tmp_path, work)


def test_what_cannot_be_given_is_refused(tmp_path: Path) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        problem(await client.post(URL, json=small(), headers={"Accept": "text/plain"}), 406)
        problem(await client.post(URL, json=small(), params={"format": "pdf"}), 422)
        problem(await client.post(URL, json=small(), params={"form": "svg"}), 422)
        problem(await client.post(URL, content="[", headers={"Content-Type": "application/json"}), 400)
        problem(await client.post(URL, content="a", headers={"Content-Type": "text/plain"}), 415)
        problem(await client.get(URL), 405)

    run(tmp_path, work)


def test_refusals_point_at_the_field(tmp_path: Path) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        told = problem(await client.post(URL, json=small(planned_link={**CLIP, "to": "set.neutral"})), 422)
        (error,) = told["errors"]
        assert error["pointer"] == "/planned_link/to"
        assert error["code"] == "unknown_node"
        assert "set.case, set.L1, set.L2" in error["detail"]
        body = small(items=[{**small()["items"][0], "fed_by": "nobody"}])
        (error,) = problem(await client.post(URL, json=body), 422)["errors"]
        assert error["pointer"] == "/items/0/fed_by"
        assert error["detail"] == "no supply has this id; there are: iso, wall"
        body = small()
        body["supplies"][1]["interwinding_capacitance"] = 1
        (error,) = problem(await client.post(URL, json=body), 422)["errors"]
        assert error["pointer"] == "/supplies/1/interwinding_capacitance"
        assert "no such field here" in error["detail"]
        body = small()
        body["supplies"][1]["kind"] = "isolated"
        body["supplies"][0]["overcurrent_device"] = "B16"
        body["items"][0]["id"] = "my set"
        told = {of["pointer"]: of["detail"] for of in problem(await client.post(URL, json=body), 422)["errors"]}
        assert told["/supplies/1/kind"] == "a supply is separated, earthed or battery"
        assert '"rated_current_a": 16' in told["/supplies/0/overcurrent_device"]
        assert "no space" in told["/items/0/id"]
        body = small()
        del body["supplies"][1]["kind"]
        (error,) = problem(await client.post(URL, json=body), 422)["errors"]
        assert error["pointer"] == "/supplies/1/kind"
        body = television(live_chassis="none")
        answer = (await client.post(URL, json=body)).json()
        assert answer["planned_link"]["ties"] == "no"

    run(tmp_path, work)


@pytest.mark.parametrize("percent", [1e-300, 0.4, {"least": 0.0, "greatest": 0.6}])
def test_a_short_circuit_voltage_that_no_transformer_has_is_refused(tmp_path: Path, percent: Any) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        body = small()
        body["supplies"][1]["transformer"]["short_circuit_voltage_percent"] = percent
        (error,) = problem(await client.post(URL, json=body), 422)["errors"]
        assert error["pointer"].startswith("/supplies/1/transformer/short_circuit_voltage_percent")

    run(tmp_path, work)


def test_own_rules_decide(tmp_path: Path) -> None:
    """A set of the caller's own that lets less current stand fails the bench that the published one lets pass."""
    strict = {
        "id": "own-bench",
        "edition": "2026",
        "title": "Own bench",
        "extends": "iec-60364:2017",
        "separation": {
            "contact_most": {
                "value": 1.0,
                "unit": "mA",
                "clause": "1",
                "source": "policy",
                "sourcing": "assumption",
                "checked": "2026-12-01",
            }
        },
    }

    async def work(client: httpx.AsyncClient) -> None:
        body = clip_case()
        del body["planned_link"]
        found = []
        for rules in ("iec-60364", strict):
            answer = (await client.post(URL, json={**body, "rules": rules})).json()
            found.append({finding["check"]: finding["verdict"] for finding in answer["findings"]}["contact-current"])
        assert found == ["pass-with-conditions", "fail"]

    run(tmp_path, work)


def _hostile() -> dict[str, Body]:
    """What a tired hand or an attacker sends."""
    found: dict[str, Body] = {}

    def put(name: str, *path: str | int, value: Any) -> None:
        body: Any = copy.deepcopy(small(planned_link=CLIP, links=[{**CLIP, "id": "a"}]))
        here = body
        for part in path[:-1]:
            here = here[part]
        here[path[-1]] = value
        found[name] = body

    for at, value in enumerate(
        [None, "", "a b", "a.b", "ä", "\u0000", "x" * 41, 5, [], {}, "__proto__", "earth", "~own"]
    ):
        put(f"id {at}", "items", 0, "id", value=value)
        put(f"fed_by {at}", "items", 0, "fed_by", value=value)
        put(f"node {at}", "planned_link", "to", value=value)
    for at, value in enumerate([-1, 1e300, "4.7", "4,7", True, None, [1], {"least": 2, "greatest": 1}, {"least": 1}]):
        put(f"capacitance {at}", "items", 0, "filter_capacitance_nf", value=value)
        put(f"resistance {at}", "planned_link", "resistance_ohm", value=value)
        put(f"voltage {at}", "supplies", 1, "nominal_voltage_between_lines_v", value=value)
        put(f"frequency {at}", "frequency_hz", value=value)
    put("no supplies", "supplies", value=[])
    put("too many items", "items", value=[{"id": f"i{n}", "fed_by": "iso", "protection_class": "I"} for n in range(17)])
    put("own label", "items", 0, "label", value="<script>alert(1)</script> & \u202e \ufffe " + "W" * 150)
    put("fed by an item", "items", 0, "fed_by", value="scope")
    put("fed from itself", "supplies", 1, "fed_from", value="iso")
    put("no frequency", "frequency_hz", value=0)
    put("least values", "items", 0, "filter_capacitance_nf", value=5e-324)
    put("greatest values", "items", 0, "filter_capacitance_nf", value=1e6)
    put("a link of nothing", "planned_link", "resistance_ohm", value=0)
    put("a link of all", "planned_link", "resistance_ohm", value=1e12)
    put("little power", "supplies", 1, "transformer", value={"rated_power_va": 5e-324})
    put("no impedance", "supplies", 1, "transformer", value={"rated_power_va": 1e6, "short_circuit_voltage_percent": 0})
    put("little voltage", "supplies", 1, "nominal_voltage_between_lines_v", value=5e-324)
    return found


@pytest.mark.parametrize("form", ["json", "svg"])
def test_hostile_bodies_never_break_it(tmp_path: Path, form: str) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        faults = {}
        for name, body in _hostile().items():
            answer = await client.post(URL, content=json.dumps(body), params={"format": form}, headers=JSON_HEADERS)
            if answer.status_code == 200:
                if form == "svg":
                    fromstring(answer.content)
                else:
                    assert "NaN" not in answer.text
                    if answer.json()["verdict"] == "pass":
                        faults[name] = "pass"
            elif answer.status_code in (400, 422):
                told = problem(answer, answer.status_code)
                if not told.get("errors") and answer.status_code == 422:
                    faults[name] = "422 without a field"
            else:
                faults[name] = str(answer.status_code)
        assert faults == {}

    run(tmp_path, work)


JSON_HEADERS = {"Content-Type": "application/json"}


def test_the_largest_bench_is_answered(tmp_path: Path) -> None:
    items = [
        {
            "id": f"item{at}",
            "fed_by": "iso" if at % 2 else "wall",
            "protection_class": "I" if at % 3 else "II",
            "signal_ground": {"kind": ("earthed", "floating")[at % 2]},
        }
        for at in range(16)
    ]
    links = [
        {
            "id": f"link{at}",
            "kind": "probe-clip" if at > 3 else "other",
            "from": f"item{at}.signal_ground",
            "to": f"item{at + 1}.case",
        }
        for at in range(15)
    ]

    async def work(client: httpx.AsyncClient) -> None:
        body = small(items=items, links=links)
        for form in ("json", "svg"):
            assert (await client.post(URL, json=body, params={"format": form})).status_code == 200

    run(tmp_path, work)


def test_the_body_is_closed_and_every_number_has_its_unit() -> None:
    for name in reachable("BenchRequest", set()):
        schema = SCHEMAS[name]
        if schema.get("type") != "object":
            continue
        assert schema["additionalProperties"] is False, name
        assert schema["description"], name
        for field, told in schema["properties"].items():
            parts = [told, *told.get("anyOf", []), *told.get("oneOf", [])]
            for number in (part for part in parts if part.get("type") == "number"):
                assert "x-unit" in number or "enum" in number or "[" in number.get("description", ""), (name, field)
