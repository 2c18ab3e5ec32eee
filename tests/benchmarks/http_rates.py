"""Requests per second of the running service, against a bare Flask endpoint that does the same two flashes.

Both run under gunicorn with the same two sync workers, one after the other in alternating rounds, and are loaded by the
same client: threads with one request in flight each.
"""

from __future__ import annotations

import http.client
import json
import os
import socket
import statistics
import subprocess
import sys
import threading
import time
from pathlib import Path

from tests.benchmarks.cases import let_down_valve

ROOT = Path(__file__).resolve().parents[2]
ROUNDS, SECONDS, CLIENTS = 8, 1.5, 8


def compare_http() -> None:
    print("\nHTTP: let-down valve, POST /v1/balances, two workers (requests per second)")
    body = json.dumps(let_down_valve()).encode()
    ports = free_port(), free_port()
    service = [
        sys.executable,
        "-m",
        "service",
        "serve",
        "--host",
        "127.0.0.1",
        "--port",
        str(ports[0]),
        "--workers",
        "2",
    ]
    bare = [sys.executable, "-m", "gunicorn", "-b", f"127.0.0.1:{ports[1]}", "-w", "2", "--preload",
            "--log-level", "error", "--no-control-socket", "tests.benchmarks.bare_endpoint:app"]  # fmt: skip
    quiet = {**os.environ, "BALANCE_LOG_LEVEL": "warning"}  # the bare endpoint writes no access log either
    servers = [
        subprocess.Popen(c, cwd=ROOT, env=quiet, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
        for c in (service, bare)
    ]
    try:
        wait_for(ports[0], "/readyz")
        wait_for(ports[1], "/readyz")
        rates: tuple[list[float], list[float]] = ([], [])
        for _ in range(ROUNDS):
            for i in (0, 1):
                rates[i].append(load(ports[i], body))
    finally:
        for server in servers:
            server.terminate()
            server.wait(timeout=40)
    ours, theirs = statistics.median(rates[0]), statistics.median(rates[1])
    ratio = statistics.median(a / b for a, b in zip(*rates, strict=True))
    print(f"{'service':>10}{'bare':>10}{'ratio':>8}\n{ours:10.0f}{theirs:10.0f}{ratio:8.2f}")


def free_port() -> int:
    with socket.socket() as s:
        s.bind(("127.0.0.1", 0))
        return int(s.getsockname()[1])


def wait_for(port: int, path: str) -> None:
    for _ in range(300):
        try:
            connection = http.client.HTTPConnection("127.0.0.1", port, timeout=2)
            connection.request("GET", path)
            if connection.getresponse().status == 200:
                return
        except OSError:
            pass
        time.sleep(0.1)
    raise RuntimeError(f"nothing answers on port {port}")


def load(port: int, body: bytes) -> float:
    """Answered requests per second with CLIENTS threads; a wrong status stops the run."""
    stop = time.monotonic() + SECONDS
    counts = [0] * CLIENTS
    request = (
        f"POST /v1/balances HTTP/1.1\r\nHost: 127.0.0.1:{port}\r\nContent-Type: application/json\r\n"
        f"Content-Length: {len(body)}\r\nConnection: close\r\n\r\n"
    ).encode() + body

    def client(number: int) -> None:
        while time.monotonic() < stop:
            with socket.create_connection(("127.0.0.1", port)) as s:
                s.sendall(request)
                answer = b""
                while piece := s.recv(1 << 16):
                    answer += piece
            if not answer.startswith(b"HTTP/1.1 200"):
                raise RuntimeError(answer[:300].decode(errors="replace"))
            counts[number] += 1

    threads = [threading.Thread(target=client, args=(i,)) for i in range(CLIENTS)]
    for t in threads:
        t.start()
    for t in threads:
        t.join()
    return sum(counts) / SECONDS


if __name__ == "__main__":
    os.chdir(ROOT)
    compare_http()
