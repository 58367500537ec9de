"""A thread for long work, so that the event loop stays free; one batch at a time, the others wait their turn."""

from collections.abc import Callable
from typing import TypeVar

import anyio

from faultloop.api.problems import Refused

Result = TypeVar("Result")


class Worker:
    """Runs one piece of work at a time in a thread; made and used inside one event loop."""

    def __init__(self, capacity: int) -> None:
        self._limiter = anyio.CapacityLimiter(1)
        self._capacity = capacity
        self._waiting = 0

    async def run(self, work: Callable[[], Result]) -> Result:
        """Run the work; a caller that goes away does not stop what has begun."""
        if self._waiting >= self._capacity:
            raise Refused("busy")
        self._waiting += 1
        try:
            return await anyio.to_thread.run_sync(work, limiter=self._limiter)
        finally:
            self._waiting -= 1
