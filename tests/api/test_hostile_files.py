"""Mutated and hostile files: never a 500, counts reconcile, no pass from a cell that nobody could read."""

from pathlib import Path
from typing import Any

import httpx
import pytest
from fastapi import FastAPI

from tests.api.client import problem, served
from tests.api.hostile import BODIES
from tests.api.hostile_files import Sent, hostile, may_pass, mutated
from tests.api.test_batches import migrated

PLAIN_TEXTS = {"loop '0.72'", "loop '0.72 ohm'", "time text"}
PASSES = ("pass", "pass-with-conditions")


def fault_of(sent: Sent, answer: httpx.Response) -> str | None:
    """What is wrong with how a file was answered; nothing where it was answered well."""
    if answer.status_code != 200:
        problem(answer, answer.status_code)
        return None if 400 <= answer.status_code < 500 else f"status {answer.status_code}"
    body = answer.json()
    counts = body["counts"]
    listed = {part: len(body[part]) for part in ("results", "held", "refused")}
    if counts["rows"] != sum(listed.values()) or any(counts[part] != size for part, size in listed.items()):
        return f"counts {counts}, listed {listed}"
    numbers = [row["row"] for part in listed for row in body[part]]
    if len(set(numbers)) != len(numbers):
        return "a row stands twice"
    if sent.loops is None:
        return None
    if counts["rows"] != len(sent.loops):
        return f"{len(sent.loops)} rows sent, {counts['rows']} told"
    verdicts = {row["row"]: row["verdict"] for row in body["results"]}
    passed = [cell for at, cell in enumerate(sent.loops) if verdicts.get(at + 2) in PASSES and not may_pass(cell)]
    return f"passed with {passed}" if passed else None


def test_the_oracle_reads_as_a_person_does() -> None:
    assert [may_pass(cell) for cell in ("0.62", "0,62 Ω", "<0.05", " 1 ")] == [True] * 4
    assert not any(may_pass(cell) for cell in ("", "OL", ">2000", "0.62k", "-0.62", "2.5", "0 62", "0.6２"))


@pytest.mark.parametrize("kind", ["mutated", "hostile"])
def test_files(tmp_path: Path, kind: str) -> None:
    files = list(mutated(160)) if kind == "mutated" else list(hostile())

    async def work(client: httpx.AsyncClient, _: FastAPI) -> dict[str, str]:
        faults: dict[str, str] = {}
        for sent in files:
            url = f"/v1/batches{sent.query}"
            answer = await client.post(url, content=sent.content, headers={"Content-Type": "text/csv"})
            if (fault := fault_of(sent, answer)) is not None:
                faults[sent.name] = fault
        return faults

    assert served(migrated(tmp_path), work) == {}


def test_hostile_points_as_rows_of_one_batch(tmp_path: Path) -> None:
    names, rows = list(BODIES), list(BODIES.values())

    async def work(client: httpx.AsyncClient, _: FastAPI) -> Any:
        return (await client.post("/v1/batches", json={"rows": rows})).json()

    body = served(migrated(tmp_path), work)
    assert body["counts"]["rows"] == len(rows) == sum(body["counts"][part] for part in ("results", "held", "refused"))
    # In a batch a reading may be the text of an instrument, and of these three the text is a plain number.
    passed = {names[row["row"] - 1] for row in body["results"] if row["verdict"] in PASSES}
    assert passed == PLAIN_TEXTS
    assert all(row["questions"] for row in body["held"])
    assert all(error["detail"] for row in body["refused"] for error in row["errors"])
