"""The demonstration behind deploy/try.sh: an answer from a running service, and no process left behind."""

from __future__ import annotations

import contextlib
import os
import signal
import socket
import subprocess
import sys
import time
from collections.abc import Iterator
from typing import IO

import pytest

from tests.contract.running import PATIENCE, ROOT, environment, free_port


@contextlib.contextmanager
def demo(*arguments: str) -> Iterator[subprocess.Popen[str]]:
    """deploy/demo.py in a process group of its own, from another directory than the project's."""
    process = subprocess.Popen(
        [sys.executable, str(ROOT / "deploy" / "demo.py"), *arguments],
        cwd="/",
        env=environment(PYTHONPATH=str(ROOT)),
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        start_new_session=True,
    )
    try:
        yield process
    finally:
        with contextlib.suppress(ProcessLookupError):
            os.killpg(process.pid, signal.SIGKILL)
        process.communicate()


def group_is_empty(group: int) -> bool:
    """Whether nothing of a process group is left, within the patience."""
    deadline = time.monotonic() + PATIENCE
    while time.monotonic() < deadline:
        try:
            os.killpg(group, 0)
        except ProcessLookupError:
            return True
        time.sleep(0.05)
    return False


def read_until(stream: IO[str], words: str) -> str:
    text = ""
    for line in stream:
        text += line
        if words in line:
            return text
    raise AssertionError(text)


def test_once_prints_the_answer_and_leaves_nothing_behind() -> None:
    with demo("--once", "--port", str(free_port())) as process:
        out, err = process.communicate(timeout=PATIENCE)
        assert process.returncode == 0, err
        assert "outlet.T  374.39 degC" in out
        assert "does not replace local codes" in out
        assert group_is_empty(process.pid)


def test_a_port_that_is_taken_is_replaced_by_a_free_one() -> None:
    with socket.socket() as taken:
        taken.bind(("127.0.0.1", 0))
        taken.listen()
        port = taken.getsockname()[1]
        with demo("--once", "--port", str(port)) as process:
            out, err = process.communicate(timeout=PATIENCE)
    assert process.returncode == 0, err
    assert "POST http://127.0.0.1:" in out
    assert f":{port}/" not in out


@pytest.mark.parametrize("how", [signal.SIGINT, signal.SIGTERM])
def test_it_serves_on_until_it_is_stopped_and_then_leaves_nothing_behind(how: signal.Signals) -> None:
    with demo("--port", str(free_port())) as process:
        assert process.stdout is not None
        read_until(process.stdout, "Ctrl-C stops")
        os.killpg(process.pid, how) if how == signal.SIGINT else process.send_signal(how)  # Ctrl-C reaches the group
        assert process.wait(timeout=PATIENCE) == 0
        assert group_is_empty(process.pid)
