"""Start the service, solve a demo case over HTTP, print the answer readably; then serve on, or stop."""

from __future__ import annotations

import argparse
import contextlib
import http.client
import signal
import socket
import subprocess
import sys
import time
from pathlib import Path

from service.wire.json_text import loads
from service.wire.readable import readable

ROOT = Path(__file__).resolve().parent.parent
DEMO = ROOT / "schemas" / "examples" / "let-down-valve.json"


def main() -> int:
    options = argparse.ArgumentParser()
    options.add_argument("--once", choices=("yes", "no"), default="no")
    options.add_argument("--port", type=int, default=8080)
    chosen = options.parse_args()
    port = free_port(chosen.port)
    server = subprocess.Popen(
        [sys.executable, "-m", "service", "serve", "--host", "127.0.0.1", "--port", str(port)], cwd=ROOT
    )
    signal.signal(signal.SIGTERM, lambda *_: server.terminate())
    try:
        if not answers(port, server):
            print("The service did not start; its messages are above.", file=sys.stderr)
            return 1
        print(f"\nPOST http://127.0.0.1:{port}/v1/balances with {DEMO.relative_to(ROOT)} answers:\n")
        status, body = post(port, "/v1/balances", DEMO.read_bytes())
        print(readable(loads(body)) if status == 200 else body.decode())
        if chosen.once == "yes" or status != 200:
            return 0 if status == 200 else 1
        print(f"Serving on http://127.0.0.1:{port} (the contract is at /docs). Ctrl-C stops.", flush=True)
        return server.wait()
    except KeyboardInterrupt:
        return 0
    finally:
        server.terminate()
        with contextlib.suppress(KeyboardInterrupt):
            server.wait()


def free_port(wanted: int) -> int:
    """The wanted port, or any free one where it is taken."""
    for candidate in (wanted, 0):
        with socket.socket() as s, contextlib.suppress(OSError):
            s.setsockopt(socket.SOL_SOCKET, socket.SO_REUSEADDR, 1)
            s.bind(("127.0.0.1", candidate))
            return int(s.getsockname()[1])
    raise SystemExit("No port is free on 127.0.0.1.")


def answers(port: int, server: subprocess.Popen[bytes]) -> bool:
    """Wait until the service is ready, at most a minute."""
    for _ in range(300):
        if server.poll() is not None:
            return False
        with contextlib.suppress(OSError):
            connection = http.client.HTTPConnection("127.0.0.1", port, timeout=5)
            connection.request("GET", "/readyz")
            if connection.getresponse().status == 200:
                return True
        time.sleep(0.2)
    return False


def post(port: int, path: str, body: bytes) -> tuple[int, bytes]:
    connection = http.client.HTTPConnection("127.0.0.1", port, timeout=30)
    connection.request("POST", path, body, {"Content-Type": "application/json"})
    answer = connection.getresponse()
    return answer.status, answer.read()


if __name__ == "__main__":
    sys.exit(main())
