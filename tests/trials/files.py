"""Two thousand mutated files and the hostile ones against a live service: no 500, no false pass, counts reconcile."""

import asyncio
from collections import Counter

import httpx

from tests.api.hostile_files import Sent, hostile, mutated
from tests.api.test_hostile_files import fault_of
from tests.trials.running import database, service

MUTATIONS = 2000


async def _send(port: int, files: list[Sent]) -> Counter[int]:
    statuses: Counter[int] = Counter()
    async with httpx.AsyncClient(base_url=f"http://127.0.0.1:{port}", trust_env=False, timeout=60) as client:
        for sent in files:
            url = f"/v1/batches{sent.query}"
            answer = await client.post(url, content=sent.content, headers={"Content-Type": "text/csv"})
            statuses[answer.status_code] += 1
            fault = fault_of(sent, answer)
            assert fault is None, (sent.name, fault, sent.content[:500])
    return statuses


def run() -> str:
    """Send them all."""
    files = [*mutated(MUTATIONS), *hostile()]
    with database("sqlite") as url, service(url) as port:
        statuses = asyncio.run(_send(port, files))
    return f"{len(files)} files, by status {dict(sorted(statuses.items()))}"
