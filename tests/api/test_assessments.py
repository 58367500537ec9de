"""Assessments over HTTP, on both databases: computed, stored once, read byte for byte, listed, replayed."""

import asyncio
import copy
import json
import uuid
from dataclasses import replace
from typing import Any

import httpx
import pytest
from fastapi import FastAPI
from sqlalchemy import Engine

from faultloop import assess
from faultloop.api import gather
from faultloop.exchange.examples import EXAMPLE_REQUEST
from faultloop.records.queries import find, page
from faultloop.records.store import Store
from tests.api.client import problem, served

OTHER = {**EXAMPLE_REQUEST, "rules": "iec-60364"}


@pytest.fixture
def url(engine: Engine) -> str:
    """Address of a migrated database."""
    return engine.url.render_as_string(hide_password=False)


def address(name: str | None = None) -> str:
    return f"/v1/assessments/{name or uuid.uuid4()}"


def test_preview_computes_and_stores_nothing(url: str, engine: Engine) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        answer = await client.post("/v1/assessments/preview", json=EXAMPLE_REQUEST)
        assert answer.status_code == 200
        assert answer.json() == assess(EXAMPLE_REQUEST)
        assert answer.headers["cache-control"] == "no-store"

    served(url, work)
    assert page(engine, size=5) == []


def own_curve(*points: tuple[float, float]) -> dict[str, Any]:
    """The example behind a curve of the caller's own."""
    greatest = [{"current_a": current, "time_s": time} for current, time in points]
    device = {"kind": "curve", "rated_current_a": 32, "source": "data sheet 7", "points": {"greatest": greatest}}
    return {**EXAMPLE_REQUEST, "overcurrent_device": device, "upstream_overcurrent_devices": [device]}


def test_a_stored_curve_is_judged_again_from_its_own_points(url: str) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        where, body = address(), own_curve((80, 5), (160, 0.4))
        first = await client.put(where, json=body)
        assert first.status_code == 201
        assert first.json()["provenance"] == assess(body)["provenance"]
        told = (await client.get(f"{where}/replay")).json()
        assert told["identical"], told["differences"]

    served(url, work)


@pytest.mark.parametrize(
    ("points", "place", "words"),
    [
        (((160, 0.4), (80, 0.1)), "/points/greatest", "currents must rise"),
        (((80, 0.4), (160, 0.4)), "/points/greatest", "times must fall"),
        (((5, 5), (10, 0.4)), "", "not in multiples of the rated current"),
    ],
)
def test_a_curve_that_is_none_is_refused_where_it_stands(url: str, points: Any, place: str, words: str) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        body = problem(await client.post("/v1/assessments/preview", json=own_curve(*points)), 422)
        pointers = {error["pointer"] for error in body["errors"]}
        assert pointers == {f"/overcurrent_device{place}", f"/upstream_overcurrent_devices/0{place}"}
        assert all(words in error["detail"] for error in body["errors"])

    served(url, work)


def test_put_stores_once_and_answers_the_stored_bytes(url: str) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        where = address()
        first = await client.put(where, json=EXAMPLE_REQUEST, headers={"If-None-Match": "*"})
        assert first.status_code == 201
        assert first.headers["location"] == where
        for headers in ({}, {"If-None-Match": "*"}):
            again = await client.put(where, json=EXAMPLE_REQUEST, headers=headers)
            assert again.status_code == 200
            assert again.content == first.content
        reordered = json.loads(json.dumps(EXAMPLE_REQUEST, sort_keys=True))
        assert (await client.put(where, json=reordered)).status_code == 200
        read = await client.get(where)
        assert (read.status_code, read.content, read.headers["etag"]) == (200, first.content, first.headers["etag"])
        head = await client.head(where)
        assert (head.status_code, head.content, head.headers["etag"]) == (200, b"", first.headers["etag"])
        unchanged = await client.get(where, headers={"If-None-Match": first.headers["etag"]})
        assert (unchanged.status_code, unchanged.content) == (304, b"")

    served(url, work)


def test_another_input_under_the_same_id_is_refused(url: str) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        where = address()
        first = await client.put(where, json=EXAMPLE_REQUEST)
        problem(await client.put(where, json=OTHER), 409)
        problem(await client.put(where, json=OTHER, headers={"If-None-Match": "*"}), 412)
        assert (await client.get(where)).content == first.content

    served(url, work)


def test_what_is_refused_is_not_stored(url: str, engine: Engine) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        where = address()
        problem(await client.put(where, json={**EXAMPLE_REQUEST, "raedings": {}}), 422)
        problem(await client.put(where, content=b"{", headers={"Content-Type": "application/json"}), 400)
        problem(await client.put("/v1/assessments/not-a-uuid", json=EXAMPLE_REQUEST), 404)
        problem(await client.get(where), 404)

    served(url, work)
    assert page(engine, size=5) == []


