"""Batches over HTTP: judged at once, stored whole, read back by row and as a list of work."""

import asyncio
import csv
import io
import json
import sqlite3
import uuid
from pathlib import Path
from typing import Any

import httpx
import pytest
from fastapi import FastAPI
from sqlalchemy import Engine, update

from faultloop import assess
from faultloop.exchange.examples import EXAMPLE_RULES
from faultloop.records.tables import BATCH
from tests.api.client import problem, served
from tests.assessment import workshop
from tests.exchange.files import GOOD, HEAD

CSV = {"Content-Type": "text/csv"}
FILE = workshop.FILE.read_bytes()
POINT = workshop.body(workshop.rows()[0])


@pytest.fixture
def url(engine: Engine) -> str:
    """A migrated database of either kind."""
    return engine.url.render_as_string(hide_password=False)


def test_a_file_is_judged_at_once_and_read_back(url: str) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        made = await client.post("/v1/batches", content=FILE, headers=CSV)
        assert made.status_code == 200
        body = made.json()
        assert body["counts"] == {"rows": 40, "results": 39, "held": 1, "refused": 0}
        assert len(body["results"]) == 39
        assert body["verdicts"] == {"pass": 30, "fail": 5, "pass-with-conditions": 2, "marginal": 1, "undetermined": 2}
        assert body["held"] == [
            {
                "row": 27,
                "point_id": "W26",
                "verdict": "undetermined",
                "urgency": "stop-use",
                "questions": [
                    {
                        "column": "earth_fault_loop_impedance_ohm",
                        "raw": "OL",
                        "question": body["held"][0]["questions"][0]["question"],
                    }
                ],
            }
        ]
        again = await client.get(made.headers["Location"])
        assert again.content == made.content
        assert again.headers["ETag"] == made.headers["ETag"] == f'"{body["provenance"]["input_digest"]}"'
        unchanged = await client.get(made.headers["Location"], headers={"If-None-Match": again.headers["ETag"]})
        assert (unchanged.status_code, unchanged.content) == (304, b"")
        problem(await client.get(f"/v1/batches/{uuid.uuid4()}"), 404)

    served(url, work)


def test_csv_in_csv_out_now_and_later(url: str) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        at_once = await client.post("/v1/batches", content=FILE, headers={**CSV, "Accept": "text/csv"})
        assert at_once.headers["Content-Type"] == "text/csv; charset=utf-8"
        later = await client.get(at_once.headers["Location"], headers={"Accept": "text/csv"})
        assert later.text == at_once.text
        assert later.headers["ETag"] == at_once.headers["ETag"]
        rows = list(csv.DictReader(io.StringIO(later.text)))
        assert [row["point_id"] for row in rows] == [row["point_id"] for row in workshop.rows()]
        compact = (await client.get(at_once.headers["Location"])).json()
        assert later.headers["ETag"] != f'"{compact["provenance"]["input_digest"]}"'
        for told in compact["results"]:
            row = rows[told["row"] - 2]
            assert (row["verdict"], row["urgency"], row["status"]) == (told["verdict"], told["urgency"], "judged")
            loop = told["findings"][compact["checks"].index("overcurrent-disconnection")]
            names = [f"overcurrent_disconnection_{part}" for part in ("verdict", "value", "limit", "reason")]
            assert [row[name] for name in names] == ["" if part is None else str(part) for part in loop or [None] * 4]

    served(url, work)


def test_one_row_in_full_is_the_answer_of_its_point(url: str) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        made = await client.post("/v1/batches", content=FILE, headers=CSV)
        where = made.headers["Location"]
        row = (await client.get(f"{where}/rows/8")).json()
        told = assess(workshop.body(workshop.rows()[6]))
        assert row["raw"] == workshop.rows()[6]
        assert (row["status"], row["identical"], row["changed"]) == ("judged", True, [])
        assert row["stored"] == next(result for result in made.json()["results"] if result["row"] == 8)
        for part in ("verdict", "urgency", "findings", "quantities", "cautions"):
            assert row["assessment"][part] == told[part]
        assert row["assessment"]["provenance"]["rules"] == "bs-7671:2018"
        held = (await client.get(f"{where}/rows/27")).json()
        assert (held["status"], held["identical"], "assessment" in held) == ("held", True, False)
        problem(await client.get(f"{where}/rows/1"), 404)
        problem(await client.get(f"{where}/rows/42"), 404)
        problem(await client.get(f"{where}/rows/0"), 422)

    served(url, work)


