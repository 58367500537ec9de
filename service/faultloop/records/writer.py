"""The one writer: many requests wait, one transaction stores them all.

A commit costs far more than a row, so a single thread takes whatever waits, stores it as one group and
only then tells those who wait. Nobody is told "stored" before the database has confirmed it.
"""

import asyncio
import logging
import queue
import threading
from collections.abc import Iterator
from dataclasses import dataclass

from sqlalchemy import Engine

from .errors import StorageFailed, StorageUnavailable, WriterBusy, WriterClosed
from .store import Created, Store
from .tables import Record, Stored

_log = logging.getLogger(__name__)

Outcome = Created | StorageFailed


@dataclass(frozen=True, slots=True)
class _Waiting:
    record: Record
    future: asyncio.Future[Created]


class Writer:
    """Store records from one event loop in groups; start it inside that loop, and close it there."""

    def __init__(self, engine: Engine, capacity: int = 2048, group: int = 256) -> None:
        self._store = Store(engine)
        self._capacity = capacity
        self._group = group
        self._queue: queue.SimpleQueue[_Waiting | None] = queue.SimpleQueue()
        self._loop: asyncio.AbstractEventLoop | None = None
        self._thread = threading.Thread(target=self._run, name="records-writer", daemon=True)
        self._open = False

    def start(self) -> None:
        """Begin to store; called once, inside the event loop that will put."""
        self._loop = asyncio.get_running_loop()
        self._thread.start()
        self._open = True

    async def put(self, record: Record) -> tuple[Stored, bool]:
        """Store a record, or find the one that already has its id; True when this call created it.

        A caller that stops waiting does not take its record back: once it waits, it is stored.
        """
        if not self._open or self._loop is None:
            raise WriterClosed("the writer does not run, so nothing can be stored")
        if self._queue.qsize() >= self._capacity:
            raise WriterBusy(f"{self._capacity} records wait to be stored already: try again shortly")
        waiting = _Waiting(record, self._loop.create_future())
        self._queue.put(waiting)
        return await waiting.future

    async def close(self) -> None:
        """Store what waits already, then stop; what is put afterwards is refused."""
        if self._open:
            self._open = False
            self._queue.put(None)
        if self._thread.ident is not None:
            await asyncio.to_thread(self._thread.join)

    def _run(self) -> None:
        more = True
        while more:
            group, more = self._take()
            if group:
                self._tell(group, self._outcomes([waiting.record for waiting in group]))
        self._store.close()

    def _take(self) -> tuple[list[_Waiting], bool]:
        """Wait for a first record and take what waits behind it; False when nothing will follow."""
        group: list[_Waiting] = []
        waiting = self._queue.get()
        while waiting is not None:
            group.append(waiting)
            if len(group) == self._group:
                return group, True
            try:
                waiting = self._queue.get_nowait()
            except queue.Empty:
                return group, True
        return group, False

    def _outcomes(self, records: list[Record]) -> list[Outcome]:
        """Store a group, or row by row when it fails, so that one bad row never sinks its neighbours."""
        try:
            return list(self._store.add(records))
        except StorageUnavailable as error:
            return [StorageUnavailable(str(error)) for _ in records]
        except StorageFailed as error:
            _log.warning("a group of %d records failed, so each is tried alone: %s", len(records), error)
        return list(self._one_by_one(records))

    def _one_by_one(self, records: list[Record]) -> Iterator[Outcome]:
        unavailable = ""  # once nothing can be begun, the rest need not wait for that one after the other
        for record in records:
            if unavailable:
                yield StorageUnavailable(unavailable)
                continue
            try:
                yield self._store.add([record])[0]
            except StorageFailed as error:
                unavailable = str(error) if isinstance(error, StorageUnavailable) else ""
                yield error

    def _tell(self, group: list[_Waiting], outcomes: list[Outcome]) -> None:
        assert self._loop is not None
        try:
            self._loop.call_soon_threadsafe(_resolve, group, outcomes)
        except RuntimeError:
            _log.warning("%d records were dealt with after the event loop had gone", len(group))


def _resolve(group: list[_Waiting], outcomes: list[Outcome]) -> None:
    """Wake those who wait, in the event loop's own thread; some may have stopped waiting."""
    for waiting, outcome in zip(group, outcomes, strict=True):
        if waiting.future.done():
            continue
        if isinstance(outcome, StorageFailed):
            waiting.future.set_exception(outcome)
        else:
            waiting.future.set_result(outcome)
