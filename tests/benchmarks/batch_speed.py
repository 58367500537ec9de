"""Speed of a file of 10,000 rows over HTTP, in points a second on one core; a benchmark, not a test.

Run: python -m tests.benchmarks.batch_speed [--rounds 7] [--profile]
One uvicorn worker on the first core, storing on SQLite; the client on the second. `--profile` prints the shares of
the steps inside one process instead.
"""

import argparse
import csv
import gc
import io
import os
import random
import tempfile
import time
from collections.abc import Callable
from pathlib import Path
from statistics import median
from urllib.request import Request, urlopen

from faultloop.digests import json_bytes
from faultloop.exchange.batch_answers import answer, answer_csv
from faultloop.exchange.batches import BatchQuery
from faultloop.exchange.judging import judged
from faultloop.exchange.uploads import Upload, read_upload
from faultloop.records.batches import keep_batch
from faultloop.records.database import open_engine
from faultloop.records.migrate import migrate
from faultloop.records.tables import BatchRecord
from tests.assessment import workshop
from tests.benchmarks.http_speed import worker

ROWS = 10_000


def file(circuits: int) -> bytes:
    """Rows with readings of their own on so many different circuits (a row's length is its own too)."""
    chance, base = random.Random(20261201), workshop.rows()
    out = io.StringIO()
    writer = csv.DictWriter(out, list(base[0]))
    writer.writeheader()
    for at in range(ROWS):
        row = dict(base[at % len(base)]) | {"point_id": f"P{at:05d}", "length_m": str(chance.randint(3, 80))}
        row["breaking_capacity_ka"] = f"{6 + at % circuits // len(base) / 100:g}"
        for name in (*workshop.LOOPS, "residual_operating_time_ms"):
            if row[name].replace(".", "").isdigit():
                row[name] = f"{float(row[name]) * chance.uniform(0.9, 1.1):.2f}"
        writer.writerow(row)
    return out.getvalue().encode()


def cpu_seconds(pid: int) -> float:
    """Processor time that a process has used."""
    fields = Path(f"/proc/{pid}/stat").read_text().rsplit(")", 1)[1].split()
    return (int(fields[11]) + int(fields[12])) / os.sysconf("SC_CLK_TCK")


def over_http(content: bytes, accept: str, rounds: int) -> tuple[float, float]:
    """Points a second: by the clock (median), and by the processor time of the worker."""
    with tempfile.TemporaryDirectory(prefix="faultloop-benchmark-") as folder:
        url = f"sqlite:///{Path(folder) / 'batches.sqlite3'}"
        migrate(open_engine(url))
        factory, environment = ["tests.benchmarks.service:make", "--factory"], {"FAULTLOOP_DATABASE_URL": url}
        with worker(factory, environment, "/health/live") as (port, pid):
            headers = {"Content-Type": "text/csv", "Accept": accept}
            seconds, used = [], 0.0
            for at in range(rounds + 2):
                if at == 2:  # the first two warm up
                    used = cpu_seconds(pid)
                request = Request(f"http://127.0.0.1:{port}/v1/batches", content, headers)
                began = time.perf_counter()
                with urlopen(request, timeout=60) as answered:
                    answered.read()
                seconds.append(time.perf_counter() - began)
            used = cpu_seconds(pid) - used
    return ROWS / median(seconds[2:]), ROWS * rounds / used


def shares(content: bytes) -> None:
    """Print how long each step takes, best of several."""
    gc.collect()
    gc.freeze()
    gc.set_threshold(20_000, 50, 100)  # as the service sets it
    upload = Upload("csv", content, BatchQuery())
    read = read_upload(upload)
    batch = judged(read.rows)
    body = answer(batch, "x", read.reading, upload.input_digest)
    with tempfile.TemporaryDirectory(prefix="faultloop-benchmark-") as folder:
        engine = open_engine(f"sqlite:///{Path(folder) / 'batches.sqlite3'}")
        migrate(engine)
        names = iter(range(1000))

        def store() -> object:
            counts, kept = body["counts"], json_bytes(body)
            digests = {"input_digest": "a" * 64, "devices_digest": "a" * 64}
            record = BatchRecord(
                id=str(next(names)), format="csv", engine="x", parameters=b"{}", content=content, answer=kept,
                **counts, **digests,
            )  # fmt: skip
            return keep_batch(engine, record)

        steps: dict[str, Callable[[], object]] = {
            "read (cells, patterns)": lambda: read_upload(upload),
            "judge (decide, compact rows)": lambda: judged(read.rows),
            "answer (bodies)": lambda: answer(batch, "x", read.reading, ""),
            "JSON": lambda: json_bytes(body),
            "store (JSON, zlib, COMMIT)": store,
            "CSV answer instead": lambda: answer_csv(batch),
        }
        print(f"{len(read.rows.told)} patterns")
        for name, step in steps.items():
            print(f"  {name}: {1e3 * min(_timed(step) for _ in range(5)):.1f} ms")


def _timed(step: Callable[[], object]) -> float:
    began = time.perf_counter()
    step()
    return time.perf_counter() - began


def main() -> None:
    """Measure files of few and of many circuits."""
    parser = argparse.ArgumentParser()
    parser.add_argument("--rounds", type=int, default=7)
    parser.add_argument("--profile", action="store_true")
    options = parser.parse_args()
    os.sched_setaffinity(0, {1})
    for circuits in (40, 400, 4000):
        content = file(circuits)
        print(f"{ROWS} rows, {circuits} circuits, {len(content) / 1e6:.1f} MB")
        if options.profile:
            shares(content)
            continue
        for accept in ("application/json", "text/csv"):
            clock, processor = over_http(content, accept, options.rounds)
            print(f"  {accept}: {clock:.0f} points/s by the clock, {processor:.0f} points/s of processor time")


if __name__ == "__main__":
    main()