def test_a_row_says_when_the_engine_has_changed(engine: Engine, url: str) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        made = await client.post("/v1/batches", content=FILE, headers=CSV)
        older = json.loads(made.content)
        older["provenance"] |= {"engine": "0.0.9", "devices_digest": "0" * 64}
        older["results"][0]["findings"][0][1] = 0.5
        with engine.begin() as connection:
            import zlib

            connection.execute(update(BATCH).values(answer=zlib.compress(json.dumps(older).encode())))
        row = (await client.get(f"{made.headers['Location']}/rows/2")).json()
        assert row["changed"] == ["engine", "devices"]
        assert row["identical"] is False
        assert (await client.get(f"{made.headers['Location']}/rows/3")).json()["identical"] is True
        view = (await client.get(f"{made.headers['Location']}/workshop")).json()
        assert view["changed"] == ["engine", "devices"]

    served(url, work)


def test_the_same_upload_again_is_answered_from_the_store_and_another_is_refused(url: str) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        where = f"/v1/batches/{uuid.uuid4()}"
        first = await client.put(where, content=FILE, headers=CSV)
        again = await client.put(where, content=FILE, headers={**CSV, "If-None-Match": "*"})
        assert (first.status_code, again.status_code) == (201, 200)
        assert first.content == again.content == (await client.get(where)).content
        assert first.headers["Location"] == where
        problem(await client.put(where, content=FILE + b"\r\n", headers=CSV), 409)
        problem(await client.put(f"{where}?decimal=point", content=FILE, headers=CSV), 409)
        problem(await client.put(where, content=GOOD, headers={**CSV, "If-None-Match": "*"}), 412)
        assert (await client.get(where)).content == first.content

    served(url, work)


def test_many_put_one_id_at_once_and_one_wins(url: str) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        where = f"/v1/batches/{uuid.uuid4()}"
        bodies = [HEAD + GOOD.replace("0.62", f"0.6{at % 3}") for at in range(9)]
        answers = await asyncio.gather(*(client.put(where, content=body, headers=CSV) for body in bodies))
        assert sorted(answer.status_code for answer in answers) == [200] * 2 + [201] + [409] * 6
        kept = (await client.get(where)).content
        assert {answer.content for answer in answers if answer.status_code in (200, 201)} == {kept}

    served(url, work)


def test_a_list_of_requests_with_printed_readings(url: str) -> None:
    rows: list[Any] = [
        POINT,
        {**POINT, "readings": {**POINT["readings"], "earth_fault_loop_impedance_ohm": "> 2000"}},
        {**POINT, "readings": {**POINT["readings"], "earth_fault_loop_impedance_ohm": "0,72"}},
        {**POINT, "readings": {"residual_operating_time_ms": {"1": "OL"}}},
        {**POINT, "readings": {"earth_fault_loop_impedance_ohm": "---"}},
        {**POINT, "supply": {"earthing": "TNS"}},
        {"point": {}},
        7,
        None,
    ]

    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        made = await client.post("/v1/batches", json={"rows": rows})
        body = made.json()
        assert body["counts"] == {"rows": 9, "results": 3, "held": 2, "refused": 4}
        assert [row["row"] for row in body["results"]] == [1, 2, 5]
        assert [row["verdict"] for row in body["results"]] == ["pass", "fail", "undetermined"]
        assert [row["questions"][0]["pointer"] for row in body["held"]] == [
            "/rows/2/readings/earth_fault_loop_impedance_ohm",
            "/rows/3/readings/residual_operating_time_ms/1",
        ]
        assert [row["questions"][0]["raw"] for row in body["held"]] == ["0,72", "OL"]
        assert [row["errors"][0]["pointer"] for row in body["refused"]] == [
            "/rows/5/supply/earthing", "/rows/6/point/label", "/rows/7", "/rows/8",
        ]  # fmt: skip
        full = (await client.get(f"{made.headers['Location']}/rows/1")).json()
        assert full["raw"] == POINT
        assert full["assessment"]["verdict"] == "pass"

    served(url, work)


