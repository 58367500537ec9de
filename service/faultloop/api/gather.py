"""Rows of requests that arrive in one turn of the event loop, run together as one table of points.

A judgement costs little more for sixteen rows than for one, so waiting for the end of the turn (and no
longer) makes a busy service several times faster and an idle one no slower.
"""

import asyncio
import logging
from typing import Any

from faultloop.exchange.render import assess_requests
from faultloop.exchange.requests import AssessmentRequest

_log = logging.getLogger(__name__)
Body = dict[str, Any]


class Gather:
    """Collects requests of one event-loop turn; a failing table is repeated row by row."""

    def __init__(self, most: int = 256) -> None:
        self._most = most
        self._waiting: list[tuple[AssessmentRequest, str, asyncio.Future[Body]]] = []

    async def assess(self, request: AssessmentRequest, input_digest: str) -> Body:
        """Judge one request together with whatever else arrives in this turn."""
        loop = asyncio.get_running_loop()
        future: asyncio.Future[Body] = loop.create_future()
        self._waiting.append((request, input_digest, future))
        if len(self._waiting) == 1:
            loop.call_soon(self._flush)
        elif len(self._waiting) >= self._most:
            self._flush()
        return await future

    def _flush(self) -> None:
        waiting, self._waiting = self._waiting, []
        if not waiting:
            return
        try:
            bodies = assess_requests([r for r, _, _ in waiting], [d for _, d, _ in waiting])
        except Exception:
            _log.exception("a table of %d points failed, so each is judged alone", len(waiting))
            self._one_by_one(waiting)
            return
        for (_, _, future), body in zip(waiting, bodies, strict=True):
            if not future.done():
                future.set_result(body)

    @staticmethod
    def _one_by_one(waiting: list[tuple[AssessmentRequest, str, asyncio.Future[Body]]]) -> None:
        for request, input_digest, future in waiting:
            if future.done():
                continue
            try:
                future.set_result(assess_requests([request], [input_digest])[0])
            except Exception as error:
                future.set_exception(error)
