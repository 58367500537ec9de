"""Callers' own rule sets over HTTP: tried, sent with a request, stored for good, named, and replayed later."""

import asyncio
import copy
import html
import json
import uuid
from pathlib import Path
from typing import Any

import httpx
import pytest
from fastapi import FastAPI
from sqlalchemy import Engine, update

from faultloop import assess, assess_many
from faultloop.digests import canonical_bytes, sha256
from faultloop.exchange.examples import EXAMPLE_REQUEST
from faultloop.exchange.own_rules import KNOWN_CLAUSES
from faultloop.records import rule_sets
from faultloop.records.database import open_engine
from faultloop.records.migrate import migrate
from faultloop.records.tables import RULE_SET
from faultloop.rules.loader import content, from_content, shipped
from tests.api.client import problem, served
from tests.assessment.bodies import breaker

SOURCE = {"clause": "4.2", "source": "site policy", "sourcing": "assumption", "checked": "2026-11-30"}
LEAST = {"value": 0.9, "unit": "1", **SOURCE}
OWN: dict[str, Any] = {
    "id": "workshop-rules",
    "edition": "2026",
    "title": "Workshop rules",
    "extends": "bs-7671:2018",
    "voltage_factor": {"least": LEAST},
}
NAME = "workshop-rules:2026"
WITH_OWN = {**EXAMPLE_REQUEST, "rules": OWN}
BY_NAME = {**EXAMPLE_REQUEST, "rules": NAME}
VALIDATE = "/v1/rule-sets/validate"


@pytest.fixture
def url(engine: Engine) -> str:
    """Address of a migrated database."""
    return engine.url.render_as_string(hide_password=False)


def address() -> str:
    return f"/v1/assessments/{uuid.uuid4()}"


def own(**over: Any) -> dict[str, Any]:
    """The caller's set with something else said."""
    return copy.deepcopy({**OWN, **over})


def limit(answer: dict[str, Any]) -> float:
    """Greatest loop of the overcurrent device."""
    return float(next(f["limit"] for f in answer["findings"] if f["check"] == "overcurrent-disconnection"))


def cautions(answer: dict[str, Any]) -> set[str]:
    return {caution["caution"] for caution in answer["cautions"]}


def test_a_set_is_resolved_and_its_differences_are_told(url: str) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        body = (await client.post(VALIDATE, json=OWN)).json()
        base = (await client.get("/v1/rule-sets/bs-7671:2018")).json()
        assert (body["valid"], body["rules"], body["extends"]) == (True, NAME, "bs-7671:2018")
        assert body["values"]["voltage_factor"]["least"] == LEAST
        assert body["values"]["electrode"] == base["values"]["electrode"]
        told = {item["pointer"]: item for item in body["differences"]}
        assert set(told) == {"/title", "/voltage_factor/least", "/cautions"}
        assert told["/voltage_factor/least"] == {
            "pointer": "/voltage_factor/least",
            "base": base["values"]["voltage_factor"]["least"],
            "own": LEAST,
        }
        assert (await client.get(f"/v1/rule-sets/{NAME}")).status_code == 404

    served(url, work)


def test_a_set_that_extends_nothing_needs_every_key(url: str) -> None:
    whole = json.loads(content(shipped()["iec-60364:2017"]))
    del whole["cautions"]
    whole |= {"id": "whole-rules", "title": "Whole rules"}

    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        body = (await client.post(VALIDATE, json=whole)).json()
        assert body["differences"] == []
        assert "extends" not in body
        del whole["electrode"]
        told = problem(await client.post(VALIDATE, json=whole), 422)
        assert [error["pointer"] for error in told["errors"]] == ["/electrode"]

    served(url, work)