def test_defaults_stand_for_what_a_row_leaves_out(url: str) -> None:
    bare = {"point": {"label": "x"}, "readings": {"earth_fault_loop_impedance_ohm": 0.6}}
    shared = {key: value for key, value in POINT.items() if key not in ("point", "readings")}
    shared["readings"] = {"residual_operating_time_ms": {"1": 24}}

    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        rows = [bare, {**bare, "supply": {"earthing": "TT"}}]
        body = (await client.post("/v1/batches", json={"defaults": shared, "rows": rows})).json()
        alone = [
            assess({**shared, **bare, "readings": {**shared["readings"], **bare["readings"]}}),
            assess(
                {
                    **shared,
                    **bare,
                    "readings": {**shared["readings"], **bare["readings"]},
                    "supply": {**shared["supply"], "earthing": "TT"},
                }
            ),
        ]
        assert [row["verdict"] for row in body["results"]] == [answer["verdict"] for answer in alone]
        assert body["reading"]["defaults"] == shared
        made = await client.post(
            "/v1/batches?default=earthing=TN-S&default=rules=iec-60364",
            content=(HEAD + GOOD)
            .replace(",rules", "")
            .replace(",bs-7671", "")
            .replace("earthing,", "")
            .replace("TN-C-S,", ""),
            headers=CSV,
        )
        assert made.json()["reading"]["defaults"] == {"earthing": "TN-S", "rules": "iec-60364"}
        assert made.json()["provenance"]["rules"][0]["asked"] == "iec-60364"
        assert made.json()["results"][0]["verdict"] == "pass"

    served(url, work)


def test_rows_under_rules_of_the_callers_own(url: str) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        own = {**POINT, "rules": EXAMPLE_RULES}
        made = await client.post("/v1/batches", json={"rows": [POINT, own, {**POINT, "rules": "nowhere-rules:2026"}]})
        body = made.json()
        assert body["counts"] == {"rows": 3, "results": 2, "held": 0, "refused": 1}
        assert [told["asked"] for told in body["provenance"]["rules"]] == ["bs-7671", "site-rules:2026"]
        row = (await client.get(f"{made.headers['Location']}/rows/2")).json()
        assert (row["identical"], row["changed"]) == (True, [])
        assert row["assessment"]["findings"] == assess(own)["findings"]
        assert row["assessment"]["provenance"]["rules"] == "site-rules:2026"

    served(url, work)


def test_rows_may_name_a_stored_set_and_are_read_back_under_it(url: str) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        told = {"value": 2, "unit": "Mohm", "clause": "4.2", "source": "site policy", "sourcing": "assumption"}
        own = {"id": "site-rules", "edition": "2026", "title": "Site rules", "extends": "bs-7671:2018"}
        body = own | {"insulation": told | {"checked": "2026-11-30"}}
        assert (await client.put("/v1/rule-sets/site-rules:2026", json=body)).status_code == 201
        content = HEAD + GOOD.replace("bs-7671", "site-rules:2026") + GOOD.replace("bs-7671", "site-rules:2025")
        stored = await client.post("/v1/batches", content=content, headers={"Content-Type": "text/csv"})
        assert stored.json()["counts"] == {"rows": 2, "results": 1, "held": 0, "refused": 1}
        row = (await client.get(f"{stored.headers['Location']}/rows/2")).json()
        assert (row["identical"], row["assessment"]["provenance"]["rules"]) == (True, "site-rules:2026")
        assert "own-rules" in {caution["caution"] for caution in row["assessment"]["cautions"]}
        view = await client.get(f"{stored.headers['Location']}/workshop")
        assert view.json()["provenance"]["rules"][0]["asked"] == "site-rules:2026"

    served(url, work)


@pytest.mark.parametrize(
    ("kind", "content", "query", "status"),
    [
        ("text/csv", b"", "", 422),
        ("text/csv", b"lable\nx\n", "", 422),
        ("text/csv", b"label\n\xff\n", "", 422),
        ("text/csv", b'label\n"x\n', "", 422),
        ("text/csv", b"label\nx\n", "?default=earthing", 422),
        ("text/csv", b"label\nx\n", "?default=earthin=TT", 422),
        ("text/csv", b"label\nx\n", "?decimal=semicolon", 422),
        ("text/csv", b"label\nx\n", "?defaults=earthing=TT", 422),
        ("text/csv", b"label\n" + b"x\n" * 10_001, "", 422),
        ("application/json", b"{", "", 400),
        ("application/json", b'{"rows": [NaN]}', "", 400),
        ("application/json", b'{"rows": ' + b"[" * 2000 + b"]" * 2000 + b"}", "", 400),
        ("application/json", b"[]", "", 422),
        ("application/json", b"{}", "", 422),
        ("application/json", b'{"rows": {}}', "", 422),
        ("application/json", b'{"rows": [], "row": 1}', "", 422),
        ("application/json", b'{"rows": [], "rows": []}', "", 422),
        ("application/json", b'{"rows": [], "defaults": 1}', "", 422),
        ("application/json", b'{"rows": [' + b"0," * 10_000 + b"0]}", "", 422),
        ("application/json", b'{"rows": []}', "?decimal=point", 422),
        ("text/plain", b"label\nx\n", "", 415),
        ("text/csv; charset=latin-1", b"label\nx\n", "", 415),
        ("", b"label\nx\n", "", 415),
        ("text/csv", b"label\n" + b"x" * 70_000, "", 413),
    ],
)
def test_what_is_no_batch_is_refused_whole(tmp_path: Path, kind: str, content: bytes, query: str, status: int) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        headers = {"Content-Type": kind} if kind else {}
        problem(await client.post(f"/v1/batches{query}", content=content, headers=headers), status)

    served(migrated(tmp_path), work, max_batch_bytes=65_536)


