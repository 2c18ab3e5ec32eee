"""The service as it runs in production: a process that listens, logs, and ends in order."""

from __future__ import annotations

import json
import signal
import socket
import subprocess
import sys
import threading
import time
from collections.abc import Iterator

import pytest

from tests.contract.promises import let_down
from tests.contract.running import ROOT, Running, environment, service

JSON = {"Content-Type": "application/json"}
SMALL = 100_000


@pytest.fixture(scope="module")
def running() -> Iterator[Running]:
    with service(BALANCE_MAX_BODY_BYTES=str(SMALL)) as started:
        yield started


def case() -> bytes:
    return json.dumps(let_down()).encode()


def test_a_case_is_solved_over_a_real_connection(running: Running) -> None:
    status, headers, body = running.call("POST", "/v1/balances", case(), JSON)
    assert (status, headers["Content-Type"]) == (200, "application/json")
    assert json.loads(body)["status"] == "solved"


def test_a_chunked_case_is_solved_like_any_other(running: Running) -> None:
    pieces = [case()[n : n + 7] for n in range(0, len(case()), 7)]
    status, _, body = running.call("POST", "/v1/balances", iter(pieces), JSON)
    assert status == 200
    assert body == running.call("POST", "/v1/balances", case(), JSON)[2]


def test_a_chunked_body_beyond_the_limit_is_refused_and_never_cut(running: Running) -> None:
    padded = case().ljust(SMALL + 1)
    pieces = [padded[n : n + 10_000] for n in range(0, len(padded), 10_000)]
    status, headers, body = running.call("POST", "/v1/balances", iter(pieces), JSON)
    assert (status, headers["Content-Type"]) == (413, "application/problem+json")
    assert json.loads(body)["type"] == "/problems/payload-too-large"


def test_malformed_chunks_are_the_clients_error(running: Running) -> None:
    head = (
        b"POST /v1/balances HTTP/1.1\r\nHost: x\r\nContent-Type: application/json\r\nTransfer-Encoding: chunked\r\n\r\n"
    )
    with socket.create_connection(("127.0.0.1", running.port), timeout=30) as connection:
        connection.sendall(head + b"5\r\n{    \r\nzz\r\n")
        first_line = connection.makefile("rb").readline()
    assert first_line.startswith(b"HTTP/1.1 4")
    assert running.call("GET", "/livez")[0] == 200


def test_an_interrupted_service_lets_the_request_in_flight_finish_and_ends_well() -> None:
    with service() as running:
        body = case()
        with socket.create_connection(("127.0.0.1", running.port), timeout=60) as connection:
            head = (
                f"POST /v1/balances HTTP/1.1\r\nHost: x\r\nContent-Type: application/json\r\n"
                f"Content-Length: {len(body)}\r\n\r\n"
            )
            connection.sendall(head.encode() + body[:50])
            time.sleep(0.5)  # until the worker reads this body: it is in flight from then on
            running.process.send_signal(signal.SIGTERM)
            time.sleep(0.5)
            connection.sendall(body[50:])
            reply = connection.makefile("rb").read()
        assert reply.startswith(b"HTTP/1.1 200 ")
        assert json.loads(reply.partition(b"\r\n\r\n")[2])["status"] == "solved"
        running.process.communicate(timeout=60)
        assert running.process.returncode == 0


def test_the_logs_are_json_lines_with_one_number_for_one_request() -> None:
    with service() as running:
        running.call("GET", "/livez?key=secret", headers={"X-Request-Id": "shift-7.a"})
        running.call("GET", "/nothing", headers={"X-Request-Id": 'two words "'})
        status, out, err = running.stop()
    assert status == 0
    told = [json.loads(line) for line in out.splitlines()]
    assert all(json.loads(line)["level"] for line in err.splitlines() if line.startswith("{"))
    (live,) = (line for line in told if line["path"] == "/livez")
    assert (live["method"], live["status"], live["request_id"]) == ("GET", 200, "shift-7.a")
    (lost,) = (line for line in told if line["path"] == "/nothing")
    assert lost["status"] == 404
    assert len(lost["request_id"]) == 32  # its own number, since the client's was not a plain one
    assert "secret" not in out


def test_a_home_that_cannot_be_written_is_no_hindrance() -> None:
    with service(HOME="/nonexistent") as running:
        status, _, _ = running.call("POST", "/v1/balances", case(), JSON)
        assert status == 200
        assert running.stop()[0] == 0


def test_several_workers_answer_the_same_bytes() -> None:
    with service(workers=2) as running:
        bodies: list[bytes] = []
        threads = [
            threading.Thread(target=lambda: bodies.append(running.call("POST", "/v1/balances", case(), JSON)[2]))
            for _ in range(12)
        ]
        for thread in threads:
            thread.start()
        for thread in threads:
            thread.join()
        assert len(bodies) == 12
        assert len(set(bodies)) == 1


@pytest.mark.parametrize(
    ("arguments", "changed", "told"),
    [
        (["serve"], {"BALANCE_PROT": "80"}, "Did you mean BALANCE_PORT?"),
        (["serve", "--port", "99999"], {}, "BALANCE_PORT"),
        (["serve", "--workers", "-1"], {}, "BALANCE_WORKERS"),
    ],
)
def test_a_wrong_setting_stops_the_start_with_a_hint(arguments: list[str], changed: dict[str, str], told: str) -> None:
    done = subprocess.run(
        [sys.executable, "-m", "service", *arguments],
        cwd=ROOT,
        env=environment(**changed),
        capture_output=True,
        text=True,
        timeout=60,
    )
    assert done.returncode == 2
    assert told in done.stderr
    assert "Traceback" not in done.stderr