BAD: list[tuple[dict[str, Any], str, str]] = [
    ({"voltage_factor": {"least": {**LEAST, "value": 9.5}}}, "/voltage_factor/least/value", "more than 0.5 to 1"),
    ({"voltage_factor": {"least": {**LEAST, "unit": "%"}}}, "/voltage_factor/least", "unit must be '1'"),
    ({"voltage_factor": {"least": {"value": 0.9, "unit": "1"}}}, "/voltage_factor/least/source", "required"),
    ({"voltage_factor": {"least": {**LEAST, "value": "0.9"}}}, "/voltage_factor/least/value", "plain number"),
    ({"voltage_factor": {"least": {**LEAST, "checked": "soon"}}}, "/voltage_factor/least/checked", "valid date"),
    ({"voltage_factor": {"leest": LEAST}}, "/voltage_factor/leest", "did you mean least?"),
    ({"voltage_factor": None}, "/voltage_factor", ""),
    ({"cautions": []}, "/cautions", "no such field"),
    ({"clauses": {"bribery": "1"}}, "/clauses", "only checks have clauses"),
    ({"id": "bs-7671"}, "/id", "one of its own"),
    ({"id": "Upper"}, "/id", "expected form"),
    ({"id": "a" * 49}, "/id", "48 characters"),
    ({"edition": "new"}, "/edition", "expected form"),
    ({"title": "BS 7671:2018"}, "/title", "one of its own"),
    ({"title": "x" * 201}, "/title", "200 characters"),
    ({"extends": "bs-7671"}, "/extends", "bs-7671:2018"),
    ({"extends": NAME}, "/extends", "expected one of"),
    ({"disconnection": {"table": []}}, "/disconnection/table", "at least 1 item"),
    (
        {"disconnection": {"distribution_tn": {"value": 0.2, "unit": "s", **SOURCE}}},
        "/disconnection/distribution_tn/value",
        "less time than final",
    ),
    (
        {"operating_current": [{"devices": ["Q9"], "time_s": 0.4, "value": 300, "unit": "A", **SOURCE}]},
        "/operating_current/0/devices",
        "devices held here",
    ),
    (
        {"operating_current": [{"devices": ["B"], "time_s": 0.4, "value": 1.2, "unit": "x In", **SOURCE}]},
        "/operating_current/0/value",
        "so small a current",
    ),
]


@pytest.mark.parametrize(("over", "pointer", "words"), BAD, ids=[f"{pointer} {words}" for _, pointer, words in BAD])
def test_a_bad_set_is_refused_at_its_place_wherever_it_comes(
    over: dict[str, Any], pointer: str, words: str, tmp_path: Path
) -> None:
    url = f"sqlite:///{tmp_path / 'service.sqlite3'}"
    engine = open_engine(url)
    migrate(engine)
    engine.dispose()

    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        body = own(**over)
        for answer, before in (
            (await client.post(VALIDATE, json=body), ""),
            (await client.put(f"/v1/rule-sets/{NAME}", json=body), ""),
            (await client.post("/v1/assessments/preview", json={**EXAMPLE_REQUEST, "rules": body}), "/rules"),
            (await client.put(address(), json={**EXAMPLE_REQUEST, "rules": body}), "/rules"),
        ):
            errors = problem(answer, 422)["errors"]
            told = {error["pointer"]: error["detail"] for error in errors}
            assert words in told[f"{before}{pointer}"], errors
            assert "Q9" not in answer.text
        assert (await client.get(f"/v1/rule-sets/{NAME}")).status_code == 404

    served(url, work)


def test_size_kind_and_doubled_fields_are_bounded(url: str) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        row = {"devices": ["B16"], "time_s": 0.4, "value": 80, "unit": "A", **SOURCE}
        large = own(operating_current=[row] * 600)
        problem(await client.post(VALIDATE, json=large), 413)
        told = problem(await client.post("/v1/assessments/preview", json={**EXAMPLE_REQUEST, "rules": large}), 422)
        assert told["errors"][0]["pointer"] == "/rules"
        assert "65536 characters" in told["errors"][0]["detail"]
        problem(await client.post(VALIDATE, content=b"{}"), 415)
        headers = {"Content-Type": "application/json"}
        problem(await client.post(VALIDATE, content=b"{", headers=headers), 400)
        doubled = json.dumps(OWN)[:-1] + ', "title": "Another"}'
        assert "twice" in problem(await client.post(VALIDATE, content=doubled, headers=headers), 422)["detail"]
        for text in (b"[]", b'"bs-7671"', b"null", b"5"):
            problem(await client.post(VALIDATE, content=text, headers=headers), 422)

    served(url, work)


