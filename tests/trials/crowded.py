"""300 PUTs of one id at once over HTTP: one row, one 201."""

import asyncio
import uuid

import httpx

from faultloop.exchange.examples import EXAMPLE_REQUEST
from tests.trials.running import database, service


async def _crowd(port: int) -> list[httpx.Response]:
    limits = httpx.Limits(max_connections=300)
    base = f"http://127.0.0.1:{port}"
    async with httpx.AsyncClient(base_url=base, trust_env=False, timeout=60, limits=limits) as client:
        where = f"/v1/assessments/{uuid.uuid4()}"
        answers = await asyncio.gather(*(client.put(where, json=EXAMPLE_REQUEST) for _ in range(300)))
        items = (await client.get("/v1/assessments")).json()["items"]
    assert len(items) == 1, f"{len(items)} rows"
    return list(answers)


def run(kind: str) -> str:
    """Crowd one id on one database."""
    with database(kind) as url, service(url) as port:
        answers = asyncio.run(_crowd(port))
    statuses = sorted(answer.status_code for answer in answers)
    assert statuses == [200] * 299 + [201], statuses
    assert len({answer.content for answer in answers}) == 1
    return f"{kind}: 300 at once, one row, one 201, the same bytes for all"
