"""Curves over HTTP: the form that was asked for, tagged, and harmless wherever it is opened."""

import uuid
from collections.abc import Awaitable, Callable
from pathlib import Path

import httpx
import pytest
from fastapi import FastAPI

from faultloop.exchange.examples import EXAMPLE_REQUEST
from faultloop.records.database import open_engine
from faultloop.records.migrate import migrate
from tests.api.client import problem, served
from tests.reports.drawn import Drawn

Work = Callable[[httpx.AsyncClient], Awaitable[None]]
CURVE = "/v1/devices/B32/curve"
JSON, SVG = "application/json", "image/svg+xml"
BROWSER = "text/html,application/xhtml+xml,application/xml;q=0.9,image/avif,image/webp,*/*;q=0.8"


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

        served(url, called)

    return with_client


@pytest.mark.parametrize(
    ("asked", "given"),
    [
        ("*/*", JSON), ("", JSON), (JSON, JSON), (SVG, SVG), ("image/*", SVG), ("IMAGE/SVG+XML", SVG),
        (f"{SVG};q=0.5, {JSON};q=0.4", SVG), (f"{SVG};q=0.4, {JSON};q=0.5", JSON), (f"{JSON};q=0, */*", SVG),
        (f"{SVG}, {JSON}", JSON), (f"{JSON}; charset=utf-8", JSON), (f"{SVG};charset=utf-8", SVG),
        ("application/*;q=0.2, image/svg+xml;q=0.1", JSON), (BROWSER, JSON), (f"{SVG}, */*;q=0.1", SVG),
        (f"text/html, {SVG};q=0.1", SVG),
        ("text/html", None), (f"{SVG};q=0", None), ("image/png", None), ("nonsense", None), ("*/*;q=0", None),
        (f"{SVG};q=abc", None),
    ],
)  # fmt: skip
def test_form_is_negotiated(run: Callable[[Work], None], asked: str, given: str | None) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        answer = await client.get(CURVE, headers={"Accept": asked})
        if given is None:
            body = problem(answer, 406)
            assert JSON in body["detail"]
            assert SVG in body["detail"]
        else:
            assert (answer.status_code, answer.headers["content-type"]) == (200, given)
            assert answer.headers["vary"] == "Accept, Accept-Language"

    run(work)


def test_several_accept_lines_count_as_one(run: Callable[[Work], None]) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        lines = [("Accept", f"{JSON};q=0.1"), ("Accept", SVG)]
        request = client.build_request("GET", CURVE)
        del request.headers["accept"]
        request = httpx.Request("GET", request.url, headers=[*request.headers.items(), *lines])
        assert (await client.send(request)).headers["content-type"] == SVG

    run(work)


def test_format_goes_before_the_header(run: Callable[[Work], None]) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        for asked in (JSON, SVG, "text/html"):
            for name, kind in (("svg", SVG), ("json", JSON)):
                answer = await client.get(CURVE, params={"format": name}, headers={"Accept": asked})
                assert (answer.status_code, answer.headers["content-type"]) == (200, kind)
        problem(await client.get(CURVE, params={"format": "png"}), 422)
        problem(await client.get("/v1/devices/E16/curve", headers={"Accept": SVG}), 404)

    run(work)


def test_both_forms_show_the_same_points(run: Callable[[Work], None]) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        params = {"rules": "bs-7671"}
        for item in (await client.get("/v1/devices")).json()["items"][::9]:
            where = f"/v1/devices/{item['designation']}/curve"
            told = (await client.get(where, params=params)).json()
            drawn = Drawn((await client.get(where, params={**params, "format": "svg"})).content)
            (band,) = drawn.all("g", "band")
            for filled, edge in ((True, "slow"), (False, "fast")):
                marks, points = drawn.marks(band, filled), told[edge]
                assert len(marks) == len(points)
                for (current, time), point in zip(marks, points, strict=True):
                    assert current == pytest.approx(point["current_a"], rel=4e-3)
                    assert time == pytest.approx(point["time_s"], rel=4e-3)

    run(work)


