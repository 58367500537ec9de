"""The one writer: acknowledged means stored, once, whole; one bad row sinks nobody else."""

import asyncio
import uuid
from collections.abc import Awaitable, Callable
from dataclasses import replace
from typing import Any

import pytest
from sqlalchemy import Engine, func, select, text

from faultloop.records.errors import RecordRefused, StorageFailed, WriterBusy, WriterClosed
from faultloop.records.queries import find, page
from faultloop.records.tables import ASSESSMENT
from faultloop.records.writer import Writer
from tests.records.made import record


def written(engine: Engine, work: Callable[[Writer], Awaitable[Any]], **options: int) -> Any:
    """Run some work with a writer, and close it."""

    async def run() -> Any:
        writer = Writer(engine, **options)
        writer.start()
        try:
            return await work(writer)
        finally:
            await writer.close()

    return asyncio.run(run())


def count(engine: Engine) -> int:
    with engine.connect() as connection:
        return int(connection.execute(select(func.count()).select_from(ASSESSMENT)).scalar_one())


def test_300_at_once_of_one_id_make_one_row(engine: Engine) -> None:
    name = str(uuid.uuid4())

    async def work(writer: Writer) -> list[tuple[Any, bool]]:
        return await asyncio.gather(*(writer.put(record(name, input_digest=f"{n % 3:064d}")) for n in range(300)))

    answers = written(engine, work)
    assert sum(created for _, created in answers) == 1
    assert len({stored.record for stored, _ in answers}) == 1
    assert count(engine) == 1


def test_every_acknowledged_record_is_there_as_it_was_given(engine: Engine) -> None:
    made = [record(request=f'{{"n":{n},"s":"\\u0000 Ω 漢"}}'.encode(), label=f"Ω 漢 {n}") for n in range(600)]

    async def work(writer: Writer) -> None:
        await asyncio.gather(*(writer.put(one) for one in made))

    written(engine, work, group=64)
    for one in made[::37]:
        found = find(engine, one.id)
        assert found is not None
        assert found.record == one
    assert count(engine) == 600


def test_a_failing_row_sinks_only_itself(engine: Engine) -> None:
    rows = [record() for _ in range(40)]
    rows[17] = record(verdict="safe")

    async def work(writer: Writer) -> list[Any]:
        return await asyncio.gather(*(writer.put(row) for row in rows), return_exceptions=True)

    answers = written(engine, work)
    assert isinstance(answers[17], RecordRefused)
    assert all(created for at, (_, created) in enumerate(a for a in answers if not isinstance(a, Exception)) if at >= 0)
    assert count(engine) == 39


def test_a_full_writer_refuses_and_a_closed_one_too(engine: Engine) -> None:
    async def work(writer: Writer) -> list[Any]:
        return await asyncio.gather(*(writer.put(record()) for _ in range(200)), return_exceptions=True)

    answers = written(engine, work, capacity=5)
    refused = [a for a in answers if isinstance(a, WriterBusy)]
    assert refused
    assert count(engine) == len(answers) - len(refused)

    async def late() -> None:
        writer = Writer(engine)
        writer.start()
        await writer.close()
        await writer.put(record())

    with pytest.raises(WriterClosed):
        asyncio.run(late())


def test_closing_stores_what_waits(engine: Engine) -> None:
    async def run() -> list[Any]:
        writer = Writer(engine, group=8)
        writer.start()
        waiting = [asyncio.ensure_future(writer.put(record())) for _ in range(100)]
        await asyncio.sleep(0)
        await writer.close()
        return await asyncio.gather(*waiting)

    assert all(created for _, created in asyncio.run(run()))
    assert count(engine) == 100


def test_a_cancelled_waiter_does_not_break_its_group(engine: Engine) -> None:
    async def work(writer: Writer) -> list[Any]:
        tasks = [asyncio.ensure_future(writer.put(record())) for _ in range(20)]
        await asyncio.sleep(0)
        tasks[3].cancel()
        return await asyncio.gather(*tasks, return_exceptions=True)

    answers = written(engine, work)
    assert sum(isinstance(a, asyncio.CancelledError) for a in answers) == 1
    assert count(engine) in (19, 20)


def test_a_full_disk_loses_nothing_acknowledged(engine: Engine) -> None:
    """SQLite may be told how many pages the file may have; beyond, it answers as on a full disk."""
    if engine.dialect.name != "sqlite":
        pytest.skip("PostgreSQL's disk cannot be filled without filling this machine's; its lost connection is tested")
    big = b'"' + b"x" * 20_000 + b'"'

    async def work(writer: Writer) -> tuple[list[Any], list[Any]]:
        await writer.put(record())
        connection = writer._store._connection
        assert connection is not None
        pages = connection.exec_driver_sql("PRAGMA page_count").scalar_one()
        connection.exec_driver_sql(f"PRAGMA max_page_count = {pages + 40}")
        full = await asyncio.gather(*(writer.put(record(answer=big)) for _ in range(60)), return_exceptions=True)
        after = await asyncio.gather(*(writer.put(record()) for _ in range(5)))
        return full, after

    full, after = written(engine, work, group=1)
    stored = [answer for answer in full if not isinstance(answer, Exception)]
    assert any(isinstance(answer, StorageFailed) for answer in full)
    assert len(after) == 5
    for answer, _ in [*stored, *after]:
        assert find(engine, answer.record.id) is not None
    assert count(engine) == 1 + len(stored) + 5


def test_a_lost_connection_is_made_again(engine: Engine) -> None:
    if engine.dialect.name != "postgresql":
        pytest.skip("SQLite has no connection that a server could end; its full disk is tested")

    async def work(writer: Writer) -> list[Any]:
        first = await writer.put(record())
        with engine.connect() as other:
            other.execute(
                text(
                    "SELECT pg_terminate_backend(pid) FROM pg_stat_activity WHERE pid <> pg_backend_pid()"
                    " AND datname = current_database()"
                )
            )
        answers: list[Any] = [first]
        for _ in range(3):
            answers += await asyncio.gather(writer.put(record()), return_exceptions=True)
        return answers

    answers = written(engine, work)
    assert not isinstance(answers[-1], Exception)
    stored = [answer for answer in answers if not isinstance(answer, Exception)]
    assert count(engine) == len(stored)


def test_pages_neither_skip_nor_repeat_while_rows_are_added(engine: Engine) -> None:
    async def add(writer: Writer, number: int) -> list[str]:
        answers = await asyncio.gather(*(writer.put(record()) for _ in range(number)))
        return [stored.record.id for stored, _ in answers]

    async def work(writer: Writer) -> tuple[list[str], list[str]]:
        before = await add(writer, 25)
        seen: list[str] = []
        at: int | None = None
        while rows := page(engine, before=at, size=7):
            seen += [row.id for row in rows]
            at = rows[-1].sequence
            await add(writer, 3)
        return before, seen

    before, seen = written(engine, work)
    assert len(seen) == len(set(seen))
    assert sorted(seen) == sorted(before)


def test_pages_filter(engine: Engine) -> None:
    async def work(writer: Writer) -> None:
        await writer.put(record(verdict="fail", urgency="stop-use"))
        await writer.put(record())

    written(engine, work)
    assert [row.verdict for row in page(engine, size=9, verdict="fail")] == ["fail"]
    assert [row.urgency for row in page(engine, size=9, urgency="none")] == ["none"]
    assert page(engine, size=9, verdict="pass", urgency="urgent") == []
    assert replace(record(), label=None).label is None
