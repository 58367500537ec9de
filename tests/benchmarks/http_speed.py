"""Speed of preview and stored PUT as ratios to the bare route, in one run; a benchmark, not a test.

Run: python -m tests.benchmarks.http_speed [--seconds 5] [--rounds 3] [--postgresql URL]
One uvicorn worker on the first core, the load on the second.
"""

import argparse
import asyncio
import itertools
import json
import os
import socket
import subprocess
import sys
import tempfile
import time
import uuid
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from statistics import median
from urllib.request import urlopen

from faultloop.exchange.examples import EXAMPLE_REQUEST
from faultloop.records.database import open_engine
from faultloop.records.migrate import migrate
from tests.benchmarks.load import Result, http, run

BODY = json.dumps(EXAMPLE_REQUEST).encode()


def _free_port() -> int:
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        return int(probe.getsockname()[1])


@contextmanager
def server(arguments: list[str], environment: dict[str, str], path: str) -> Iterator[int]:
    """A uvicorn worker pinned to the first core, ready to answer."""
    port = _free_port()
    command = ["taskset", "-c", "0", sys.executable, "-m", "uvicorn", *arguments, "--port", str(port)]
    command += ["--log-level", "error", "--no-access-log"]
    process = subprocess.Popen(command, env={**os.environ, **environment})
    try:
        for _ in range(200):
            try:
                urlopen(f"http://127.0.0.1:{port}{path}", timeout=1).read()
                break
            except OSError:
                time.sleep(0.1)
        yield port
    finally:
        process.terminate()
        process.wait(20)


def measured(port: int, requests: Callable[[], bytes], connections: int, seconds: float) -> Result:
    """Warm up, then measure."""
    asyncio.run(run(port, requests, connections=connections, seconds=min(1.0, seconds)))
    return asyncio.run(run(port, requests, connections=connections, seconds=seconds))


def puts() -> Callable[[], bytes]:
    """A new id with every request."""
    return lambda: http("PUT", f"/v1/assessments/{uuid.uuid4()}", BODY)


def main() -> None:
    """Measure round by round, the bare route beside each, and print medians of the ratios."""
    parser = argparse.ArgumentParser()
    parser.add_argument("--seconds", type=float, default=5.0)
    parser.add_argument("--rounds", type=int, default=3)
    parser.add_argument("--connections", type=int, default=16)
    parser.add_argument("--postgresql")
    options = parser.parse_args()
    os.sched_setaffinity(0, {1})
    folder = tempfile.mkdtemp(prefix="faultloop-benchmark-")
    urls = {"sqlite": f"sqlite:///{Path(folder) / 'speed.sqlite3'}"}
    if options.postgresql:
        urls["postgresql"] = options.postgresql
    factory = ["tests.benchmarks.service:make", "--factory"]
    rows: dict[str, list[tuple[float, float, float]]] = {}
    for _, (name, url) in itertools.product(range(options.rounds), urls.items()):
        migrate(open_engine(url))
        environment = {"FAULTLOOP_DATABASE_URL": url}
        with server(["tests.benchmarks.bare:app"], {}, "/openapi.json") as bare_port:
            bare = measured(bare_port, lambda: http("POST", "/bare", BODY), options.connections, options.seconds)
        with server(factory, environment, "/health/live") as port:
            preview = measured(
                port, lambda: http("POST", "/v1/assessments/preview", BODY), options.connections, options.seconds
            )
            put = measured(port, puts(), options.connections, options.seconds)
        for what, result in (("preview", preview), (f"PUT {name}", put)):
            assert set(result.statuses) <= {200, 201}, result.statuses
            ratio = result.rate / bare.rate
            rows.setdefault(what, []).append((ratio, result.quantile(0.99) / bare.quantile(0.99), result.rate))
        print(f"bare {bare.rate:.0f}/s p99 {1000 * bare.quantile(0.99):.1f} ms", flush=True)
    for what, found in rows.items():
        ratio, tail, rate = (median(column) for column in zip(*found, strict=True))
        print(f"{what}: {ratio:.2f} of the bare route, p99 {tail:.2f} times the bare one's, {rate:.0f}/s")


if __name__ == "__main__":
    main()