def test_trying_a_set_has_an_address_of_its_own(url: str) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        for method in ("GET", "PUT", "DELETE"):
            told = await client.request(method, VALIDATE, json=OWN)
            problem(told, 405)
            assert told.headers["allow"] == "POST"
        for text in (b'{"id": 1' + b"0" * 400 + b"}", b'{"clauses": ' + b"[" * 5000 + b"]" * 5000 + b"}"):
            headers = {"Content-Type": "application/json"}
            answer = await client.post(VALIDATE, content=text, headers=headers)
            assert answer.status_code in (400, 422)
            whole = b'{"point": {"label": "x"}, "rules": ' + text + b"}"
            answer = await client.post("/v1/assessments/preview", content=whole, headers=headers)
            assert answer.status_code in (400, 422)

    served(url, work)


def test_a_set_sent_with_a_request_decides_and_its_cautions_stand(url: str) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        plain = (await client.post("/v1/assessments/preview", json=EXAMPLE_REQUEST)).json()
        answer = (await client.post("/v1/assessments/preview", json=WITH_OWN)).json()
        tried = (await client.post(VALIDATE, json=OWN)).json()
        # 0.9 instead of 0.95 on 230 V, B32 at 5 times its rated current.
        assert limit(plain) == pytest.approx(0.95 * 230 / 160, rel=1e-5)
        assert limit(answer) == pytest.approx(0.9 * 230 / 160, rel=1e-5)
        assert answer["provenance"]["rules"] == NAME
        assert answer["provenance"]["rules_digest"] == tried["digest"]
        assert cautions(answer) == cautions(plain) | {"own-rules"}
        assert "Workshop rules" in answer["findings"][0]["explanation"]
        assert answer == assess(WITH_OWN)

    served(url, work)


def test_no_set_silences_the_cautions_of_its_base() -> None:
    for base in shipped():
        said = assess({**EXAMPLE_REQUEST, "rules": own(extends=base)})
        kept = assess({**EXAMPLE_REQUEST, "rules": base})
        assert cautions(said) == cautions(kept) | {"own-rules"}


def test_own_sets_and_published_ones_are_judged_together_as_alone() -> None:
    other = own(edition="2027", voltage_factor={"least": {**LEAST, "value": 0.8}})
    same_name = own(voltage_factor={"least": {**LEAST, "value": 0.7}})
    current = {"devices": ["B"], "time_s": 0.4, "value": 4, "unit": "x In", **SOURCE}
    mean = own(id="mean-rules", operating_current=[current])
    rules = ["bs-7671", OWN, "iec-60364", other, same_name, mean, OWN, "as-nzs-3000"]
    bodies = [{**EXAMPLE_REQUEST, "rules": each} for each in rules]
    together = assess_many(bodies)
    assert together == [assess(body) for body in bodies]
    limits = [limit(answer) for answer in together]
    volts = [0.95, 0.9, 1.0, 0.8, 0.7]
    assert limits[:5] == pytest.approx([factor * 230 / 160 for factor in volts], rel=1e-5)
    assert limits[5] == pytest.approx(0.9 * 230 / 128, rel=1e-5)
    assert len({answer["provenance"]["rules_digest"] for answer in together}) == 7


def every_device() -> list[dict[str, Any]]:
    """Bodies with devices of every kind: held, described, and in series."""
    fuse = {"kind": "fuse", "utilisation_category": "gG", "rated_current_a": 63, "fuse_system": "bs-88-2"}
    points = [{"current_a": 80, "time_s": 30}, {"current_a": 160, "time_s": 0.3}]
    curve = {"kind": "curve", "rated_current_a": 32, "source": "a sheet", "points": {"greatest": points}}
    held = [breaker(name) for name in ("B16", "C20", "D10", "K16", "Z16")]
    bodies = [{**EXAMPLE_REQUEST, "overcurrent_device": device} for device in (*held, fuse, curve)]
    return [*bodies, *({**body, "upstream_overcurrent_devices": [fuse, curve]} for body in bodies)]


