"""A bounded HTTP load on loopback: keep-alive connections that each send the next request at once."""

import asyncio
import time
from collections.abc import Callable
from dataclasses import dataclass, field


@dataclass(slots=True)
class Result:
    """What one run of load gave."""

    seconds: float
    latencies_s: list[float] = field(default_factory=list)
    statuses: dict[int, int] = field(default_factory=dict)

    @property
    def rate(self) -> float:
        """Answers per second."""
        return len(self.latencies_s) / self.seconds

    def quantile(self, share: float) -> float:
        """Latency that a share of the answers keeps."""
        ordered = sorted(self.latencies_s)
        return ordered[min(len(ordered) - 1, int(share * len(ordered)))]


class _Connection(asyncio.Protocol):
    """One connection; the next request goes out as soon as an answer is whole."""

    def __init__(self, requests: Callable[[], bytes], result: Result, until: float, done: asyncio.Event) -> None:
        self._requests, self._result, self._until, self._done = requests, result, until, done
        self._buffer, self._sent = b"", 0.0

    def connection_made(self, transport: asyncio.BaseTransport) -> None:
        self._transport = transport
        self._send()

    def _send(self) -> None:
        self._sent = time.perf_counter()
        if self._sent >= self._until:
            self._done.set()
            self._transport.close()
            return
        self._transport.write(self._requests())  # type: ignore[attr-defined]

    def data_received(self, data: bytes) -> None:
        self._buffer += data
        head_end = self._buffer.find(b"\r\n\r\n")
        if head_end < 0:
            return
        head = self._buffer[:head_end].lower()
        start = head.find(b"content-length:")
        length = int(head[start + 15 :].split(b"\r\n", 1)[0])
        if len(self._buffer) < head_end + 4 + length:
            return
        status = int(head[9:12])
        self._result.latencies_s.append(time.perf_counter() - self._sent)
        self._result.statuses[status] = self._result.statuses.get(status, 0) + 1
        self._buffer = b""
        self._send()

    def connection_lost(self, exc: Exception | None) -> None:  # noqa: ARG002
        self._done.set()


async def run(port: int, requests: Callable[[], bytes], *, connections: int, seconds: float) -> Result:
    """Load one port of this machine for some seconds."""
    loop, result = asyncio.get_running_loop(), Result(seconds)
    events = [asyncio.Event() for _ in range(connections)]
    until = time.perf_counter() + seconds
    for event in events:
        await loop.create_connection(lambda e=event: _Connection(requests, result, until, e), "127.0.0.1", port)
    await asyncio.gather(*(event.wait() for event in events))
    return result


def http(method: str, path: str, body: bytes) -> bytes:
    """The bytes of one request."""
    head = (
        f"{method} {path} HTTP/1.1\r\nHost: loopback\r\nContent-Type: application/json\r\nContent-Length: {len(body)}"
    )
    return f"{head}\r\n\r\n".encode() + body