def test_300_puts_of_one_id_make_one_row(url: str, engine: Engine) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> list[int]:
        where = address()
        answers = await asyncio.gather(*(client.put(where, json=EXAMPLE_REQUEST) for _ in range(300)))
        assert len({answer.content for answer in answers}) == 1
        return sorted(answer.status_code for answer in answers)

    assert served(url, work) == [200] * 299 + [201]
    assert len(page(engine, size=5)) == 1


def test_pages_lead_through_everything_newest_first(url: str) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        names = [str(uuid.uuid4()) for _ in range(7)]
        for at, name in enumerate(names):
            await client.put(address(name), json=EXAMPLE_REQUEST if at % 2 else OTHER)
        where: str | None = "/v1/assessments?page_size=3"
        seen: list[str] = []
        while where:
            body = (await client.get(where)).json()
            seen += [item["id"] for item in body["items"]]
            await client.put(address(), json=EXAMPLE_REQUEST)
            where = body.get("next")
        assert seen == names[::-1]
        first = (await client.get("/v1/assessments?page_size=2")).json()
        cursor = httpx.URL(first["next"]).params["cursor"]
        problem(await client.get("/v1/assessments", params={"cursor": cursor, "verdict": "fail"}), 400)
        problem(await client.get("/v1/assessments", params={"cursor": "AAAA"}), 400)
        problem(await client.get("/v1/assessments", params={"page_size": 0}), 422)
        problem(await client.get("/v1/assessments", params={"colour": "red"}), 422)
        many = (await client.get("/v1/assessments", params={"page_size": 100_000, "verdict": "pass"})).json()
        assert {item["verdict"] for item in many["items"]} == {"pass"}
        assert (await client.get("/v1/assessments", params={"urgency": "stop-use"})).json() == {"items": []}

    served(url, work)


def test_replay_gives_the_same_bytes(url: str) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        where = address()
        stored = (await client.put(where, json=EXAMPLE_REQUEST)).json()
        body = (await client.get(f"{where}/replay")).json()
        assert body["identical"] is True
        assert body["differences"] == []
        assert body["stored"] == body["recomputed"] == stored["provenance"]
        problem(await client.get(f"{address()}/replay"), 404)

    served(url, work)


def test_replay_says_what_differs(url: str, engine: Engine) -> None:
    async def first(client: httpx.AsyncClient, _: FastAPI) -> str:
        name = str(uuid.uuid4())
        await client.put(address(name), json=EXAMPLE_REQUEST)
        return name

    stored = find(engine, served(url, first))
    assert stored is not None
    answer = json.loads(stored.record.answer)
    answer["findings"][0]["limit"] = 9.9
    older = replace(stored.record, id=str(uuid.uuid4()), answer=json.dumps(answer).encode())
    lost = replace(stored.record, id=str(uuid.uuid4()), rules="bs-7671:1992")
    store = Store(engine)
    store.add([older, lost])
    store.close()

    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        body = (await client.get(f"{address(older.id)}/replay")).json()
        assert body["identical"] is False
        assert body["differences"] == [{"pointer": "/findings/0/limit", "stored": 9.9, "recomputed": 1.36563}]
        gone = (await client.get(f"{address(lost.id)}/replay")).json()
        assert gone["identical"] is False
        assert gone["differences"][0]["pointer"] == "/provenance/rules"

    served(url, work)


def test_a_full_writer_answers_503_and_stores_nothing_more(url: str, engine: Engine) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> list[httpx.Response]:
        return await asyncio.gather(*(client.put(address(), json=EXAMPLE_REQUEST) for _ in range(120)))

    answers = served(url, work, writer_capacity=3, writer_group=1)
    refused = [answer for answer in answers if answer.status_code == 503]
    assert refused
    assert all(problem(answer, 503)["type"] == "/problems/busy" for answer in refused)
    assert all(answer.headers["retry-after"] for answer in refused)
    assert len(page(engine, size=200)) == 120 - len(refused)


def test_rows_of_one_turn_run_together_and_a_bad_one_alone(url: str, monkeypatch: pytest.MonkeyPatch) -> None:
    calls: list[int] = []
    judge = gather.assess_requests

    def watched(requests: Any, digests: Any = None, languages: Any = None) -> Any:
        calls.append(len(requests))
        if any(request.point.label == "breaks" for request in requests):
            raise ArithmeticError("a planted fault")
        return judge(requests, digests, languages)

    monkeypatch.setattr(gather, "assess_requests", watched)

    async def work(client: httpx.AsyncClient, _: FastAPI) -> list[httpx.Response]:
        bodies = [copy.deepcopy(EXAMPLE_REQUEST) for _ in range(12)]
        together = await asyncio.gather(*(client.post("/v1/assessments/preview", json=body) for body in bodies))
        assert {answer.content for answer in together} == {together[0].content}
        assert max(calls) > 1
        bodies[5]["point"]["label"] = "breaks"
        return await asyncio.gather(*(client.post("/v1/assessments/preview", json=body) for body in bodies))

    answers = served(url, work)
    problem(answers[5], 500)
    assert [answer.status_code for at, answer in enumerate(answers) if at != 5] == [200] * 11