def test_a_set_that_changes_nothing_decides_as_its_base() -> None:
    same = {name: told for name, told in OWN.items() if name != "voltage_factor"}
    bodies = every_device()
    own_answers = assess_many([{**body, "rules": same} for body in bodies])
    base_answers = assess_many([{**body, "rules": OWN["extends"]} for body in bodies])
    for told, kept in zip(own_answers, base_answers, strict=True):
        assert told["quantities"] == kept["quantities"]
        assert (told["verdict"], told["urgency"]) == (kept["verdict"], kept["urgency"])
        assert cautions(told) == cautions(kept) | {"own-rules"}
        for ours, theirs in zip(told["findings"], kept["findings"], strict=True):
            named = {"explanation", "settled_by"}
            assert {k: v for k, v in ours.items() if k not in named} == {
                k: v for k, v in theirs.items() if k not in named
            }


def test_a_set_is_stored_once_under_its_name(url: str) -> None:
    where = f"/v1/rule-sets/{NAME}"

    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        problem(await client.get(where), 404)
        problem(await client.post("/v1/assessments/preview", json=BY_NAME), 422)
        first = await client.put(where, json=OWN)
        assert (first.status_code, first.headers["location"]) == (201, where)
        assert first.json()["published"] is False
        for headers in ({}, {"If-None-Match": "*"}):
            again = await client.put(where, json=OWN, headers=headers)
            assert (again.status_code, again.content) == (200, first.content)
        changed = own(voltage_factor={"least": {**LEAST, "value": 0.85}})
        problem(await client.put(where, json=changed), 409)
        problem(await client.put(where, json=changed, headers={"If-None-Match": "*"}), 412)
        problem(await client.put("/v1/rule-sets/other-rules:2026", json=OWN), 422)
        problem(await client.put("/v1/rule-sets/bs-7671:2018", json=OWN), 422)
        read = await client.get(where)
        assert (read.status_code, read.content) == (200, first.content)
        named = (await client.post("/v1/assessments/preview", json=BY_NAME)).json()
        sent = (await client.post("/v1/assessments/preview", json=WITH_OWN)).json()
        del named["provenance"]["input_digest"], sent["provenance"]["input_digest"]
        assert named == sent
        problem(await client.post("/v1/assessments/preview", json={**BY_NAME, "rules": "workshop-rules"}), 422)

    served(url, work)


def test_a_name_of_no_possible_form_is_not_looked_for(url: str) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        for name in ("workshop-rules:20\u00002", "'; --:2026", "Ω:2026", "a:b:2026", "workshop-rules:２０２６", ""):
            told = problem(await client.post("/v1/assessments/preview", json={**BY_NAME, "rules": name}), 422)
            assert "expected one of" in told["errors"][0]["detail"]
            assert told["errors"][0]["pointer"] == "/rules"
        for path in ("workshop-rules:20%002", "%27:2026", "%CE%A9:2026", "%FF:2026"):
            problem(await client.get(f"/v1/rule-sets/{path}"), 404)

    served(url, work)


def test_many_storers_of_one_name_make_one_set(url: str) -> None:
    bodies = [own(voltage_factor={"least": {**LEAST, "value": 0.80 + n % 2 / 10}}) for n in range(16)]

    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        answers = await asyncio.gather(*(client.put(f"/v1/rule-sets/{NAME}", json=body) for body in bodies))
        statuses = [answer.status_code for answer in answers]
        assert statuses.count(201) == 1
        assert (statuses.count(200), statuses.count(409)) == (7, 8)

    served(url, work)


def test_lists_lead_through_published_and_own_sets(url: str) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        for year in range(2020, 2027):
            body = own(edition=str(year))
            assert (await client.put(f"/v1/rule-sets/workshop-rules:{year}", json=body)).status_code == 201
        where: str | None = "/v1/rule-sets?page_size=3"
        seen: list[dict[str, Any]] = []
        while where:
            body = (await client.get(where)).json()
            seen += body["items"]
            where = body.get("next")
        assert [item["rules"] for item in seen if item["published"]] == list(shipped())
        stored = [item["rules"] for item in seen if not item["published"]]
        assert stored == [f"workshop-rules:{year}" for year in range(2020, 2027)]
        problem(await client.get("/v1/rule-sets", params={"page_size": 0}), 422)

    served(url, work)


