"""Thousands of mutated bodies: never a 500, and no pass where what a pass needs cannot be read."""

import asyncio
import copy
import json
import random
from typing import Any, NamedTuple

import httpx

from faultloop.exchange.examples import EXAMPLE_BENCH, EXAMPLE_REQUEST, EXAMPLE_SEPARATED
from tests.api.hostile import TEXTS
from tests.trials.running import database, service

Place = tuple[str | int, ...]

MUTATIONS = 4000
VALUES: list[Any] = [
    None, "", "0,72", ">2000", "OL", [], {}, True, -1, 0, 1e-300, 1e7, 1e308, 5e-324, "x" * 10_000, "\u0000", [[]],
    {"value": 0.3, "bound": "above"}, {"value": "0.3"}, {"value": 0.0004},
]  # fmt: skip


class Target(NamedTuple):
    """A route, a body that it judges, and the places without which nothing passes."""

    path: str
    body: dict[str, Any]
    needed: tuple[Place, ...]


TARGETS = (
    Target("/v1/assessments/preview", EXAMPLE_REQUEST, (
        ("supply", "earthing"), ("supply", "nominal_voltage_to_earth_v"), ("circuit", "role"), ("overcurrent_device",),
        ("readings", "earth_fault_loop_impedance_ohm"), ("readings", "residual_operating_time_ms"),
    )),
    Target("/v1/separated-supplies", EXAMPLE_SEPARATED, (
        ("items",), ("overcurrent_device",), ("readings",),
    )),
    Target("/v1/bench-networks", EXAMPLE_BENCH, (("supplies",), ("items",), ("planned_link",))),
)  # fmt: skip


def _places(body: Any, path: Place = ()) -> list[Place]:
    inner = body.items() if isinstance(body, dict) else enumerate(body) if isinstance(body, list) else ()
    return [place for key, value in inner for place in ((*path, key), *_places(value, (*path, key)))]


def _mutated(chance: random.Random, target: Target) -> tuple[bytes, bool]:
    """A body with one to three wounds, and whether something that a pass needs was taken out of it."""
    body = copy.deepcopy(target.body)
    taken = False
    for _ in range(chance.randint(1, 3)):
        place = chance.choice(_places(body))
        here: Any = body
        for part in place[:-1]:
            here = here[part]
        if chance.random() < 0.3:
            del here[place[-1]]
            taken |= any(needed[: len(place)] == place for needed in target.needed)
        elif chance.random() < 0.2 and isinstance(here, dict):
            here[f"{place[-1]}x"] = here.pop(place[-1])
        else:
            here[place[-1]] = copy.deepcopy(chance.choice(VALUES))
    text = json.dumps(body).encode()
    if chance.random() < 0.15:
        at = chance.randrange(len(text))
        text = text[:at] + bytes([chance.randrange(256)]) + text[at + 1 :]
    return text, taken


async def _send(port: int) -> dict[int, int]:
    statuses: dict[int, int] = {}
    chance = random.Random(20261201)
    sent = [(target.path, *_mutated(chance, target)) for target in TARGETS for _ in range(MUTATIONS)]
    sent += [(target.path, text, True) for target in TARGETS for text in TEXTS.values()]
    async with httpx.AsyncClient(base_url=f"http://127.0.0.1:{port}", trust_env=False, timeout=60) as client:
        for path, text, taken in sent:
            answer = await client.post(path, content=text, headers={"Content-Type": "application/json"})
            statuses[answer.status_code] = statuses.get(answer.status_code, 0) + 1
            assert answer.status_code < 500, (answer.status_code, path, text[:1000])
            passed = answer.status_code == 200 and answer.json()["verdict"] in ("pass", "pass-with-conditions")
            assert not (taken and passed), (path, text[:1000])
    return statuses


def run() -> str:
    """Send them all."""
    with database("sqlite") as url, service(url) as port:
        statuses = asyncio.run(_send(port))
    return f"{sum(statuses.values())} bodies, by status {dict(sorted(statuses.items()))}"
