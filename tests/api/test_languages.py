"""Languages over HTTP: negotiated where words are made, kept where an answer is stored."""

import asyncio
import uuid
from collections.abc import Awaitable, Callable
from typing import Any

import httpx
import pytest
from fastapi import FastAPI
from sqlalchemy import Engine

from faultloop import assess
from faultloop.exchange.examples import EXAMPLE_REQUEST
from faultloop.records.store import Store
from tests.api.client import problem, served

PREVIEW = "/v1/assessments/preview"
GERMAN = {"Accept-Language": "de"}
Work = Callable[[httpx.AsyncClient], Awaitable[Any]]


@pytest.fixture
def run(engine: Engine) -> Callable[[Work], Any]:
    """Run some work against the service on a migrated database."""
    url = engine.url.render_as_string(hide_password=False)

    def with_client(work: Work) -> Any:
        async def called(client: httpx.AsyncClient, _: FastAPI) -> Any:
            return await work(client)

        return served(url, called)

    return with_client


def address() -> str:
    return f"/v1/assessments/{uuid.uuid4()}"


@pytest.mark.parametrize(
    ("asked", "given"),
    [
        (None, "en"), ("", "en"), ("de", "de"), ("DE", "de"), ("de-AT,en;q=0.5", "de"), ("de-CH-1996", "de"),
        ("en-GB,de;q=0.9", "en"), ("fr", "en"), ("fr,de;q=0.2", "de"), ("fr,*;q=0.1", "en"), ("*", "en"),
        ("de;q=0.3,en;q=0.7", "en"), ("de;q=0", "en"), ("en;q=0,*", "de"), ("en;q=0,de;q=0", "en"),
        ("nothing;;;q=,", "en"), ("de;q=2", "en"), ("de,en", "de"), ("en,de", "en"), ("den", "en"),
        ("zh-Hant, de-DE;q=0.4, *;q=0.1", "de"),
    ],
)  # fmt: skip
def test_language_is_negotiated(run: Callable[[Work], Any], asked: str | None, given: str) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        headers = {} if asked is None else {"Accept-Language": asked}
        answer = await client.post(PREVIEW, json=EXAMPLE_REQUEST, headers=headers)
        assert (answer.status_code, answer.headers["content-language"]) == (200, given)
        assert answer.headers["vary"] == "Accept-Language"
        assert answer.json()["provenance"]["language"] == given

    run(work)


def test_german_is_spoken_in_previews_and_limits(run: Callable[[Work], Any]) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        answer = (await client.post(PREVIEW, json=EXAMPLE_REQUEST, headers=GERMAN)).json()
        assert answer["verdict"] == assess(EXAMPLE_REQUEST)["verdict"]
        (finding,) = (f for f in answer["findings"] if f["check"] == "overcurrent-disconnection")
        assert finding["title"] == "Überstrom-Schutzeinrichtung schaltet einen Erdfehler rechtzeitig ab"
        assert "Schleifenimpedanz gemessen: 0.72 Ω" in finding["explanation"]
        limit = await client.get("/v1/limits", params={"device": "B32", "rules": "bs-7671"}, headers=GERMAN)
        assert "innerhalb von 0.4 s" in limit.json()["explanation"]
        assert (limit.headers["content-language"], limit.headers["vary"]) == ("de", "Accept-Language")
        plain = await client.get("/v1/limits", params={"device": "30 mA"})
        assert "touch voltage" in plain.json()["explanation"]
        assert plain.headers["content-language"] == "en"

    run(work)


def test_a_stored_answer_stays_in_its_language(run: Callable[[Work], Any]) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        for first, later in (("de", "en"), ("en", "de")):
            where = address()
            made = await client.put(where, json=EXAMPLE_REQUEST, headers={"Accept-Language": first})
            assert (made.status_code, made.headers["content-language"]) == (201, first)
            again = await client.put(where, json=EXAMPLE_REQUEST, headers={"Accept-Language": later})
            read = await client.get(where, headers={"Accept-Language": later})
            for answer in (again, read):
                assert (answer.status_code, answer.headers["content-language"]) == (200, first)
                assert answer.content == made.content
                assert answer.headers["etag"] == made.headers["etag"]
            held = await client.get(where, headers={"If-None-Match": made.headers["etag"]})
            assert (held.status_code, held.headers["content-language"]) == (304, first)
            other = {**EXAMPLE_REQUEST, "point": {"label": "another"}}
            problem(await client.put(where, json=other, headers={"Accept-Language": first}), 409)

    run(work)


def test_the_digest_of_the_input_knows_no_language(run: Callable[[Work], Any]) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        told = [
            (await client.post(PREVIEW, json=EXAMPLE_REQUEST, headers={"Accept-Language": language})).json()
            for language in ("en", "de")
        ]
        assert len({answer["provenance"]["input_digest"] for answer in told}) == 1
        assert len({answer["provenance"]["texts_digest"] for answer in told}) == 2

    run(work)


def test_replay_computes_in_the_stored_language(run: Callable[[Work], Any]) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        where = address()
        await client.put(where, json=EXAMPLE_REQUEST, headers=GERMAN)
        body = (await client.get(f"{where}/replay", headers={"Accept-Language": "en"})).json()
        assert body["identical"] is True
        assert body["stored"]["language"] == body["recomputed"]["language"] == "de"

    run(work)


def test_an_answer_in_a_language_no_longer_held_is_kept_and_not_recomputed(
    run: Callable[[Work], Any], monkeypatch: pytest.MonkeyPatch
) -> None:
    where, add = address(), Store.add

    def foreign(store: Store, records: Any) -> Any:
        for record in records:
            object.__setattr__(record, "answer", record.answer.replace(b'"language":"en"', b'"language":"eo"'))
        return add(store, records)

    async def work(client: httpx.AsyncClient) -> None:
        monkeypatch.setattr(Store, "add", foreign)
        await client.put(where, json=EXAMPLE_REQUEST)
        assert (await client.get(where)).headers["content-language"] == "eo"
        body = (await client.get(f"{where}/replay")).json()
        assert body["identical"] is False
        assert body["differences"] == [{"pointer": "/provenance/language", "stored": "eo"}]
        drawing = await client.get(f"{where}/curve")
        assert (drawing.status_code, drawing.headers["content-language"]) == (200, "en")

    run(work)


def test_languages_asked_for_at_once_do_not_mix(run: Callable[[Work], Any]) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        asked = ["en", "de", "de-AT", "fr"] * 8
        calls = (client.post(PREVIEW, json=EXAMPLE_REQUEST, headers={"Accept-Language": tag}) for tag in asked)
        for tag, answer in zip(asked, await asyncio.gather(*calls), strict=True):
            assert answer.json()["provenance"]["language"] == ("de" if tag.startswith("de") else "en")

    run(work)
