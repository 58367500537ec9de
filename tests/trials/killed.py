"""kill -9 under load: every acknowledged assessment and batch is there afterwards, none twice, none half."""

import asyncio
import json
import random
import signal
import uuid
import zlib

import httpx
from sqlalchemy import select

from faultloop.exchange.examples import EXAMPLE_REQUEST
from faultloop.records.database import open_engine
from faultloop.records.tables import ASSESSMENT, BATCH
from tests.assessment.workshop import FILE
from tests.trials.running import database, free_port, start

TIMES = 20


async def _load(port: int, acknowledged: dict[str, bytes], seconds: float) -> None:
    """Put new assessments on eight connections, and batches on two, until the service is gone."""

    async def one(client: httpx.AsyncClient, resource: str, content: bytes, kind: str) -> None:
        while True:
            name = str(uuid.uuid4())
            answer = await client.put(f"/v1/{resource}/{name}", content=content, headers={"Content-Type": kind})
            assert answer.status_code == 201, answer.text
            acknowledged[name] = answer.content

    async with httpx.AsyncClient(base_url=f"http://127.0.0.1:{port}", trust_env=False, timeout=10) as client:
        point = ("assessments", json.dumps(EXAMPLE_REQUEST).encode(), "application/json")
        loads = [point] * 8 + [("batches", FILE.read_bytes(), "text/csv")] * 2
        workers = [asyncio.ensure_future(one(client, *load)) for load in loads]
        await asyncio.wait(workers, timeout=seconds + 20, return_when=asyncio.FIRST_EXCEPTION)
        for worker in workers:
            worker.cancel()
        ends = await asyncio.gather(*workers, return_exceptions=True)
        assert not [end for end in ends if isinstance(end, AssertionError)]


async def _killed(url: str, acknowledged: dict[str, bytes], chance: random.Random) -> None:
    port, seconds = free_port(), chance.uniform(0.3, 1.2)
    process = await asyncio.to_thread(start, url, port)
    load = asyncio.ensure_future(_load(port, acknowledged, seconds))
    await asyncio.sleep(seconds)
    process.send_signal(signal.SIGKILL)
    await asyncio.to_thread(process.wait)
    await load


def _stored(url: str) -> dict[str, bytes]:
    engine = open_engine(url)
    with engine.connect() as connection:
        rows = [(name, bytes(told)) for name, told in connection.execute(select(ASSESSMENT.c.id, ASSESSMENT.c.answer))]
        batches = connection.execute(select(BATCH.c.id, BATCH.c.answer)).all()
    engine.dispose()
    assert len({name for name, _ in rows}) == len(rows), "an id stands twice"
    assert len({name for name, _ in batches}) == len(batches), "a batch stands twice"
    return dict(rows) | {name: zlib.decompress(answer) for name, answer in batches}


def run(kind: str) -> str:
    """Kill the service many times on one database and look after each."""
    acknowledged: dict[str, bytes] = {}
    chance = random.Random(20261201)
    with database(kind) as url:
        for _ in range(TIMES):
            asyncio.run(_killed(url, acknowledged, chance))
            stored = _stored(url)
            lost = [name for name, answer in acknowledged.items() if stored.get(name) != answer]
            assert not lost, f"{len(lost)} acknowledged assessments are lost or changed"
            for answer in stored.values():
                json.loads(answer)
    assert acknowledged
    return f"{kind}: killed {TIMES} times, {len(acknowledged)} acknowledged, {len(stored)} stored, 0 lost"
