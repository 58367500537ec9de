"""Schemathesis in all its phases against a live service, configured in schemathesis.toml beside this file."""

import re
import subprocess
import sys
from pathlib import Path

from tests.trials.running import database, service

LEAST_CASES = 2000


def run() -> str:
    """Run it; a failure, or too few cases, fails the trial."""
    with database("sqlite") as url, service(url) as port:
        config = Path(__file__).parent / "schemathesis.toml"
        command = [Path(sys.executable).parent / "schemathesis", "--config-file", config, "run"]
        address = f"http://127.0.0.1:{port}/openapi.json"
        done = subprocess.run([*command, address], capture_output=True, text=True, timeout=900, check=False)
    told = re.search(r"(\d+) generated", done.stdout)
    cases = int(told[1]) if told else 0
    if done.returncode or cases < LEAST_CASES:
        raise AssertionError(f"{cases} cases, status {done.returncode}\n{done.stdout[-6000:]}")
    return f"{cases} cases, no failure"
