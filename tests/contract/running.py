"""The service as a process of its own, and raw connections to it."""

from __future__ import annotations

import contextlib
import http.client
import os
import signal
import socket
import subprocess
import sys
import time
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

ROOT = Path(__file__).resolve().parents[2]
PATIENCE = 60.0
"""Seconds that a start or an end may take on a loaded machine; no measure of speed."""


@dataclass
class Running:
    """A service that listens on `port`."""

    process: subprocess.Popen[str]
    port: int

    def call(
        self, method: str, path: str, body: Any = None, headers: Mapping[str, str] | None = None
    ) -> tuple[int, dict[str, str], bytes]:
        """(status, headers, body) of a call; an iterable body is sent in chunks."""
        connection = http.client.HTTPConnection("127.0.0.1", self.port, timeout=PATIENCE)
        with contextlib.closing(connection):
            connection.request(method, path, body, dict(headers or {}))
            reply = connection.getresponse()
            return reply.status, dict(reply.getheaders()), reply.read()

    def stop(self, how: signal.Signals = signal.SIGTERM) -> tuple[int, str, str]:
        """(exit status, standard output, standard error) after the signal."""
        self.process.send_signal(how)
        out, err = self.process.communicate(timeout=PATIENCE)
        return self.process.returncode, out, err


def free_port() -> int:
    with socket.socket() as listener:
        listener.bind(("127.0.0.1", 0))
        return int(listener.getsockname()[1])


def environment(**changed: str) -> dict[str, str]:
    """The process's own environment without our settings, and with the changes."""
    return {k: v for k, v in os.environ.items() if not k.startswith("BALANCE_")} | changed


@contextlib.contextmanager
def service(workers: int = 1, **changed: str) -> Iterator[Running]:
    """`python -m service serve` on a free port, ready; killed at the end where a test left it running."""
    port = free_port()
    command = [sys.executable, "-m", "service", "serve", "--port", str(port), "--workers", str(workers)]
    process = subprocess.Popen(
        command, cwd=ROOT, env=environment(**changed), stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True
    )
    running = Running(process, port)
    try:
        wait_until_ready(running)
        yield running
    finally:
        if process.poll() is None:
            process.terminate()
            with contextlib.suppress(subprocess.TimeoutExpired):
                process.communicate(timeout=PATIENCE)
        if process.poll() is None:
            process.kill()
            process.communicate()


def wait_until_ready(running: Running) -> None:
    deadline = time.monotonic() + PATIENCE
    while time.monotonic() < deadline:
        if running.process.poll() is not None:
            raise AssertionError(running.process.communicate()[1])
        with contextlib.suppress(OSError, http.client.HTTPException):
            if running.call("GET", "/readyz")[0] == 200:
                return
        time.sleep(0.1)
    raise AssertionError("the service did not become ready")
