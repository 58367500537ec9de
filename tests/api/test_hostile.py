"""Hostile bodies get a clear problem or a question; never a 500, never a pass, never stored when refused."""

from pathlib import Path
from typing import Any

import httpx
from fastapi import FastAPI

from faultloop.records.database import open_engine
from faultloop.records.migrate import migrate
from tests.api.client import problem, served
from tests.api.hostile import BODIES, TEXTS

PASSES = ("pass", "pass-with-conditions")


def judged(answer: httpx.Response) -> str | None:
    """What is wrong with how a hostile body was answered; nothing where it was answered well."""
    if answer.status_code != 200:
        body = problem(answer, answer.status_code)
        if not 400 <= answer.status_code < 500:
            return f"status {answer.status_code}"
        if answer.status_code == 422 and not body.get("errors") and "twice" not in body["detail"]:
            return "422 without naming a field"
        return None
    body = answer.json()
    if body["verdict"] in PASSES:
        return f"verdict {body['verdict']}"
    asked = [f for f in body["findings"] if f["counts"] and f["verdict"] in ("undetermined", "marginal")]
    if body["verdict"] == "undetermined" and not all(finding.get("settled_by") for finding in asked):
        return "undetermined without a question"
    return None


def test_there_are_enough() -> None:
    assert len(BODIES) + len(TEXTS) >= 150


def test_hostile_bodies(tmp_path: Path) -> None:
    url = f"sqlite:///{tmp_path / 'hostile.sqlite3'}"
    engine = open_engine(url)
    migrate(engine)
    engine.dispose()

    async def work(client: httpx.AsyncClient, _: FastAPI) -> dict[str, str]:
        faults: dict[str, str] = {}

        async def sent(name: str, **how: Any) -> None:
            answer = await client.post("/v1/assessments/preview", **how)
            if (fault := judged(answer)) is not None:
                faults[name] = fault

        for name, body in BODIES.items():
            await sent(name, json=body)
        for name, text in TEXTS.items():
            await sent(name, content=text, headers={"Content-Type": "application/json"})
        return faults

    assert served(url, work) == {}
