"""The other resources, and the errors of the framework."""

import asyncio
from collections.abc import AsyncIterator, Awaitable, Callable
from pathlib import Path

import httpx
import pytest
from fastapi import FastAPI

from faultloop.api.problems import KINDS
from faultloop.exchange.examples import EXAMPLE_REQUEST
from faultloop.records.database import open_engine
from faultloop.records.migrate import migrate
from tests.api.client import problem, served

Work = Callable[[httpx.AsyncClient], Awaitable[None]]


@pytest.fixture
def run(tmp_path: Path) -> Callable[[Work], None]:
    """Run some work against the service on SQLite."""
    url = f"sqlite:///{tmp_path / 'service.sqlite3'}"
    engine = open_engine(url)
    migrate(engine)
    engine.dispose()

    def with_client(work: Work) -> None:
        async def called(client: httpx.AsyncClient, _: FastAPI) -> None:
            await work(client)

        served(url, called, max_body_bytes=4096)

    return with_client


def test_limits_as_printed(run: Callable[[Work], None]) -> None:
    # BS 7671 Tables 41.2, 41.3 and 41.5, two decimals and whole ohms.
    printed = {
        ("B32", "bs-7671", 0.4): "1.37", ("B32", "bs-7671:2008", 0.4): "1.44", ("C32", "bs-7671:2008", 5): "0.72",
        ("BS 88-2 gG 16", "bs-7671:2011", 0.4): "2.56", ("BS 88-3 16", "bs-7671:2011", 0.4): "2.42",
        ("BS 3036 30", "bs-7671:2011", 5): "2.64", ("BS 1361 15", "bs-7671:2008", 0.4): "3.28",
        ("BS 1362 13", "bs-7671:2008", 0.4): "2.42", ("BS 88-3 100", "bs-7671", 5): "0.38",
        ("30 mA", "bs-7671", 0.2): "1666.67",
    }  # fmt: skip

    async def work(client: httpx.AsyncClient) -> None:
        for (device, rules, time), limit in printed.items():
            params = {"device": device, "rules": rules, "time_s": time}
            body = (await client.get("/v1/limits", params=params)).json()
            assert f"{body['greatest_loop_impedance_ohm']:.2f}" == limit
            assert body["explanation"]
            assert body["provenance"]["rules"].startswith("bs-7671:")
        fifths = await client.get("/v1/limits", params={"device": "C32", "rules": "bs-7671", "policy": "four-fifths"})
        assert fifths.json()["greatest_loop_impedance_ohm"] == pytest.approx(0.8 * 0.95 * 230 / 320, rel=1e-5)
        none = (await client.get("/v1/limits", params={"device": "B16", "time_s": 0.05})).json()
        assert "greatest_loop_impedance_ohm" not in none
        # Makers' types: 230 V over 14 In and 3 In.
        for device, limit in (("K20", 230 / 280), ("Z10", 230 / 30)):
            told = (await client.get("/v1/limits", params={"device": device})).json()
            assert told["greatest_loop_impedance_ohm"] == pytest.approx(limit, rel=1e-5)
        motor = problem(await client.get("/v1/limits", params={"device": "aM 50"}), 422)
        assert "aM fuse-links are not held" in motor["detail"]
        problem(await client.get("/v1/limits", params={"device": "B1000"}), 422)
        problem(await client.get("/v1/limits", params={"device": "B16", "time_s": 0}), 422)

    run(work)


def test_devices_and_their_curves(run: Callable[[Work], None]) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        items = (await client.get("/v1/devices")).json()["items"]
        for item in items:
            curve = await client.get(f"/v1/devices/{item['designation']}/curve", params={"rules": "bs-7671"})
            assert curve.status_code == 200
            currents = [point["current_a"] for point in curve.json()["slow"]]
            assert currents == sorted(currents)
        kinds = {(item["kind"], item["standard"].split(",")[0].split(" (")[0]) for item in items}
        assert {("miniature-circuit-breaker", "IEC 60898-1"), ("miniature-circuit-breaker", "IEC 60947-2")} <= kinds
        systems = ("IEC 60269-1:2006", "BS 88-2", "BS 88-3", "BS 3036", "BS 1361", "BS 1362")
        assert {("fuse", system) for system in systems} <= kinds
        fuse = (await client.get("/v1/devices/gG 32/curve")).json()
        assert {"current_a": 275.0, "time_s": 0.4} in fuse["slow"]
        problem(await client.get("/v1/devices/E16/curve"), 404)

    run(work)