def test_what_a_client_holds_is_not_sent_again(run: Callable[[Work], None]) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        tags = set()
        for headers in ({"Accept": JSON}, {"Accept": SVG}, {"Accept": SVG, "Accept-Language": "de"}):
            first = await client.get(CURVE, headers=headers)
            assert (await client.get(CURVE, headers=headers)).content == first.content
            tags.add(first.headers["etag"])
            held = await client.get(CURVE, headers={**headers, "If-None-Match": first.headers["etag"]})
            assert (held.status_code, held.content, held.headers["vary"]) == (304, b"", first.headers["vary"])
            head = await client.head(CURVE, headers=headers)
            assert (head.status_code, head.content, head.headers["etag"]) == (200, b"", first.headers["etag"])
        assert len(tags) == 3

    run(work)


def test_a_drawing_speaks_the_language_asked_for_and_runs_nothing(run: Callable[[Work], None]) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        answer = await client.get(CURVE, headers={"Accept": SVG, "Accept-Language": "de-DE"})
        assert answer.headers["content-language"] == "de"
        assert answer.headers["content-security-policy"] == "default-src 'none'"
        assert answer.headers["x-content-type-options"] == "nosniff"
        drawn = Drawn(answer.content)
        assert drawn.root.get("lang") == "de"
        assert "Auslösezeiten von B32" in drawn.texts()

    run(work)


def test_a_stored_assessment_is_drawn_in_its_language(run: Callable[[Work], None]) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        where = f"/v1/assessments/{uuid.uuid4()}"
        label = '<b onload="x">Bank & "3"</b>'
        body = {**EXAMPLE_REQUEST, "point": {"label": label}}
        stored = (await client.put(where, json=body, headers={"Accept-Language": "de"})).json()
        answer = await client.get(f"{where}/curve", headers={"Accept": BROWSER, "Accept-Language": "en"})
        assert (answer.status_code, answer.headers["content-type"]) == (200, SVG)
        assert (answer.headers["content-language"], answer.headers["vary"]) == ("de", "Accept")
        drawn = Drawn(answer.content)
        assert drawn.all("title")[0].text == label
        assert f"({stored['verdict']})" in drawn.description
        assert len(drawn.all("g", "band")) == 2
        assert len(drawn.all("g", "fault-current")) == 1
        assert stored["provenance"]["input_digest"][:12] in " ".join(drawn.texts())
        tag = {"If-None-Match": answer.headers["etag"]}
        assert (await client.get(f"{where}/curve", headers=tag)).status_code == 304
        assert (await client.get(f"{where}/curve", params={"format": "svg"}, headers={"Accept": JSON})).is_success
        problem(await client.get(f"{where}/curve", headers={"Accept": JSON}), 406)
        problem(await client.get(f"{where}/curve", params={"colour": "red"}), 422)
        problem(await client.get(f"/v1/assessments/{uuid.uuid4()}/curve"), 404)
        problem(await client.post(f"{where}/curve"), 405)

    run(work)


def test_an_assessment_without_a_device_gives_a_drawing_that_says_so(run: Callable[[Work], None]) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        where = f"/v1/assessments/{uuid.uuid4()}"
        body = {name: value for name, value in EXAMPLE_REQUEST.items() if not name.endswith("_device")}
        await client.put(where, json=body)
        answer = await client.get(f"{where}/curve")
        assert answer.status_code == 200
        drawn = Drawn(answer.content)
        assert drawn.all("g", "band") == []
        assert "No overcurrent device is stated" in drawn.description

    run(work)


def test_a_curve_of_the_caller_s_own_is_drawn_from_its_points_and_named_as_such(run: Callable[[Work], None]) -> None:
    async def work(client: httpx.AsyncClient) -> None:
        greatest = [{"current_a": 80, "time_s": 5}, {"current_a": 160, "time_s": 0.4}]
        source = "sheet <7> & figure 2"
        device = {"kind": "curve", "rated_current_a": 32, "source": source, "points": {"greatest": greatest}}
        where = f"/v1/assessments/{uuid.uuid4()}"
        body = {**EXAMPLE_REQUEST, "overcurrent_device": device}
        assert (await client.put(where, json=body)).status_code == 201
        answer = await client.get(f"{where}/curve")
        assert answer.status_code == 200
        told = " ".join(Drawn(answer.content).texts())
        assert f"own curve 32 A (“{source}”)" in told
        assert "nobody here vouches for it" in told

    run(work)
