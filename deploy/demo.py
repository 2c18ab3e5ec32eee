"""Start the service, solve a demo case over HTTP, print the answer readably; then serve on, or stop."""

from __future__ import annotations

import argparse
import contextlib
import http.client
import os
import signal
import socket
import subprocess
import sys
import time
from collections.abc import Iterator
from pathlib import Path

from service.settings import PREFIX
from service.wire.json_text import loads
from service.wire.readable import readable

ROOT = Path(__file__).resolve().parent.parent
DEMO = ROOT / "schemas" / "examples" / "let-down-valve.json"
HOST = "127.0.0.1"
PATIENCE = 120.0
"""Seconds that the service may take until it is ready."""


def main() -> int:
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--once", action="store_true", help="stop after the answer")
    parser.add_argument("--port", type=int, default=8080, help="port to serve on; a free one where it is taken")
    options = parser.parse_args()
    signal.signal(signal.SIGTERM, _stop)
    try:
        return demonstrate(free_port(options.port), options.once)
    except KeyboardInterrupt:
        return 0


def demonstrate(port: int, once: bool) -> int:
    """Serve, solve and print; then serve on until the service ends, or stop. Returns the exit status."""
    with serving(port) as server:
        if not ready(port, server):
            print("The service did not start; its messages are above.", file=sys.stderr)
            return 1
        print(f"\nPOST http://{HOST}:{port}/v1/balances with {DEMO.relative_to(ROOT)} answers:\n")
        status, body = post(port, "/v1/balances", DEMO.read_bytes())
        if status != 200:
            print(body.decode(), file=sys.stderr)
            return 1
        print(readable(loads(body)), flush=True)
        if once:
            return 0
        print(f"Serving on http://{HOST}:{port}, for reading at http://{HOST}:{port}/docs. Ctrl-C stops.", flush=True)
        return server.wait()


@contextlib.contextmanager
def serving(port: int) -> Iterator[subprocess.Popen[bytes]]:
    """The service as a process of its own, which ends with the block whatever happens."""
    environment = {name: value for name, value in os.environ.items() if not name.startswith(PREFIX)}
    environment[f"{PREFIX}LOG_LEVEL"] = "warning"
    command = [sys.executable, "-m", "service", "serve", "--host", HOST, "--port", str(port)]
    server = subprocess.Popen(command, cwd=ROOT, env=environment)
    try:
        yield server
    finally:
        signal.signal(signal.SIGINT, signal.SIG_IGN)  # a second Ctrl-C must not leave the service behind
        server.terminate()
        try:
            server.wait(timeout=30)
        except subprocess.TimeoutExpired:
            server.kill()
            server.wait()


def free_port(wanted: int) -> int:
    """The wanted port, or any free one where it is taken."""
    for candidate in (wanted, 0):
        with socket.socket() as listener, contextlib.suppress(OSError):
            listener.setsockopt(socket.SOL_SOCKET, socket.SO_REUSEADDR, 1)
            listener.bind((HOST, candidate))
            return int(listener.getsockname()[1])
    raise SystemExit(f"No port is free on {HOST}.")


def ready(port: int, server: subprocess.Popen[bytes]) -> bool:
    """Wait until the service is ready; False where it ended or took too long."""
    deadline = time.monotonic() + PATIENCE
    while server.poll() is None and time.monotonic() < deadline:
        with contextlib.suppress(OSError, http.client.HTTPException):
            if call(port, "GET", "/readyz")[0] == 200:
                return True
        time.sleep(0.2)
    return False


def post(port: int, path: str, body: bytes) -> tuple[int, bytes]:
    """(status, body) of a POST."""
    return call(port, "POST", path, body, {"Content-Type": "application/json"})


def call(
    port: int, method: str, path: str, body: bytes | None = None, headers: dict[str, str] | None = None
) -> tuple[int, bytes]:
    connection = http.client.HTTPConnection(HOST, port, timeout=30)
    try:
        connection.request(method, path, body, headers or {})
        answer = connection.getresponse()
        return answer.status, answer.read()
    finally:
        connection.close()


def _stop(*_: object) -> None:
    raise SystemExit(0)


if __name__ == "__main__":
    sys.exit(main())