def test_rule_sets_show_their_sources(run: Callable[[Work], None]) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        items = (await client.get("/v1/rule-sets")).json()["items"]
        assert {item["id"] for item in items} >= {"iec-60364", "bs-7671"}
        assert sum(item["newest"] for item in items if item["id"] == "bs-7671") == 1
        detail = (await client.get("/v1/rule-sets/bs-7671")).json()
        assert detail["rules"] == "bs-7671:2018"
        assert detail["values"]["voltage_factor"]["least"]["source"]
        problem(await client.get("/v1/rule-sets/none"), 404)

    run(work)


def test_errors_of_the_framework_are_problems(run: Callable[[Work], None]) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        here = "/v1/assessments/12345678-1234-4234-8234-123456789abc"
        problem(await client.get("/nowhere"), 404)
        wrong = await client.patch(here, json={})
        problem(wrong, 405)
        assert wrong.headers["allow"] == "GET, HEAD, PUT"
        problem(await client.post("/v1/assessments/preview", content=b"a=1", headers={"Content-Type": "text/csv"}), 415)
        problem(await client.post("/v1/assessments/preview", content=b"{}"), 415)
        problem(await client.post("/v1/assessments/preview", json={"x": "a" * 5000}), 413)

        async def chunks() -> AsyncIterator[bytes]:
            for _ in range(10):
                yield b'"' + b"a" * 1000

        headers = {"Content-Type": "application/json"}
        problem(await client.post("/v1/assessments/preview", content=chunks(), headers=headers), 413)

    run(work)


def test_every_type_of_problem_has_its_page(run: Callable[[Work], None]) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        for kind, (status, title, _) in KINDS.items():
            page = await client.get(f"/problems/{kind}")
            assert page.status_code == 200
            assert title in page.text
            assert str(status) in page.text
        problem(await client.get("/problems/other"), 404)

    run(work)


def test_health(run: Callable[[Work], None], tmp_path: Path) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        assert (await client.get("/health/live")).json() == {"status": "live"}
        assert (await client.get("/health/ready")).json() == {"status": "ready"}

    run(work)

    async def empty(client: httpx.AsyncClient, _: FastAPI) -> None:
        assert (await client.get("/health/live")).status_code == 200
        assert (await client.get("/health/ready")).status_code == 503

    served(f"sqlite:///{tmp_path / 'empty.sqlite3'}", empty)


def test_a_body_is_never_echoed(run: Callable[[Work], None]) -> None:
    mark = "zq7sentinel"
    bodies: list[object] = [
        {**EXAMPLE_REQUEST, mark: mark},
        {**EXAMPLE_REQUEST, "rules": mark},
        {**EXAMPLE_REQUEST, "point": {"label": mark, mark: 1}},
        {**EXAMPLE_REQUEST, "supply": {"earthing": mark}},
        {**EXAMPLE_REQUEST, "overcurrent_device": {"kind": mark}},
        {**EXAMPLE_REQUEST, "readings": {"earth_fault_loop_impedance_ohm": mark}},
        {**EXAMPLE_REQUEST, "readings": {"residual_operating_time_ms": {mark: 3}}},
        {**EXAMPLE_REQUEST, "policy": {"temperature": mark}},
        [mark],
        mark,
    ]

    async def work(client: httpx.AsyncClient) -> None:
        answers = [await client.post("/v1/assessments/preview", json=body) for body in bodies]
        answers.append(await client.get(f"/v1/devices/{mark}/curve"))
        answers.append(await client.get("/v1/limits", params={"device": mark, "rules": mark}))
        answers.append(await client.get("/v1/assessments", params={"cursor": mark}))
        answers.append(await client.get(f"/{mark}"))
        for answer in answers:
            body = problem(answer, answer.status_code)
            told = {key: value for key, value in body.items() if key != "errors"}
            assert mark not in str(told)
            assert mark not in str(answer.headers)
            # A pointer names the place, and the place of an unknown field is its name.
            assert all(mark not in error["detail"] for error in body.get("errors", []))

    run(work)


def test_concurrent_calls_do_not_mix_their_answers(run: Callable[[Work], None]) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        bodies = [{**EXAMPLE_REQUEST, "rules": name} for name in ("bs-7671", "iec-60364", "bs-7671:2008")] * 8
        answers = await asyncio.gather(*(client.post("/v1/assessments/preview", json=body) for body in bodies))
        for body, answer in zip(bodies, answers, strict=True):
            assert answer.json()["provenance"]["rules"].startswith(str(body["rules"]))

    run(work)