def migrated(folder: Path) -> str:
    """A fresh SQLite database."""
    from faultloop.records.database import open_engine
    from faultloop.records.migrate import migrate

    url = f"sqlite:///{folder / 'batches.sqlite3'}"
    opened = open_engine(url)
    migrate(opened)
    opened.dispose()
    return url


def test_an_empty_batch_reconciles(tmp_path: Path) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        for content, kind in ((b"label\n", "text/csv"), (b'{"rows": []}', "application/json")):
            made = await client.post("/v1/batches", content=content, headers={"Content-Type": kind})
            assert made.json()["counts"] == {"rows": 0, "results": 0, "held": 0, "refused": 0}
            view = await client.get(f"{made.headers['Location']}/workshop?population=3")
            assert view.json()["sample"]["greatest_failing"] == 3

    served(migrated(tmp_path), work)


def test_a_problem_does_not_echo_the_file(tmp_path: Path) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        made = await client.post("/v1/batches?ignore=x", content="label,sekret_ohm\nx,y\n", headers=CSV)
        assert "sekret" not in made.text
        made = await client.post("/v1/batches?default=sekret=1", content="label\nx\n", headers=CSV)
        assert "sekret" not in made.text

    served(migrated(tmp_path), work)


def test_a_point_in_two_rows_is_governed_by_the_worse(tmp_path: Path) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        made = await client.post("/v1/batches", content=HEAD + GOOD + GOOD.replace(",24,", ",386,"), headers=CSV)
        assert made.json()["repeated_points"] == [{"point_id": "S1", "rows": [2, 3], "governing_row": 3}]
        view = (await client.get(f"{made.headers['Location']}/workshop")).json()
        assert view["points"] == 1
        assert (view["sample"]["decided"], view["sample"]["failed"]) == (1, 1)
        assert [item["row"] for item in view["stop_use"] + view["fix"]] == [3]

    served(migrated(tmp_path), work)


def test_the_event_loop_stays_free_while_a_batch_is_judged(tmp_path: Path) -> None:
    lines = FILE.decode().splitlines()
    big = "\n".join([lines[0], *lines[1:] * 100])

    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        batch = asyncio.create_task(client.post("/v1/batches", content=big, headers=CSV))
        answered = 0
        while not batch.done():
            live = await client.get("/health/live")
            assert live.status_code == 200
            answered += 1
            await asyncio.sleep(0.001)
        assert (await batch).json()["counts"]["rows"] == 4000
        assert answered > 3

    served(migrated(tmp_path), work)


def test_too_many_batches_at_once_are_told_to_come_back(tmp_path: Path) -> None:
    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        sent = [client.post("/v1/batches", content=FILE, headers=CSV) for _ in range(6)]
        answers = await asyncio.gather(*sent)
        statuses = [answer.status_code for answer in answers]
        assert set(statuses) == {200, 503}
        refused = next(answer for answer in answers if answer.status_code == 503)
        assert problem(refused, 503)["type"] == "/problems/busy"
        assert "Retry-After" in refused.headers

    served(migrated(tmp_path), work, batches_waiting=2)


def test_what_is_not_confirmed_is_not_acknowledged(tmp_path: Path) -> None:
    url = migrated(tmp_path)
    locked = sqlite3.connect(tmp_path / "batches.sqlite3", isolation_level=None)
    locked.execute("DROP TABLE batch")
    locked.execute("CREATE TABLE batch (id TEXT)")
    locked.close()

    async def work(client: httpx.AsyncClient, _: FastAPI) -> None:
        made = await client.post("/v1/batches", content=FILE, headers=CSV)
        assert problem(made, 503)["type"] == "/problems/storage-failed"

    served(url, work)
