"""A bench with all its what-ifs over HTTP beside a bare route with the same bodies, in one run.

Run: python -m tests.benchmarks.bench_speed [--seconds 1] [--rounds 7]
The bare route validates the same body and answers a ready answer through its model.
"""

import argparse
import json
import os
import tempfile
from pathlib import Path
from statistics import median

from faultloop.exchange.examples import EXAMPLE_BENCH, EXAMPLE_SEPARATED
from faultloop.records.database import open_engine
from faultloop.records.migrate import migrate
from tests.assessment.bench_bodies import Body, clip_case
from tests.benchmarks.http_speed import alternated, server
from tests.benchmarks.load import http

# What is asked, of which bare route, and of which of the service.
ASKED: dict[str, tuple[Body, str, str]] = {
    "a separated supply": (EXAMPLE_SEPARATED, "/bare-supply", "/v1/separated-supplies"),
    "a bench of 2 items": (EXAMPLE_BENCH, "/bare-bench", "/v1/bench-networks"),
    "a bench of 9 items": (clip_case(), "/bare-bench", "/v1/bench-networks"),
}


def main() -> None:
    """Load both routes in turn with each bench, print the ratio and the difference of the medians."""
    parser = argparse.ArgumentParser()
    parser.add_argument("--seconds", type=float, default=1.0, help="length of a slice")
    parser.add_argument("--rounds", type=int, default=7)
    options = parser.parse_args()
    os.sched_setaffinity(0, {1})
    with tempfile.TemporaryDirectory(prefix="faultloop-benchmark-") as folder:
        url = f"sqlite:///{Path(folder) / 'speed.sqlite3'}"
        migrate(open_engine(url))
        factory = ["tests.benchmarks.service:make", "--factory"]
        single = {"OMP_NUM_THREADS": "1", "OPENBLAS_NUM_THREADS": "1"}
        with (
            server(["tests.benchmarks.bare:app"], single, "/openapi.json") as bare,
            server(factory, {"FAULTLOOP_DATABASE_URL": url, **single}, "/health/live") as port,
        ):
            for name, (body, beside, path) in ASKED.items():
                sent = json.dumps(body).encode()
                targets = {
                    "bare": (bare, lambda sent=sent, path=beside: http("POST", path, sent)),
                    "bench": (port, lambda sent=sent, path=path: http("POST", path, sent)),
                }
                found = alternated(targets, connections=1, seconds=options.seconds, rounds=options.rounds)
                times = {target: median(1000.0 * r.quantile(0.5) for r in results) for target, results in found.items()}
                difference, ratio = times["bench"] - times["bare"], times["bench"] / times["bare"]
                print(f"{name}: {times['bench']:.2f} ms, {difference:.2f} ms over the bare route, {ratio:.1f} times it")


if __name__ == "__main__":
    main()