@pytest.mark.parametrize("named", [False, True])
def test_a_stored_assessment_replays_alike_in_a_later_service(url: str, engine: Engine, named: bool) -> None:
    body, where = BY_NAME if named else WITH_OWN, address()

    async def first(client: httpx.AsyncClient, _: FastAPI) -> dict[str, Any]:
        if named:
            await client.put(f"/v1/rule-sets/{NAME}", json=OWN)
        answer = await client.put(where, json=body)
        assert answer.status_code == 201
        assert (await client.put(where, json=body)).status_code == 200
        told: dict[str, Any] = answer.json()
        return told

    stored = served(url, first)
    told = rule_sets.content_of(engine, stored["provenance"]["rules_digest"])
    assert told is not None
    assert from_content(told).rules.voltage_factor.least.value == 0.9

    async def later(client: httpx.AsyncClient, _: FastAPI) -> None:
        again = (await client.get(f"{where}/replay")).json()
        assert again["identical"] is True, again["differences"]
        assert again["recomputed"] == stored["provenance"]
        assert (await client.put(where, json=body)).status_code == 200
        drawn = await client.get(f"{where}/curve")
        assert drawn.status_code == 200
        # The band of B32 begins at 1.45 times its rated current, whoever's the rules are.
        assert "46.4" in drawn.text
        assert "caller's own" in html.unescape(drawn.text)

    served(url, later)


def test_an_assessment_without_rules_replays_alike(url: str) -> None:
    unnamed = {name: told for name, told in EXAMPLE_REQUEST.items() if name != "rules"}
    where = address()

    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        assert (await client.put(where, json=unnamed)).status_code == 201
        again = (await client.get(f"{where}/replay")).json()
        assert again["identical"] is True, again["differences"]

    served(url, work)


def test_limits_carry_the_cautions_of_their_set(url: str) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        for rules, named in (("as-nzs-3000", ["mean-operating-current"]), ("bs-7671", [])):
            body = (await client.get("/v1/limits", params={"device": "B32", "rules": rules})).json()
            assert [caution["caution"] for caution in body["cautions"]] == named
        assert (await client.get("/v1/limits", params={"device": "C20", "rules": "as-nzs-3000"})).json()[
            "greatest_loop_impedance_ohm"
        ] == pytest.approx(230 / 150, rel=1e-5)

    served(url, work)


def test_a_set_of_another_version_is_shown_but_never_judged_by(url: str, engine: Engine) -> None:
    told = json.loads(content(shipped()["iec-60364:2017"]))
    told |= {"id": "old-rules", "title": "Old rules", "cautions": ["own-rules"]}
    del told["electrode"]
    older = canonical_bytes(told)
    rule_sets.store(engine, sha256(older), "old-rules:2017", older)
    where = address()

    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        stored = (await client.put(where, json=WITH_OWN)).json()["provenance"]["rules_digest"]
        assert (await client.get("/v1/rule-sets/old-rules:2017")).json()["values"] == told
        assert "old-rules:2017" in (await client.get("/v1/rule-sets")).text
        detail = problem(await client.post("/v1/assessments/preview", json={**BY_NAME, "rules": "old-rules:2017"}), 400)
        assert "another version" in detail["detail"]
        with engine.begin() as connection:
            connection.execute(update(RULE_SET).where(RULE_SET.c.digest == stored).values(content=older))
        again = (await client.get(f"{where}/replay")).json()
        assert again["identical"] is False
        assert [item["pointer"] for item in again["differences"]] == ["/provenance/rules"]

    served(url, work)


def test_every_check_can_be_given_a_clause_of_ones_own() -> None:
    clauses = {name: f"own {name}" for name in KNOWN_CLAUSES}
    answer = assess({**EXAMPLE_REQUEST, "rules": own(clauses=clauses)})
    assert {finding["clause"] for finding in answer["findings"]} <= set(clauses.values())
