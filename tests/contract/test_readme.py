"""The calls of the README work as they are printed."""

from __future__ import annotations

import re
import shlex

import pytest
from flask.testing import FlaskClient

from tests.contract.running import ROOT


def calls() -> list[str]:
    """Every curl call in the code blocks of the README, as it stands there."""
    text = (ROOT / "README.md").read_text(encoding="utf-8")
    blocks = "\n".join(re.findall(r"```sh\n(.*?)```", text, re.DOTALL))
    return re.findall(r"^curl (?:[^'\n\\]|\\\n|'[^']*')*", blocks, re.MULTILINE)


def test_the_readme_has_calls() -> None:
    assert len(calls()) >= 5


@pytest.mark.parametrize("call", calls(), ids=lambda call: re.sub(r"\s+", " ", call)[:70])
def test_a_call_of_the_readme_is_answered(client: FlaskClient, call: str) -> None:
    words = iter(shlex.split(call.replace("\\\n", " "), comments=True)[1:])
    headers, body, path = {}, None, ""
    for word in words:
        if word in ("-H", "-d"):
            argument = next(words)
            if word == "-d":
                body = argument
            else:
                name, _, value = argument.partition(": ")
                headers[name] = value
        elif word.startswith("http://127.0.0.1:8080"):
            path = word.removeprefix("http://127.0.0.1:8080")
        else:
            assert word == "-s", f"the test does not know {word}"
    reply = client.post(path, data=body, headers=headers) if body is not None else client.get(path)
    assert reply.status_code == 200, reply.data[:500]
